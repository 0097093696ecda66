package model

import (
	"context"
	"io"
	"path/filepath"
	"runtime"
	"slices"
	"strings"
	"sync"
	"time"
	"unicode/utf8"

	"pavilight/app/disk"
	"pavilight/app/drawing"
	"pavilight/app/report"
	"pavilight/app/words"
	"pavilight/facets"
	"pavilight/gems"
	"pavilight/trace"
)

// TellWish says what the report shall be like.
type TellWish struct {
	Colleague  bool   // for a colleague, with more terms and numbers, else for a client
	Language   string // as report.Languages names it
	Paper      string
	Letterhead string // path of a picture; empty for none
	Author     string
	Client     string
	Notes      string

	Lights   [2]string // of the pictures in true colour; the second may be empty
	Measured string    // how exactly the stone was measured; empty for not stated
}

// tracedWith returns the part of the wish for which light has to be traced.
func (w TellWish) tracedWith() TellWish { return TellWish{Lights: w.Lights, Measured: w.Measured} }

// Tell is the state behind the room where the report for a client is put together: what it
// shall be like, and the page in view as it is printed. Its methods run on the window's
// goroutine. The light of a stone is traced once; what the wish changes beside that is set
// into pages anew.
type Tell struct {
	Wish   TellWish
	Beside *facets.Plan // another stone to set beside; nil for none
	Pixels int          // of a map's edge; 0 for the usual number
	Error  float64      // of every ledger entry; 0 for the usual one

	Running bool
	Stopped bool
	Done    float64
	Trouble error // why there is no report

	paging

	do       func(func())
	onChange func()
	words    *words.Words
	material findMaterial
	subject  tellSubject
	traced   tellTraced
	all      []*report.Findings // of traced; nil before
	number   int                // of the run that counts
	cancel   context.CancelFunc
	setting  bool // pages are being set
	set      tellSet
	open     sync.WaitGroup
}

// tellSubject is the stone that is told of, and how it is looked at.
type tellSubject struct {
	plan    *facets.Plan
	media   []*gems.Material
	around  string // their names
	head    facets.Angle
	program string
}

// tellTraced is what findings depend on.
type tellTraced struct {
	plan, beside *facets.Plan
	around       string
	head         facets.Angle
	wish         TellWish
}

// tellSet is what pages depend on.
type tellSet struct {
	traced tellTraced
	wish   TellWish
}

// findMaterial returns the material that a plan names or brings along.
type findMaterial func(facets.MaterialRef) (*gems.Material, error)

// NewTell returns the state before a report was asked for. do hands work to the window's
// goroutine, in order, without waiting for it; onChange is called there. material finds what
// a plan is cut from and may be called on any goroutine.
func NewTell(do func(func()), onChange func(), material func(facets.MaterialRef) (*gems.Material, error)) *Tell {
	t := &Tell{Wish: TellWish{Language: "en", Paper: "a4", Lights: [2]string{"overcast", "room"}}, do: do, onChange: onChange, material: material}
	t.painter, t.repaints = painter{do: do, open: &t.open}, onChange
	return t
}

// SetWords has what is told beside the report said in a language; before, it is English.
func (t *Tell) SetWords(w *words.Words) { t.words = w }

// mostTold is how many surroundings find room on a page.
const mostTold = 4

// SetSubject has the report be of a plan, seen in these surroundings.
func (t *Tell) SetSubject(plan *facets.Plan, around []Around, head facets.Angle, program string) {
	s := tellSubject{plan: plan, head: head, program: program}
	var names []string
	for _, a := range around {
		if !slices.Contains(names, a.Medium.Key+a.Medium.Name) && len(s.media) < mostTold {
			s.media = append(s.media, a.Medium) // a liquid is shown in a dish, too
			names = append(names, a.Medium.Key+a.Medium.Name)
		}
	}
	s.around = strings.Join(names, "\n")
	if t.subject.plan != plan {
		t.Page = 0
	}
	t.subject = s
	t.follow()
}

// Change takes another wish.
func (t *Tell) Change(change func(*TellWish)) {
	change(&t.Wish)
	t.follow()
}

