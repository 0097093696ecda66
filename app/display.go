//go:build cgo

package main

import (
	"errors"
	"fmt"
	"net"
	"path/filepath"
	"runtime"
	"strconv"
	"strings"
	"time"
)

// displayPatience is how long a display on another machine may take to answer.
const displayPatience = 3 * time.Second

// displayAnswers returns nil if a display can be reached, else says in words what was
// tried. It only asks where X11 or Wayland is the way to a screen, so that a start
// without a screen ends in a sentence and not in the window library's alarm.
func displayAnswers(goos string, getenv func(string) string) error {
	if goos == "windows" || goos == "darwin" {
		return nil
	}
	var tried []string
	for _, d := range displays(getenv) {
		for _, address := range d.addresses {
			connection, err := net.DialTimeout(address.network, address.name, displayPatience)
			if err == nil {
				connection.Close()
				return nil
			}
		}
		tried = append(tried, fmt.Sprintf("%s does not answer", d.variable))
	}
	if len(tried) == 0 {
		return errors.New("there is no display: neither DISPLAY nor WAYLAND_DISPLAY is set; " +
			"the commands work without one (see pavilight --help)")
	}
	return fmt.Errorf("no display can be reached: %s; the commands work without one (see pavilight --help)",
		strings.Join(tried, ", "))
}

// display is one display that the environment names, and where it may listen.
type display struct {
	variable  string // as set: "DISPLAY=:1"
	addresses []address
}

type address struct{ network, name string }

// displays returns what the environment names, Wayland first.
func displays(getenv func(string) string) []display {
	var ds []display
	if name := getenv("WAYLAND_DISPLAY"); name != "" {
		path := name
		if !filepath.IsAbs(path) {
			path = filepath.Join(getenv("XDG_RUNTIME_DIR"), name)
		}
		ds = append(ds, display{"WAYLAND_DISPLAY=" + name, []address{{"unix", path}}})
	}
	if name := getenv("DISPLAY"); name != "" {
		ds = append(ds, display{"DISPLAY=" + name, x11Addresses(name)})
	}
	return ds
}

// x11Addresses reads [host]:display[.screen], as X(7) describes it: a display without
// a host listens on a local socket, one with a host on TCP port 6000 + display.
func x11Addresses(name string) []address {
	colon := strings.LastIndex(name, ":")
	if colon < 0 {
		return nil
	}
	host, rest := name[:colon], name[colon+1:]
	number, _, _ := strings.Cut(rest, ".")
	n, err := strconv.Atoi(number)
	if err != nil || n < 0 || n > 65535-6000 {
		return nil
	}
	switch {
	case strings.HasPrefix(host, "/"): // a socket's path, as launchd sets it
		return []address{{"unix", host + ":" + number}, {"unix", host}}
	case host == "" || host == "unix":
		socket := "/tmp/.X11-unix/X" + number
		if runtime.GOOS == "linux" { // the abstract socket of the same name
			return []address{{"unix", socket}, {"unix", "@" + socket}}
		}
		return []address{{"unix", socket}}
	default:
		return []address{{"tcp", net.JoinHostPort(strings.Trim(host, "[]"), strconv.Itoa(6000+n))}}
	}
}
