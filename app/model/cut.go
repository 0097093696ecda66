package model

import (
	"context"
	"io"
	"os"
	"path/filepath"
	"runtime"
	"strconv"
	"strings"
	"sync"

	"pavilight/app/disk"
	"pavilight/app/sheet"
	"pavilight/app/words"
	"pavilight/facets"
	"pavilight/gems"
)

// CutWish says how the sheet shall look.
type CutWish struct {
	Language  string // of the sheet, as words.Languages names it
	Paper     string // as sheet.Papers names it
	Machine   string // name of one of the user's machines; empty for the plain one
	Opposites bool   // indices with the opposite ones first
	Large     bool   // type a quarter larger
	Maps      bool   // with the maps and the ledger
	Gears     []int  // further gears, whose indices are listed too
	LeaveOut  sheet.LeaveOut
}

// Cut is the state behind the room where the sheet for the bench is laid out: how it
// shall look, the page in view as it is printed, and the steps as a film. Its methods run
// on the window's goroutine. A sheet is first laid out without its maps, at once, and
// again when they are traced; the newest wish ends what was made for an older one.
type Cut struct {
	Wish CutWish

	Running bool
	Stopped bool // by the user: the sheet is without its maps
	Done    float64
	Trouble error        // why there is no sheet
	Sheet   *sheet.Sheet // nil before the first

	paging

	Step     int            // of the film in view: 0 is the rough, 1 the first cut
	Machines sheet.Machines // the folder of the user's machines

	do       func(func())
	onChange func()
	words    *words.Words
	subject  cutSubject
	light    sheet.Job     // holds the traced light of the subject; its Light is nil before
	whole    *facets.Stone // what the steps start from
	number   int           // of the run that counts
	cancel   context.CancelFunc
	open     sync.WaitGroup // goroutines of all kinds
}

// cutSubject is what the sheet is of.
type cutSubject struct {
	plan     *facets.Plan
	material *gems.Material
	around   string // media of the maps, by name
	media    []*gems.Material
	head     facets.Angle
	program  string
}

func (s cutSubject) same(o cutSubject) bool {
	return s.plan == o.plan && s.around == o.around && s.head == o.head // a plan names its material
}

// NewCut returns the state before a sheet was asked for. do hands work to the window's
// goroutine, in order, without waiting for it; onChange is called there.
func NewCut(machines sheet.Machines, do func(func()), onChange func()) *Cut {
	c := &Cut{Wish: CutWish{Language: "en", Paper: sheet.Papers()[0].Name, Maps: true}, Machines: machines, do: do, onChange: onChange}
	c.painter, c.repaints = painter{do: do, open: &c.open}, onChange
	return c
}

// SetWords has what is told beside the sheet said in a language; before, it is English.
func (c *Cut) SetWords(w *words.Words) { c.words = w }

// SetSubject lays out the sheet of a plan, unless that is what is in view.
func (c *Cut) SetSubject(plan *facets.Plan, material *gems.Material, around []Around, head facets.Angle, program string) {
	s := cutSubject{plan: plan, material: material, head: head, program: program}
	var names []string
	for _, a := range around {
		if !a.Dish { // a sheet shows the stone with the medium all around it
			s.media = append(s.media, a.Medium)
			names = append(names, a.Medium.Key, a.Medium.Name)
		}
	}
	s.around = strings.Join(names, "\n")
	if c.subject.plan != nil && s.same(c.subject) {
		return
	}
	if c.subject.plan != plan {
		c.Page, c.Step = 0, 0
	}
	c.subject, c.light = s, sheet.Job{}
	c.make()
}

// Change takes another wish and lays the sheet out anew.
func (c *Cut) Change(change func(*CutWish)) {
	change(&c.Wish)
	if c.subject.plan != nil {
		c.make()
	}
}

// Again goes on with the maps after Stop.
func (c *Cut) Again() {
	if c.Stopped {
		c.make()
	}
}

