// Package guide holds the user's guide: a page for each task, which the window shows and
// the packages carry. Its test runs every command that a page tells people to type.
package guide

import (
	"embed"
	"strings"
)

//go:embed *.md
var files embed.FS

// Page is a page of the guide.
type Page struct {
	File  string // its name beside the others
	Title string
	Parts []Part // below the title, from top to bottom
}

// Part is a stretch of a page.
type Part struct {
	// Kind is empty for text in Markdown, "toml" for a file to save, "console" for what to
	// type after a $ and what answers.
	Kind string
	File string // of a file to save, its name
	Text string // without the fences
}

// Pages returns the pages by task, in the order in which the first page names them.
func Pages() (pages []Page) {
	for _, name := range []string{"first-stone.md", "first-report.md", "first-booklet.md"} {
		text, err := files.ReadFile(name)
		if err != nil {
			continue // all are embedded; the package's test holds the list to the folder
		}
		pages = append(pages, read(name, string(text)))
	}
	return pages
}

// read takes a page apart.
func read(name, text string) Page {
	p := Page{File: name}
	title, rest, _ := strings.Cut(text, "\n")
	p.Title = strings.TrimPrefix(title, "# ")
	for i, part := range strings.Split("\n"+rest, "\n```") {
		if i%2 == 0 {
			if part = strings.TrimSpace(part); part != "" {
				p.Parts = append(p.Parts, Part{Text: part})
			}
			continue
		}
		head, body, _ := strings.Cut(part, "\n")
		kind, file, _ := strings.Cut(head, " ")
		p.Parts = append(p.Parts, Part{Kind: kind, File: file, Text: body + "\n"})
	}
	return p
}
