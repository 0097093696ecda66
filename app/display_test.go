//go:build cgo

package main

import (
	"net"
	"path/filepath"
	"slices"
	"strings"
	"testing"
)

func TestX11Addresses(t *testing.T) {
	tests := []struct {
		name string
		want []address
	}{
		{":1", []address{{"unix", "/tmp/.X11-unix/X1"}, {"unix", "@/tmp/.X11-unix/X1"}}},
		{":0.0", []address{{"unix", "/tmp/.X11-unix/X0"}, {"unix", "@/tmp/.X11-unix/X0"}}},
		{"unix:7", []address{{"unix", "/tmp/.X11-unix/X7"}, {"unix", "@/tmp/.X11-unix/X7"}}},
		{"localhost:10.0", []address{{"tcp", "localhost:6010"}}},
		{"[::1]:2", []address{{"tcp", "[::1]:6002"}}},
		{"/run/x/org.x:0", []address{{"unix", "/run/x/org.x:0"}, {"unix", "/run/x/org.x"}}},
		{"nonsense", nil},
		{":many", nil},
		{":99999", nil},
	}
	for _, tt := range tests {
		if got := x11Addresses(tt.name); !slices.Equal(got, tt.want) {
			t.Errorf("%q: got %v, want %v (source: X(7), DISPLAY NAMES)", tt.name, got, tt.want)
		}
	}
}

func TestDisplayAnswers(t *testing.T) {
	dir := t.TempDir()
	listener, err := net.Listen("unix", filepath.Join(dir, "wayland-7"))
	if err != nil {
		t.Fatal(err)
	}
	defer listener.Close()
	tests := []struct {
		name string
		goos string
		env  map[string]string
		want string // part of the error; "" for none
	}{
		{"nothing set", "linux", nil, "neither DISPLAY nor WAYLAND_DISPLAY is set"},
		{"nobody there", "linux", map[string]string{"DISPLAY": ":59998"}, "DISPLAY=:59998 does not answer"},
		{"no display's name", "linux", map[string]string{"DISPLAY": "x"}, "DISPLAY=x does not answer"},
		{"a listener", "linux", map[string]string{"WAYLAND_DISPLAY": "wayland-7", "XDG_RUNTIME_DIR": dir}, ""},
		{"the second answers", "linux", map[string]string{"WAYLAND_DISPLAY": filepath.Join(dir, "wayland-7"), "DISPLAY": "x"}, ""},
		{"a system with its own screen", "darwin", nil, ""},
	}
	for _, tt := range tests {
		err := displayAnswers(tt.goos, func(key string) string { return tt.env[key] })
		switch {
		case tt.want == "" && err != nil:
			t.Errorf("%s: %v", tt.name, err)
		case tt.want != "" && (err == nil || !strings.Contains(err.Error(), tt.want)):
			t.Errorf("%s: got %v, want a word on %q", tt.name, err, tt.want)
		}
	}
}
