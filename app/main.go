// Pavilight shows where the light in a faceted gemstone goes: a window for people,
// commands for batches, one engine behind both.
package main

import (
	"context"
	"os"
	"os/signal"
	"syscall"

	"pavilight/app/command"
)

func main() {
	os.Exit(run())
}

// run carries out the command line and returns the exit status. Ctrl-C stops a
// command in words; a second one ends the program at once.
func run() int {
	ctx, stop := signal.NotifyContext(context.Background(), os.Interrupt, syscall.SIGTERM)
	defer stop()
	context.AfterFunc(ctx, stop)
	return command.Main(ctx, os.Args[1:], command.Environment{
		Stdout:   os.Stdout,
		Stderr:   os.Stderr,
		Terminal: isTerminal(os.Stderr),
		Window: func(ctx context.Context, path string) error {
			err := openWindow(ctx, path)
			if err != nil {
				alarm(err)
			}
			return err
		},
	})
}

// isTerminal reports whether f is a device that shows characters.
func isTerminal(f *os.File) bool {
	info, err := f.Stat()
	return err == nil && info.Mode()&os.ModeCharDevice != 0
}