// ReadGears reads numbers of teeth with commas or spaces between.
func ReadGears(text string) ([]int, error) {
	var gears []int
	for _, word := range strings.FieldsFunc(text, func(r rune) bool { return r == ',' || r == ' ' || r == ';' }) {
		n, err := strconv.Atoi(word)
		if err != nil || n < 3 || n > 1000 {
			return nil, words.Errorf("%q is no gear; give numbers of teeth, 3 to 1000, with commas between", word)
		}
		gears = append(gears, n)
	}
	return gears, nil
}

// make lays the sheet out on another goroutine, and a sheet that is being made is left.
func (c *Cut) make() {
	c.Stop()
	ctx, cancel := context.WithCancel(context.Background())
	c.number++
	c.Running, c.Stopped, c.Done, c.Trouble, c.cancel = true, false, 0, nil, cancel
	r := &cutRun{cut: c, number: c.number, subject: c.subject, wish: c.Wish, machines: c.Machines, light: c.light}
	c.open.Go(func() {
		defer cancel()
		err := r.work(ctx)
		stopped := ctx.Err() != nil
		r.hand(func() {
			c.Running, c.cancel = false, nil
			c.Stopped = stopped
			if !stopped && err != nil {
				c.Trouble, c.Sheet = err, nil
				c.clear()
			}
		})
	})
	c.onChange()
}

// cutRun makes one sheet, on its own goroutine.
type cutRun struct {
	cut      *Cut
	number   int
	subject  cutSubject
	wish     CutWish
	machines sheet.Machines
	light    sheet.Job
}

// hand gives the window's goroutine something to do, unless another run counts by then.
func (r *cutRun) hand(do func()) {
	r.cut.do(func() {
		if r.number == r.cut.number {
			do()
			r.cut.onChange()
		}
	})
}

func (r *cutRun) work(ctx context.Context) error {
	s := r.subject
	job := sheet.Job{Plan: s.plan, Material: s.material, Machine: sheet.Plain(), HeadDeg: s.head.Degrees(),
		Large: r.wish.Large, Opposites: r.wish.Opposites, Gears: r.wish.Gears, LeaveOut: r.wish.LeaveOut,
		Words: words.In(r.wish.Language), Program: s.program, Workers: max(1, runtime.GOMAXPROCS(0)-1)}
	if r.wish.LeaveOut.Any() {
		job.Copy = sheet.PupilsCopy
	}
	var err error
	if job.Paper, err = sheet.PaperNamed(r.wish.Paper); err != nil {
		return err
	}
	if r.wish.Machine != "" {
		if job.Machine, err = r.machines.Open(r.wish.Machine); err != nil {
			return err
		}
	}
	traced := r.light.Light != nil
	if r.wish.Maps && traced {
		job.Light, job.Miscuts = r.light.Light, r.light.Miscuts
	}
	if err := r.layOut(job); err != nil || !r.wish.Maps || traced || len(s.media) == 0 {
		return err
	}
	if err := sheet.Trace(ctx, &job, s.media, func(done float64) { r.hand(func() { r.cut.Done = done }) }); err != nil {
		return err
	}
	light := job
	r.hand(func() { r.cut.light = light })
	return r.layOut(job)
}

// layOut works a job out and hands its pages over.
func (r *cutRun) layOut(job sheet.Job) error {
	made, err := sheet.New(job)
	if err != nil {
		return err
	}
	pages := made.Pages()
	whole := made.Rough.Stone
	if whole == nil {
		whole = made.Solution.Stone.Block(facets.BlockMargin)
	}
	r.hand(func() {
		c := r.cut
		c.Sheet, c.whole = made, whole
		c.Step = max(0, min(c.Step, len(made.Rows)))
		c.show(pages)
	})
	return nil
}

// Stop leaves the sheet that is being made; what is laid out stays. It does not wait.
func (c *Cut) Stop() {
	if c.cancel != nil {
		c.cancel()
	}
}

// Wait returns when all goroutines have ended. Where do waits for the window's goroutine
// it must not be called there.
func (c *Cut) Wait() { c.open.Wait() }

