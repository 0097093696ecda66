package model

import (
	"context"
	"image"
	"io"

	"pavilight/app/disk"
	"pavilight/app/sheet"
	"pavilight/facets"
	"pavilight/gems"
)

// Cut is the state behind the room where the sheet for the bench is laid out: how it
// shall look, and its pages as they stand. Its methods run on the window's goroutine.
type Cut struct {
	Paper string // name of the paper, as sheet.Papers names it
	Large bool   // type a quarter larger
	Maps  bool   // with the maps and the ledger

	Running bool
	Done    float64
	Trouble error
	Pages   []*image.RGBA // as they are printed; nil before the first
	Notes   []string      // what the cutter should know before the sheet is printed

	do       func(func())
	onChange func()
	made     *sheet.Sheet
	number   int
	cancel   context.CancelFunc
	finished chan struct{}
}

// NewCut returns the state before a sheet was asked for. do hands work to the window's
// goroutine, in order, without waiting for it; onChange is called there.
func NewCut(do func(func()), onChange func()) *Cut {
	return &Cut{Paper: sheet.Papers()[0].Name, Maps: true, do: do, onChange: onChange}
}

// pagePerMM is the resolution of the pages on the screen, pixels to the millimetre.
const pagePerMM = 4

// Make lays the sheet of a plan out, on another goroutine. A sheet that is being made is
// left.
func (c *Cut) Make(plan *facets.Plan, material *gems.Material, around []Around, head facets.Angle, program string) {
	c.Stop()
	paper, err := sheet.PaperNamed(c.Paper)
	if err != nil || material == nil {
		c.Trouble = err
		c.onChange()
		return
	}
	job := sheet.Job{
		Plan: plan, Material: material, Machine: sheet.Plain(), HeadDeg: head.Degrees(),
		Paper: paper, Large: c.Large, Program: program,
	}
	var media []*gems.Material
	for _, a := range around {
		media = append(media, a.Medium)
	}
	ctx, cancel := context.WithCancel(context.Background())
	c.number++
	number, maps := c.number, c.Maps
	c.Running, c.Done, c.Trouble, c.cancel, c.finished = true, 0, nil, cancel, make(chan struct{})
	finished := c.finished
	go func() {
		defer close(finished)
		defer cancel()
		made, pages, err := makeSheet(ctx, &job, maps, media, func(done float64) {
			c.do(func() {
				if number == c.number {
					c.Done = done
					c.onChange()
				}
			})
		})
		stopped := ctx.Err() != nil // now: on the way out this goroutine cancels it, too
		c.do(func() {
			if number == c.number {
				c.ended(made, pages, err, stopped)
			}
		})
	}()
	c.onChange()
}

// makeSheet works a job out and paints its pages.
func makeSheet(ctx context.Context, job *sheet.Job, maps bool, media []*gems.Material,
	report func(float64)) (*sheet.Sheet, []*image.RGBA, error) {
	if maps {
		if err := sheet.Trace(ctx, job, media, report); err != nil {
			return nil, nil, err
		}
	}
	made, err := sheet.New(*job)
	if err != nil {
		return nil, nil, err
	}
	var pages []*image.RGBA
	for _, p := range made.Pages() {
		if ctx.Err() != nil {
			return nil, nil, context.Cause(ctx)
		}
		pages = append(pages, p.Raster(pagePerMM))
	}
	return made, pages, nil
}

func (c *Cut) ended(made *sheet.Sheet, pages []*image.RGBA, err error, stopped bool) {
	c.Running, c.cancel = false, nil
	if !stopped {
		c.Trouble = err
	}
	if err == nil {
		c.made, c.Pages, c.Notes = made, pages, made.Notes()
	}
	c.onChange()
}

// Stop leaves the sheet that is being made. It does not wait; see Wait.
func (c *Cut) Stop() {
	if c.cancel != nil {
		c.cancel()
	}
}

// Wait returns when the goroutine of the last sheet has ended.
func (c *Cut) Wait() {
	if c.finished != nil {
		<-c.finished
	}
}

// Ready reports whether there are pages that can be written.
func (c *Cut) Ready() bool { return c.made != nil && !c.Running && c.Trouble == nil }

// FileName suggests a name for the sheet's file.
func (c *Cut) FileName() string {
	if c.made == nil {
		return "cut.pdf"
	}
	return c.made.FileName() + ".pdf"
}

// Write writes the pages as PDF, as a whole or not at all.
func (c *Cut) Write(path string) error {
	document, err := c.made.Document()
	if err != nil {
		return err
	}
	return disk.Replace(path, func(w io.Writer) error { return document.PDF(w) })
}
