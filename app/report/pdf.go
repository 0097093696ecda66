package report

import (
	"io"
	"strconv"

	"pavilight/app/drawing"
)

// PDF writes a report of one stone on pages of paper.
func PDF(w io.Writer, f *Findings, cover *Cover) error {
	d, err := compose(f, cover)
	if err != nil {
		return err
	}
	return d.pdf(w)
}

// pdf writes the document as PDF.
func (d *document) pdf(w io.Writer) error {
	out := drawing.Document{
		Title: d.fileTitle(), Author: d.cover.Author, Subject: d.words.say("report"), Creator: d.cover.Program,
		Language: d.cover.Language,
		Date:     d.cover.Date, Pages: d.pages(),
	}
	return out.PDF(w)
}

// setter sets parts on pages: it keeps the current page and how far it is filled.
type setter struct {
	doc   *document
	pages []*drawing.Page
	page  *drawing.Page
	y     float64 // upper edge of what is free, mm
	left  float64
	dry   bool // only measure
}

// The white above and below the type area, mm.
const (
	topMargin    = 12.0
	bottomMargin = 15.0
)

// pages sets the whole document.
func (d *document) pages() []*drawing.Page {
	s := &setter{doc: d, left: (d.cover.Paper.Width - contentWidth) / 2}
	s.start()
	s.top()
	for _, p := range d.parts {
		s.set(p)
	}
	s.foot()
	return s.pages
}

func (s *setter) bottom() float64 { return s.doc.cover.Paper.Height - bottomMargin }

func (s *setter) start() {
	s.page = &drawing.Page{Width: s.doc.cover.Paper.Width, Height: s.doc.cover.Paper.Height}
	if len(s.pages) == 0 {
		s.page.Bookmark = s.doc.title
	}
	s.pages = append(s.pages, s.page)
	s.y = topMargin
}

// need begins a further page where less than the height is free.
func (s *setter) need(height float64) {
	if !s.dry && s.y+height > s.bottom() && s.y > topMargin {
		s.start()
	}
}

// The largest letterhead, mm.
const (
	letterheadWidth  = contentWidth
	letterheadHeight = 22.0
)

// top sets letterhead and title.
func (s *setter) top() {
	d := s.doc
	if img := d.cover.Letterhead; img != nil {
		size := img.Bounds().Size()
		k := min(letterheadWidth/float64(size.X), letterheadHeight/float64(size.Y))
		s.page.Place(img, pt(s.left, s.y), k*float64(size.X), k*float64(size.Y))
		s.y += k*float64(size.Y) + 5
	}
	title := drawing.Type{Size: 20, Bold: true}
	for _, line := range title.Wrap(d.title, contentWidth) {
		s.page.Write(title, black(), drawing.Left, pt(s.left, s.y+title.Height()), line)
		s.y += title.Leading()
	}
	s.y += 0.5
	for _, line := range d.lines {
		s.paragraph(body(), pale(), line)
	}
	s.y += 1
}

func (s *setter) paragraph(t drawing.Type, i drawing.Ink, words string) {
	for _, line := range t.Wrap(words, contentWidth) {
		s.need(t.Leading())
		if !s.dry {
			s.page.Write(t, i, drawing.Left, pt(s.left, s.y+0.8*t.Leading()), line)
		}
		s.y += t.Leading()
	}
}

// height measures parts.
func (s *setter) height(parts []part) float64 {
	probe := setter{doc: s.doc, left: s.left, dry: true, y: topMargin + 1, page: &drawing.Page{}}
	for _, p := range parts {
		probe.set(p)
	}
	return probe.y - topMargin - 1
}

// headRoom is what must be free below a heading.
const headRoom = 20

func (s *setter) set(p part) {
	switch p := p.(type) {
	case together:
		s.need(s.height(p.parts))
		for _, one := range p.parts {
			s.set(one)
		}
	case heading:
		s.heading(p)
	case text:
		t, i := body(), black()
		if p.small {
			t, i = small(), pale()
		}
		if p.bold {
			t = strong()
		}
		s.paragraph(t, i, p.words)
		s.y += 1.6
	case beside:
		s.beside(p)
	case columnsOf:
		s.columns(p)
	case plates:
		s.need(platesHeight(p, 0))
		s.plates(p, s.left)
		s.y += platesHeight(p, 0) + 1
	case figure:
		s.need(p.page.Height + 2)
		if !s.dry {
			s.page.Marks = append(s.page.Marks, moved(p.page.Marks, s.left, s.y)...)
		}
		s.y += p.page.Height + 2
	case table:
		s.table(p)
	case list:
		s.list(p)
	}
}