// Ready reports whether there is a sheet that can be written.
func (c *Cut) Ready() bool { return c.Sheet != nil && !c.Running && c.Trouble == nil }

// Notes returns what the cutter should know before the sheet is printed.
func (c *Cut) Notes() []string {
	if c.Sheet == nil {
		return nil
	}
	notes := c.Sheet.Notes(c.words)
	if c.Stopped && c.Wish.Maps && c.Sheet.Light == nil {
		notes = append(notes, c.words.Say("stopped: the sheet is without its maps and ledger"))
	}
	return notes
}

// FileName suggests a name for the sheet's file.
func (c *Cut) FileName() string {
	if c.Sheet == nil {
		return "cut.pdf"
	}
	if c.Sheet.LeaveOut.Any() {
		return c.Sheet.FileName() + "-pupil.pdf"
	}
	return c.Sheet.FileName() + ".pdf"
}

// AnswersName returns the path of the teacher's copy that goes with a pupil's, and false
// where nothing is left out.
func (c *Cut) AnswersName(path string) (string, bool) {
	if c.Sheet == nil || !c.Sheet.LeaveOut.Any() {
		return "", false
	}
	stem, end := strings.TrimSuffix(path, filepath.Ext(path)), filepath.Ext(path)
	return strings.TrimSuffix(stem, "-pupil") + "-teacher" + end, true
}

// Write writes the pages as PDF, each file as a whole or not at all, on another goroutine:
// to path, and where parts are left out the teacher's copy beside it. done is told the
// files written.
func (c *Cut) Write(path string, done func(files []string, err error)) {
	made := c.Sheet
	teacher, answers := c.AnswersName(path)
	c.open.Go(func() {
		var files []string
		err := writeSheet(made, path)
		if err == nil {
			files = append(files, path)
			if answers {
				full := *made
				full.LeaveOut, full.Copy = sheet.LeaveOut{}, sheet.TeachersCopy
				if err = writeSheet(&full, teacher); err == nil {
					files = append(files, teacher)
				}
			}
		}
		c.do(func() { done(files, err) })
	})
}

func writeSheet(made *sheet.Sheet, path string) error {
	document, err := made.Document()
	if err != nil {
		return err
	}
	return disk.Replace(path, func(w io.Writer) error { return document.PDF(w) })
}

// Print writes the sheet into a folder of its own under the system's folder for passing
// files and has show open it, on another goroutine. done is told the file.
func (c *Cut) Print(show func(path string) error, done func(path string, err error)) {
	made, name := c.Sheet, c.FileName()
	c.open.Go(func() {
		folder, err := os.MkdirTemp("", "pavilight-print-")
		path := filepath.Join(folder, name)
		if err == nil {
			err = writeSheet(made, path)
		}
		if err == nil {
			err = show(path)
		}
		c.do(func() { done(path, err) })
	})
}

// NewMachine writes a description to start from for a machine of the user's, and returns
// its path. It replaces none.
func (c *Cut) NewMachine(name string) (string, error) {
	if name == "" || name != filepath.Base(name) || strings.HasPrefix(name, ".") || strings.ContainsAny(name, `/\:*?"<>|`) {
		return "", words.Errorf("%q cannot be the name of a machine, for it names a file; use letters, digits and spaces", name)
	}
	if c.Machines == "" {
		return "", words.Errorf("the system has no folder for settings; keep the machine's file elsewhere and use pavilight cut --machine FILE")
	}
	path := filepath.Join(string(c.Machines), name+".toml")
	if _, err := os.Stat(path); err == nil {
		return "", words.Errorf("there is a machine named %s already; choose it, or take another name", name)
	}
	if err := os.MkdirAll(string(c.Machines), 0o700); err != nil {
		return "", err
	}
	text := strings.Replace(sheet.MachineTemplate, `"my machine"`, strconv.Quote(name), 1)
	return path, disk.Replace(path, func(w io.Writer) error { _, err := io.WriteString(w, text); return err })
}
