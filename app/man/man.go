// Package man writes the manual page of the command line, in the language of man(7),
// from what the command line takes, so that the page cannot be out of date.
package man

import (
	"fmt"
	"strings"

	"github.com/alecthomas/kong"
)

// Page returns pavilight(1).
func Page(grammar *kong.Application) []byte {
	p := new(page)
	p.macro("TH", "PAVILIGHT", "1", "", "Pavilight", "User Commands")
	p.macro("ad", "l") // even spaces: long flags leave little to spread
	p.macro("nh")
	p.macro("SH", "NAME")
	p.text("pavilight - show where the light in a faceted gemstone goes")
	p.macro("SH", "SYNOPSIS")
	p.macro("B", "pavilight")
	p.text("[PLAN]")
	for _, c := range grammar.Children {
		p.macro("br")
		p.macro("B", "pavilight "+c.Name)
		p.text(arguments(c) + " [FLAGS]")
	}
	p.macro("SH", "DESCRIPTION")
	for i, paragraph := range strings.Split(grammar.Help, "\n\n") {
		if i > 0 {
			p.macro("PP")
		}
		p.text(paragraph)
	}
	p.macro("PP")
	p.text("A PLAN is a cut plan (.toml) or a scan (.stl, .obj, .ply); without one the bundled stone is taken. " +
		"Results go to standard output, progress and warnings to standard error.")
	p.macro("SH", "COMMON FLAGS")
	p.flags(grammar.Flags)
	p.macro("SH", "COMMANDS")
	for _, c := range grammar.Children {
		p.macro("SS", "pavilight "+c.Name+" "+arguments(c))
		p.text(c.Help)
		for _, a := range c.Positional {
			p.tagged(strings.ToUpper(a.Name), a.Help)
		}
		p.flags(c.Flags)
	}
	p.macro("SH", "EXIT STATUS")
	for _, s := range [][2]string{
		{"0", "Done."},
		{"1", "The input is at fault: a plan, scan, proportions or material cannot be taken."},
		{"2", "The command line is at fault."},
		{"3", "The disk, the display or the program failed."},
		{"130", "Stopped."},
	} {
		p.tagged(s[0], s[1])
	}
	p.macro("SH", "FILES")
	p.tagged("~/.config/pavilight/materials.toml", "Materials of your own.")
	p.tagged("~/.config/pavilight/machines/NAME.toml", "Machines of your own, for cut --machine NAME.")
	p.tagged("/usr/share/doc/pavilight/guide", "The guide, a page for each task, where a package put it there.")
	p.tagged("/usr/share/doc/pavilight/examples", "Sample plans, likewise.")
	p.macro("SH", "EXAMPLES")
	for _, e := range Examples {
		p.text(e.Why)
		p.macro("PP")
		p.macro("RS", "4")
		p.macro("B", "pavilight "+strings.Join(e.Args, " "))
		p.macro("RE")
		p.macro("PP")
	}
	p.macro("SH", "CAUTIONS")
	p.text("Cutting stones can hurt you: dust, moving laps, hot wax, flames, solvents, toxic liquids. " +
		"pavilight gems NAME prints the cautions of a material with their sources. Follow your local codes and ask " +
		"those who are licensed to advise you.")
	return []byte(p.b.String())
}

// Example is one command to begin with, and what it is for.
type Example struct {
	Why  string
	Args []string
}

// Examples need no file and take less than a second each.
var Examples = []Example{
	{"Where the light goes in a round brilliant of diamond, from its proportions:",
		[]string{"look", "--round", "table=56,crown=34,pavilion=40.5", "--material", "diamond", "--width", "6.5"}},
	{"The same tilted by 15 degrees, in air and in water:",
		[]string{"look", "--round", "table=56,crown=34,pavilion=40.5", "--material", "diamond", "--tilt", "15", "--in", "air,water"}},
	{"Measure the bundled stone and report every fault:", []string{"check"}},
	{"All about a material, each number with its source:", []string{"gems", "quartz"}},
}

// page gathers lines of man(7).
type page struct{ b strings.Builder }

// macro writes a macro with its arguments.
func (p *page) macro(name string, arguments ...string) {
	p.b.WriteString("." + name)
	for _, a := range arguments {
		if a != "" && !strings.Contains(a, " ") {
			p.b.WriteString(" " + escaped(a))
			continue
		}
		fmt.Fprintf(&p.b, " \"%s\"", strings.ReplaceAll(escaped(a), `"`, `\(dq`))
	}
	p.b.WriteByte('\n')
}

// text writes running text, one line to a source line.
func (p *page) text(s string) {
	for line := range strings.Lines(strings.TrimSpace(s)) {
		line = escaped(strings.TrimSpace(line))
		if strings.HasPrefix(line, ".") || strings.HasPrefix(line, "'") {
			line = `\&` + line
		}
		p.b.WriteString(line + "\n")
	}
}

// tagged writes a bold word and what it means.
func (p *page) tagged(tag, text string) {
	p.macro("TP")
	p.macro("B", tag)
	p.text(text)
}

func (p *page) flags(flags []*kong.Flag) {
	for _, f := range flags {
		if f.Hidden {
			continue
		}
		p.tagged(spelled(f), f.Help)
	}
}

// spelled is how a flag is written: -h, --help, or --tilt DEG.
func spelled(f *kong.Flag) string {
	s := "--" + f.Name
	if f.Short != 0 {
		s = "-" + string(f.Short) + ", " + s
	}
	if !f.IsBool() {
		s += " " + f.FormatPlaceHolder()
	}
	return s
}

// arguments is how a command's arguments are written, all of which may be left out.
func arguments(c *kong.Node) string {
	var words []string
	for _, a := range c.Positional {
		word := strings.ToUpper(a.Name)
		if a.IsSlice() {
			word += "..."
		}
		words = append(words, "["+word+"]")
	}
	return strings.Join(words, " ")
}

// escaped keeps backslashes and hyphens as they are typed.
func escaped(s string) string {
	return strings.NewReplacer(`\`, `\e`, "-", `\-`).Replace(s)
}
