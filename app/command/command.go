// Package command is Pavilight on the command line: it reads the flags, runs one
// command and prints what it found.
//
// Results go to stdout; progress, warnings and errors go to stderr. Degrees,
// millimetres, nanometres and carats are the units of every flag and number.
package command

import (
	"bytes"
	"context"
	"errors"
	"fmt"
	"io"
	"io/fs"
	"runtime/debug"
	"strings"
)

// The exit statuses.
const (
	Done         = 0
	InputFault   = 1   // the plan, scan, proportions or material cannot be taken
	CommandFault = 2   // the command line cannot be taken
	OwnFault     = 3   // the disk, the display or the program failed
	Stopped      = 130 // the user stopped it
)

// Environment is what a command may touch of the world.
type Environment struct {
	Stdout   io.Writer
	Stderr   io.Writer
	Terminal bool // whether Stderr is a terminal, where a line may be redrawn

	bar io.Writer // Stderr as it is, for the bar of progress

	// Window opens the window on the plan or scan of the given path, on the bundled
	// stone for "", and returns when it was closed.
	Window func(ctx context.Context, path string) error
}

// fault is an error with the exit status that it ends in.
type fault struct {
	status int
	err    error
}

func (f *fault) Error() string { return f.err.Error() }
func (f *fault) Unwrap() error { return f.err }

func inputFault(err error) error   { return &fault{InputFault, err} }
func ownFault(err error) error     { return &fault{OwnFault, err} }
func commandFault(err error) error { return &fault{CommandFault, err} }

func commandFaultf(format string, args ...any) error {
	return commandFault(fmt.Errorf(format, args...))
}

// Main runs the command that the arguments (without the program's name) ask for and
// returns its exit status. Without arguments, or with a plan or scan alone, it opens
// the window. It stops when ctx is cancelled. Nothing is printed to Stdout by a
// command that fails, but for a sweep of which some jobs failed and a search that was
// stopped: they print what there is.
func Main(ctx context.Context, args []string, env Environment) (status int) {
	env.bar = env.Stderr
	env.Stdout, env.Stderr = printable{env.Stdout}, printable{env.Stderr}
	defer func() {
		if r := recover(); r != nil {
			fmt.Fprintf(env.Stderr, "pavilight: this is a fault of the program, not yours: %v\n%s", r, debug.Stack())
			status = OwnFault
		}
	}()
	var out bytes.Buffer
	err := run(ctx, args, env, &out)
	if err == nil {
		_, err = env.Stdout.Write(out.Bytes())
		if err != nil {
			err = ownFault(fmt.Errorf("the results cannot be written: %w; make room, or send them elsewhere", err))
		}
	}
	if err == nil {
		return Done
	}
	status, words := inWords(ctx, err)
	fmt.Fprintln(env.Stderr, words)
	return status
}

// inWords returns the exit status of an error and what to print about it.
func inWords(ctx context.Context, err error) (status int, words string) {
	var f *fault
	switch {
	case ctx.Err() != nil && errors.Is(err, context.Cause(ctx)), errors.Is(err, context.Canceled):
		return Stopped, "pavilight: stopped"
	case errors.As(err, &f):
		status = f.status
	default:
		status = OwnFault
	}
	var b strings.Builder
	for line := range strings.Lines(err.Error()) {
		fmt.Fprintf(&b, "pavilight: %s\n", strings.TrimRight(line, "\n"))
	}
	if status == CommandFault {
		b.WriteString("pavilight: see pavilight --help\n")
	}
	return status, strings.TrimRight(b.String(), "\n")
}

// unwritable returns the fault of a folder that cannot be written to, without the name
// of the system call and of temporary files.
func unwritable(path string, err error) error {
	var p *fs.PathError
	if errors.As(err, &p) {
		err = p.Err
	}
	return ownFault(fmt.Errorf("%s: cannot be written: %w; choose another place with --out", path, err))
}