// SetBeside sets another stone beside, none for nil.
func (t *Tell) SetBeside(plan *facets.Plan) {
	t.Beside, t.Page = plan, 0
	t.follow()
}

// Again goes on after Stop.
func (t *Tell) Again() {
	t.traced = tellTraced{}
	t.follow()
}

func (t *Tell) wanted() tellTraced {
	return tellTraced{t.subject.plan, t.Beside, t.subject.around, t.subject.head, t.Wish.tracedWith()}
}

// follow traces what has to be traced, or sets the pages anew.
func (t *Tell) follow() {
	switch {
	case t.subject.plan == nil:
	case t.wanted() != t.traced:
		t.gather()
	default:
		t.compose()
	}
}

// gather traces the light on another goroutine; what was traced for an older wish is left.
func (t *Tell) gather() {
	t.Stop()
	ctx, cancel := context.WithCancel(context.Background())
	t.number++
	number, subject, wish, want := t.number, t.subject, t.Wish, t.wanted()
	job := &report.Job{Media: subject.media, Head: subject.head, Pixels: t.Pixels, Error: t.Error, Seed: 1,
		Workers: max(1, runtime.GOMAXPROCS(0)-1)} // the window stays alive
	plans := []*facets.Plan{subject.plan}
	if t.Beside != nil {
		plans = []*facets.Plan{t.Beside, subject.plan} // before, after
	}
	t.traced, t.all = want, nil
	t.clear()
	t.set = tellSet{}
	t.Running, t.Stopped, t.Done, t.Trouble, t.cancel = true, false, 0, nil, cancel
	hand := func(do func()) {
		t.do(func() {
			if number == t.number {
				do()
				t.onChange()
			}
		})
	}
	t.open.Go(func() {
		defer cancel()
		all, err := tellGather(ctx, job, wish, plans, t.material, func(done float64) { hand(func() { t.Done = done }) })
		stopped := ctx.Err() != nil
		hand(func() {
			t.Running, t.cancel, t.Stopped = false, nil, stopped
			if stopped {
				return
			}
			t.all, t.Trouble = all, err
			t.compose()
		})
	})
	t.onChange()
}

// tellGather traces all that is told of the plans.
func tellGather(ctx context.Context, job *report.Job, wish TellWish, plans []*facets.Plan,
	find findMaterial, done func(float64)) ([]*report.Findings, error) {
	for _, name := range wish.Lights {
		if name == "" {
			continue
		}
		light, err := trace.FindLight(name)
		if err != nil {
			return nil, err
		}
		job.Lights = append(job.Lights, light)
	}
	var err error
	if strings.TrimSpace(wish.Measured) != "" {
		if job.Measured, err = report.ReadUncertainties(wish.Measured); err != nil {
			return nil, err
		}
	}
	var all []*report.Findings
	for i, plan := range plans {
		material, err := find(plan.Material)
		if err != nil {
			return nil, err
		}
		solid, err := plan.Solve()
		if err != nil {
			return nil, err
		}
		stone := report.Stone{Name: plan.Name, Solid: solid, Material: material, Measures: solid.Measure()}
		if err := job.Measured.Fits(&stone); err != nil {
			return nil, err
		}
		f, err := report.Gather(ctx, job, stone, func(part float64) { done((float64(i) + part) / float64(len(plans))) })
		if err != nil {
			return nil, err
		}
		all = append(all, f)
	}
	if len(all) == 2 && all[0].Name == all[1].Name {
		all[0].Name += ", before"
		all[1].Name += ", now"
	}
	return all, nil
}

// Bounds of what a user may write into a report, letters.
const (
	mostNotes = 4000
	mostNames = 200
)

