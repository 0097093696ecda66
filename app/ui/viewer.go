package ui

import (
	"os/exec"
	"path/filepath"
	"runtime"
	"time"

	"pavilight/app/words"
)

// openWithSystem has the system open a file with the program that it keeps for its kind.
// It waits a little, for systems that tell late that they have none. It must not be
// called on the toolkit's goroutine.
func openWithSystem(path string) error {
	var command *exec.Cmd
	switch runtime.GOOS {
	case "windows":
		command = exec.Command("rundll32", "url.dll,FileProtocolHandler", path)
	case "darwin":
		command = exec.Command("open", path)
	default:
		command = exec.Command("xdg-open", path)
	}
	byHand := words.Later("open %s by hand", path)
	if err := command.Start(); err != nil {
		return words.Errorf("%s, which opens files on this system, cannot be started; %s", filepath.Base(command.Path), byHand)
	}
	ended := make(chan error, 1)
	go func() { ended <- command.Wait() }() // ends with the viewer, at the latest
	const patience = 3 * time.Second
	select {
	case err := <-ended:
		if err != nil {
			return words.Errorf("the system has no program for %s files; %s", filepath.Ext(path), byHand)
		}
	case <-time.After(patience): // it is the viewer itself that runs
	}
	return nil
}
