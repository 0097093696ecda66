//go:build cgo

package main

import (
	"fmt"
	"os"
	"runtime"

	"github.com/go-gl/glfw/v3.4/glfw"
)

// openGLAnswers returns nil if a window with OpenGL can be had, by trying one that is
// never shown. The window library itself would wait for ever where there is none, as
// on a remote screen without GLX. It must run on the main thread.
func openGLAnswers() error {
	// The library may choose X11 where Wayland is there too: only if both fail is
	// there no window.
	first := glfw.AnyPlatform
	if runtime.GOOS == "linux" && os.Getenv("DISPLAY") != "" &&
		os.Getenv("WAYLAND_DISPLAY") == "" && os.Getenv("XDG_RUNTIME_DIR") == "" {
		first = glfw.PlatformX11 // Wayland's library complains on stderr where it cannot be
	}
	err := hiddenWindow(first)
	if err != nil && hiddenWindow(glfw.PlatformX11) == nil {
		err = nil
	}
	glfw.InitHint(glfw.PlatformHint, int(glfw.AnyPlatform))
	if err != nil {
		return fmt.Errorf("this display gives no window with OpenGL (%w); "+
			"the commands work without one (see pavilight --help)", err)
	}
	return nil
}

func hiddenWindow(platform glfw.Platform) error {
	glfw.InitHint(glfw.PlatformHint, int(platform))
	if err := glfw.Init(); err != nil {
		return err
	}
	glfw.WindowHint(glfw.Visible, glfw.False)
	// The window library sets no class, by which an X11 desktop finds the program's entry
	// and icon (StartupWMClass); what is set here stays until its own window is made.
	glfw.WindowHintString(glfw.X11ClassName, "Pavilight")
	glfw.WindowHintString(glfw.X11InstanceName, "pavilight")
	window, err := glfw.CreateWindow(16, 16, "Pavilight", nil, nil)
	if err != nil {
		glfw.Terminate()
		return err
	}
	// The connection stays open for the window library, which takes it over: a display
	// whose only client leaves resets itself and turns the next one away meanwhile.
	window.Destroy()
	return nil
}
