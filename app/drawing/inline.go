package drawing

import (
	"fmt"
	"io"
)

// Inline writes the page as an svg element that can stand within a page for a browser
// (HTML Living Standard, 4.8.16): it grows to the width it is given and brings no
// typefaces, which the page around it must have under the name Go.
func (p *Page) Inline(w io.Writer) error {
	out := &svgPainter{}
	fmt.Fprintf(&out.b, `<svg viewBox="0 0 %s %s">`+"\n", length(p.Width), length(p.Height))
	p.paintAll(out)
	out.b.WriteString("</svg>\n")
	if out.err != nil {
		return out.err
	}
	_, err := w.Write(out.b.Bytes())
	return err
}
