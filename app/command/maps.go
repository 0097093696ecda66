package command

import (
	"context"
	"fmt"
	"image"
	"io"
	"os"
	"path/filepath"

	"pavilight/app/disk"
	"pavilight/app/picture"
	"pavilight/trace"
)

// outFolder is where look writes its pictures.
type outFolder struct {
	path    string
	written []string // names of the files written, in order
}

// openOut makes the folder if it is not there and makes sure that files can be
// written into it.
func openOut(path string) (*outFolder, error) {
	if err := os.MkdirAll(path, 0o755); err != nil {
		return nil, unwritable(path, err)
	}
	if err := disk.Writable(path); err != nil {
		return nil, unwritable(path, err)
	}
	return &outFolder{path: path}, nil
}

// shown is one row of maps.
type shown struct {
	quantity trace.Quantity
	file     string // beginning of the file's name
	title    string
	colours  *picture.ColourMap
	legend   string
}

// shownRows are the rows of the sheet.
func shownRows() []shown {
	return []shown{
		{trace.Returned, "return", "Light return", picture.Cividis(),
			"share of the viewing ray that leaves upward, past the head"},
		{trace.Leaked, "leakage", "Leakage", picture.Cubehelix(),
			"share of the viewing ray that leaves downward"},
	}
}

// write writes a picture of each quantity in each medium, and the sheet of them all.
func (f *outFolder) write(ctx context.Context, s *subject, report *lookResult, result *trace.Result, looks []trace.Appearance) error {
	sheet := picture.Sheet{
		Title:  report.Plan,
		Lines:  []string{report.stoneWords(s), report.viewWords()},
		Legend: "Share of the viewing ray, 0 to 1; ± is the standard error. A map is a model: it grades no stone.",
	}
	for _, row := range shownRows() {
		var plates []picture.Plate
		for i := range result.Columns {
			column, medium := &result.Columns[i], &report.Media[i]
			around := fmt.Sprintf("in %s%s, index %.4f", medium.Name, dishWord(medium.Arrangement), medium.IndexMedium)
			critical := "critical angle " + inDegrees(medium.CriticalDeg, "there is none")
			plate := picture.Plate{
				Title:  row.title,
				Medium: around,
				Legend: row.legend,
				Lines: []string{
					fmt.Sprintf("mean %s, %s", withError(row.quantity.Of(medium.Ledger), row.quantity.Of(medium.StandardError)), critical),
					report.Plan + ", " + report.stoneWords(s),
					report.viewWords(),
				},
				Field:   column.Map.Field(row.quantity),
				Pixels:  column.Map.Pixels,
				Colours: row.colours,
			}
			img, err := picture.Single(plate)
			if err != nil {
				return err
			}
			if err := f.png(ctx, fmt.Sprintf("%s-%s.png", row.file, medium.fileWord()), img); err != nil {
				return err
			}
			plates = append(plates, plate)
		}
		sheet.Rows = append(sheet.Rows, plates)
	}
	for i := range report.Media {
		sheet.Ledger = append(sheet.Ledger, ledgerLines(&report.Media[i]))
	}
	for i := range looks {
		if err := f.png(ctx, fmt.Sprintf("colour-%s.png", report.Media[i].fileWord()), trueColour(&looks[i])); err != nil {
			return err
		}
	}
	img, err := sheet.Draw()
	if err != nil {
		return err
	}
	return f.png(ctx, "maps.png", img)
}

// ledgerLines are the numbers under a column of the sheet.
func ledgerLines(m *lookMedium) []string {
	lines := []string{"critical angle " + inDegrees(m.CriticalDeg, "there is none")}
	for q := trace.Surface; q <= trace.Unresolved; q++ {
		lines = append(lines, fmt.Sprintf("%s %s", q, withError(q.Of(m.Ledger), q.Of(m.StandardError))))
	}
	return append(lines, fmt.Sprintf("leaky area %.4f, windowed area %.4f", m.LeakyArea, m.WindowedArea))
}

// trueColour is the picture as an eye sees it that is used to the light, a place as
// bright as the white diffuser at two thirds of the screen's white.
func trueColour(a *trace.Appearance) image.Image {
	const expose = 2.0 / 3
	display := trace.NewDisplay(a.Light.Illuminant.White(), expose)
	return picture.Seen(a.XYZ, a.Pixels, display.Colour)
}

// fileWord is the column's name in files.
func (m *lookMedium) fileWord() string {
	word := fileWord(m.Name)
	if m.Arrangement == "dish" {
		word += "-dish"
	}
	return word
}

// fileWord makes a name fit for a file: letters, digits, dot, dash.
func fileWord(name string) string {
	out := []rune(name)
	for i, r := range out {
		if !(r >= 'a' && r <= 'z' || r >= 'A' && r <= 'Z' || r >= '0' && r <= '9' || r == '.' || r == '-') {
			out[i] = '-'
		}
	}
	return string(out)
}

func (f *outFolder) png(ctx context.Context, name string, img image.Image) error {
	if err := context.Cause(ctx); err != nil {
		return err
	}
	path := filepath.Join(f.path, name)
	if err := disk.Replace(path, func(w io.Writer) error { return picture.EncodePNG(w, img) }); err != nil {
		return ownFault(err)
	}
	f.written = append(f.written, name)
	return nil
}
