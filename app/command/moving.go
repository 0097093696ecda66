package command

import (
	"bytes"
	"context"
	"errors"
	"fmt"
	"image"
	"image/png"
	"io"
	"slices"

	"pavilight/app/motion"
	"pavilight/app/report"
	"pavilight/facets"
	"pavilight/gems"
)

// movingFlags say which moving pictures tell makes.
type movingFlags struct {
	Moving    string  `type:"word" placeholder:"KINDS" help:"Make a moving picture too: gif, apng, png (numbered pictures), mp4, webm (the last two by an installed ffmpeg), with commas between."`
	Motion    string  `default:"tilt" type:"word" placeholder:"NAME" help:"How it moves: tilt, from side to side, or turn, leaning all round (${default})."`
	Show      string  `default:"colour" type:"word" placeholder:"NAME" help:"What it shows: colour (under the first light), return or leakage (${default})."`
	Lean      float64 `default:"20" type:"number" least:"1" most:"60" unit:"degrees" placeholder:"DEG" help:"How far it leans, 1 to 60 degrees (${default})."`
	Frames    int     `default:"60" type:"number" least:"2" most:"720" unit:"pictures" placeholder:"N" help:"Pictures of one round, 2 to 720 (${default})."`
	Size      int     `default:"400" type:"number" least:"32" most:"1600" unit:"pixels" placeholder:"N" help:"Pixels of a picture's edge, 32 to 1600 (${default})."`
	PerSecond int     `default:"20" type:"number" least:"1" most:"50" unit:"pictures" placeholder:"N" help:"Pictures a second, 1 to 50 (${default})."`
}

// mover makes the moving pictures of one run.
type mover struct {
	kinds []string
	job   motion.Job
	name  string // of its motion and what it shows, for file names
}

// mover reads the flags; it is nil where no moving picture is asked for.
func (m *movingFlags) mover(job *report.Job) (*mover, error) {
	if m.Moving == "" {
		return nil, nil
	}
	kinds, err := wordsOf("--moving", m.Moving, "gif", "apng", "png", "mp4", "webm")
	if err != nil {
		return nil, err
	}
	if slices.Contains(kinds, "mp4") || slices.Contains(kinds, "webm") { // told before the work
		if _, err := motion.Encoder(); err != nil {
			return nil, ownFault(fmt.Errorf("--moving %s: %w", m.Moving, err))
		}
	}
	paths := map[string]motion.Path{"tilt": motion.Rock, "turn": motion.Circle}
	shows := map[string]motion.Shows{"colour": motion.Colour, "return": motion.Return, "leakage": motion.Leakage}
	path, ok := paths[m.Motion]
	if !ok {
		return nil, commandFaultf("--motion %q is not known; use tilt or turn", m.Motion)
	}
	show, ok := shows[m.Show]
	if !ok {
		return nil, commandFaultf("--show %q is not known; use colour, return or leakage", m.Show)
	}
	moving := motion.Job{
		Medium: job.Media[0], Light: job.Lights[0], Head: job.Head, Seed: job.Seed, Workers: job.Workers,
		Path: path, Shows: show, Most: facets.Angle(m.Lean) * facets.Degree, Frames: m.Frames, Size: m.Size, PerSecond: m.PerSecond,
	}
	if err := moving.Check(); err != nil {
		return nil, commandFault(err)
	}
	return &mover{kinds, moving, m.Motion + "-" + m.Show}, nil
}

// render makes the pictures of a stone.
func (m *mover) render(ctx context.Context, stone *facets.Stone, material *gems.Material, report func(float64)) ([]*image.RGBA, error) {
	job := m.job
	job.Stone, job.Material = stone, material
	return job.Render(ctx, report)
}

// files puts the pictures out in each of the kinds asked for.
func (m *mover) files(ctx context.Context, frames []*image.RGBA, base string) (files []madeFile, err error) {
	name := base + "-" + m.name
	add := func(ending string, write func(io.Writer) error) error {
		var b bytes.Buffer
		if err := write(&b); err != nil {
			return err
		}
		files = append(files, madeFile{name + ending, b.Bytes()})
		return context.Cause(ctx)
	}
	for _, kind := range m.kinds {
		switch kind {
		case "gif":
			err = add(".gif", func(w io.Writer) error { return motion.GIF(w, frames, m.job.PerSecond) })
		case "apng":
			err = add(".apng", func(w io.Writer) error { return motion.APNG(w, frames, m.job.PerSecond) })
		case "png":
			for i, f := range frames {
				err = errors.Join(err, add(fmt.Sprintf("-%03d.png", i+1), func(w io.Writer) error { return png.Encode(w, f) }))
			}
		default:
			var film []byte
			if film, err = motion.Video(ctx, frames, m.job.PerSecond, kind); err == nil {
				files = append(files, madeFile{name + "." + kind, film})
			}
		}
		if err != nil {
			return nil, err
		}
	}
	return files, nil
}