func (s *setter) heading(h heading) {
	t := drawing.Type{Size: 12.5, Bold: true}
	s.need(headRoom)
	if s.y > topMargin+2 {
		s.y += 3
	}
	if !s.dry {
		s.page.Line(drawing.Style{Stroke: drawing.Grey(0x70), Width: 0.3}, pt(s.left, s.y), pt(s.left+contentWidth, s.y))
		s.page.Write(t, black(), drawing.Left, pt(s.left, s.y+2.4+t.Height()), h.words)
	}
	s.y += 2.4 + t.Height() + 2.4
}

// platesGap is the white between pictures, mm.
const platesGap = 4.0

// platesWidth is the width of pictures side by side.
func platesWidth(p plates) float64 {
	return float64(len(p.items))*(p.edge+platesGap) - platesGap
}

// platesTitle is how many lines the titles of pictures take.
func platesTitle(p plates) int {
	lines := 1
	for _, one := range p.items {
		lines = max(lines, len(note().Wrap(one.title, p.edge)))
	}
	return lines
}

// platesHeight is the height of pictures with titles and captions.
func platesHeight(p plates, least float64) float64 {
	captions := 0
	for _, one := range p.items {
		captions = max(captions, len(small().Wrap(one.caption, p.edge)))
	}
	return max(least, float64(platesTitle(p))*note().Leading()+1+p.edge+float64(captions)*small().Leading()+1)
}

// plates sets pictures side by side from x on.
func (s *setter) plates(p plates, left float64) {
	if s.dry {
		return
	}
	lines := platesTitle(p)
	for i, one := range p.items {
		x := left + float64(i)*(p.edge+platesGap)
		wrapped := note().Wrap(one.title, p.edge)
		for k, line := range wrapped {
			s.page.Write(note(), black(), drawing.Left, pt(x, s.y+note().Leading()*(float64(k+lines-len(wrapped))+0.75)), line)
		}
		y := s.y + float64(lines)*note().Leading() + 1
		s.page.Place(one.image, pt(x, y), p.edge, p.edge)
		for k, line := range small().Wrap(one.caption, p.edge) {
			s.page.Write(small(), pale(), drawing.Left, pt(x, y+p.edge+0.4+small().Leading()*(float64(k)+0.8)), line)
		}
	}
}

// beside sets paragraphs on the left and pictures on the right.
func (s *setter) beside(b beside) {
	const gap = 6.0
	wide := contentWidth - platesWidth(b.plates) - gap
	height := 0.0
	for _, t := range b.texts {
		height += float64(len(body().Wrap(t.words, wide)))*body().Leading() + 1.6
	}
	height = platesHeight(b.plates, height)
	s.need(height)
	s.plates(b.plates, s.left+wide+gap)
	y := s.y
	for _, t := range b.texts {
		for _, line := range body().Wrap(t.words, wide) {
			if !s.dry {
				s.page.Write(body(), black(), drawing.Left, pt(s.left, y+0.8*body().Leading()), line)
			}
			y += body().Leading()
		}
		y += 1.6
	}
	s.y += height + 1
}

// columns sets columns of short paragraphs.
func (s *setter) columns(c columnsOf) {
	const gap = 8.0
	wide := (contentWidth - gap) / 2
	needed := 0.0
	for _, column := range c {
		height := 0.0
		for _, words := range column {
			height += float64(len(body().Wrap(words, wide)))*body().Leading() + 0.8
		}
		needed = max(needed, height)
	}
	s.need(needed)
	tallest := 0.0
	for i, column := range c {
		y := s.y
		for _, words := range column {
			for _, line := range body().Wrap(words, wide) {
				if !s.dry {
					s.page.Write(body(), black(), drawing.Left, pt(s.left+float64(i)*(wide+gap), y+0.8*body().Leading()), line)
				}
				y += body().Leading()
			}
			y += 0.8
		}
		tallest = max(tallest, y-s.y)
	}
	s.y += tallest + 1
}