// cover returns what the report says beside what was found. It reads the letterhead.
func (w TellWish) cover(program string) (*report.Cover, error) {
	now := time.Now()
	c := &report.Cover{Language: w.Language, Colleague: w.Colleague, Author: w.Author, Client: w.Client, Notes: w.Notes,
		Date: time.Date(now.Year(), now.Month(), now.Day(), 0, 0, 0, 0, time.UTC), Program: program}
	for _, text := range []struct {
		name words.Key
		said string
		most int
	}{{"your name", w.Author, mostNames}, {"the client's name", w.Client, mostNames}, {"the notes", w.Notes, mostNotes}} {
		if n := utf8.RuneCountInString(text.said); n > text.most {
			return nil, words.Errorf("%s: %d letters are too many; use at most %d", text.name, n, text.most)
		}
	}
	var err error
	if c.Paper, err = report.PaperNamed(w.Paper); err != nil {
		return nil, err
	}
	if w.Letterhead != "" {
		c.Letterhead, err = report.OpenLetterhead(w.Letterhead)
	}
	return c, err
}

// compose sets the pages on another goroutine, one report at a time: while one is set, only
// the newest wish waits.
func (t *Tell) compose() {
	want := tellSet{t.traced, t.Wish}
	if t.setting || t.all == nil || t.set == want {
		return
	}
	t.setting = true
	all, wish, program := t.all, t.Wish, t.subject.program
	t.open.Go(func() {
		var pages []*drawing.Page
		cover, err := wish.cover(program)
		if err == nil {
			pages, err = report.Pages(all, cover)
		}
		t.do(func() {
			t.setting = false
			if want.traced == t.traced && t.all != nil {
				t.set, t.Trouble = want, err
				if err != nil {
					t.clear()
				}
				t.show(pages)
			}
			t.compose()
			t.onChange()
		})
	})
}

// Stop ends the tracing. It does not wait.
func (t *Tell) Stop() {
	if t.cancel != nil {
		t.cancel()
	}
}

// Wait returns when all goroutines have ended. Where do waits for the window's goroutine
// it must not be called there.
func (t *Tell) Wait() { t.open.Wait() }

// Ready reports whether there is a report, as it is wished for, that can be written.
func (t *Tell) Ready() bool {
	return len(t.pages) > 0 && !t.Running && !t.setting && t.Trouble == nil
}

// Notes returns what should be known before the report is handed out.
func (t *Tell) Notes() []string {
	var notes []string
	if names := report.Materials(t.all); len(names) > 1 {
		notes = append(notes, t.words.Say("The stones are of different materials: %s.", strings.Join(names, ", ")))
	}
	if t.Wish.Measured == "" && len(t.pages) > 0 {
		notes = append(notes, t.words.Say("The report says that measuring errors are not included."))
	}
	return notes
}

// FileName suggests a name for the report's file, with that ending.
func (t *Tell) FileName(ending string) string {
	if t.subject.plan == nil {
		return "report" + ending
	}
	name := facets.FileStem(t.subject.plan.File)
	if name == "" || name == "." {
		name = "stone"
	}
	if t.Beside != nil {
		return name + "-comparison" + ending
	}
	return name + "-report" + ending
}

// Write writes the report, as PDF or for a browser by the path's ending, as a whole or not
// at all, on another goroutine.
func (t *Tell) Write(path string, done func(error)) {
	all, wish, program := t.all, t.Wish, t.subject.program
	t.open.Go(func() {
		err := writeReport(path, all, wish, program)
		t.do(func() { done(err) })
	})
}

func writeReport(path string, all []*report.Findings, wish TellWish, program string) error {
	cover, err := wish.cover(program)
	if err != nil {
		return err
	}
	one := map[string]func(io.Writer, *report.Findings, *report.Cover) error{".pdf": report.PDF, ".html": report.HTML}
	several := map[string]func(io.Writer, []*report.Findings, *report.Cover) error{".pdf": report.ComparisonPDF, ".html": report.ComparisonHTML}
	ending := strings.ToLower(filepath.Ext(path))
	switch {
	case one[ending] == nil:
		return words.Errorf("a report is written as .pdf or as .html; give the file one of these endings")
	case len(all) == 1:
		return disk.Replace(path, func(w io.Writer) error { return one[ending](w, all[0], cover) })
	}
	return disk.Replace(path, func(w io.Writer) error { return several[ending](w, all, cover) })
}