// table sets a table: the first column as wide as its words, the others share the rest.
func (s *setter) table(t table) {
	const most, least = 62.0, 34.0
	cell, head := small(), note()
	first, widest := 0.0, 0.0
	for _, r := range t.rows {
		first = max(first, cell.Width(r[0])+3)
		for _, words := range r[1:] {
			widest = max(widest, cell.Width(words)+2)
		}
	}
	n := float64(len(t.head) - 1)
	first = min(first, most, max(least, contentWidth-n*widest))
	wide := (contentWidth - first) / n
	if !t.wide {
		wide = min(wide, 34)
	}
	line := func(cells []string, t drawing.Type, i drawing.Ink) {
		lines := 1
		for k, words := range cells {
			width := wide - 1
			if k == 0 {
				width = first - 2
			}
			lines = max(lines, len(t.Wrap(words, width)))
		}
		s.need(float64(lines)*t.Leading() + 1.4)
		for k, words := range cells {
			width, x, align := wide-1, s.left+first+float64(k)*wide, drawing.Right
			if k == 0 {
				width, x, align = first-2, s.left, drawing.Left
			}
			wrapped := t.Wrap(words, width)
			for j, w := range wrapped {
				if !s.dry {
					s.page.Write(t, i, align, pt(x, s.y+t.Leading()*(float64(j)+0.9)), w)
				}
			}
		}
		s.y += float64(lines)*t.Leading() + 1.4
		if !s.dry {
			s.page.Line(drawing.Style{Stroke: drawing.Grey(0xc8), Width: 0.18}, pt(s.left, s.y), pt(s.left+first+n*wide, s.y))
		}
	}
	line(t.head, head, black())
	for _, r := range t.rows {
		line(r, cell, black())
	}
	s.y += 2
}

func (s *setter) list(l list) {
	const indent = 44.0
	t := small()
	for _, item := range l.items {
		terms, means := note().Wrap(item.term, indent-3), t.Wrap(item.meaning, contentWidth-indent)
		s.need(float64(max(len(terms), len(means)))*t.Leading() + 0.8)
		if !s.dry {
			for k, line := range terms {
				s.page.Write(note(), black(), drawing.Left, pt(s.left, s.y+t.Leading()*(float64(k)+0.8)), line)
			}
			for k, line := range means {
				s.page.Write(t, black(), drawing.Left, pt(s.left+indent, s.y+t.Leading()*(float64(k)+0.8)), line)
			}
		}
		s.y += float64(max(len(terms), len(means)))*t.Leading() + 0.8
	}
	s.y += 1
}

// foot writes the foot of every page.
func (s *setter) foot() {
	d := s.doc
	for i, p := range s.pages {
		y := d.cover.Paper.Height - 9
		of := d.words.say("page", "page", strconv.Itoa(i+1), "pages", strconv.Itoa(len(s.pages)))
		p.Write(small(), pale(), drawing.Right, pt(s.left+contentWidth, y), of)
		words := joined(", ", d.fileTitle(), d.words.date(d.cover.Date))
		p.Write(small(), pale(), drawing.Left, pt(s.left, y), small().Cut(words, contentWidth-small().Width(of)-5))
	}
}

// moved returns marks moved by x and y, mm.
func moved(marks []drawing.Mark, x, y float64) []drawing.Mark {
	by := func(p drawing.Point) drawing.Point { return pt(p.X+x, p.Y+y) }
	var out []drawing.Mark
	for _, m := range marks {
		switch m := m.(type) {
		case *drawing.Path:
			one := *m
			one.Rings = nil
			for _, ring := range m.Rings {
				var there []drawing.Point
				for _, p := range ring {
					there = append(there, by(p))
				}
				one.Rings = append(one.Rings, there)
			}
			out = append(out, &one)
		case *drawing.Circle:
			one := *m
			one.Centre = by(m.Centre)
			out = append(out, &one)
		case *drawing.Text:
			one := *m
			one.At = by(m.At)
			out = append(out, &one)
		case *drawing.Picture:
			one := *m
			one.At = by(m.At)
			out = append(out, &one)
		}
	}
	return out
}
