// Command packaging makes what app/package puts around the built program: the icon in
// its sizes and the licences of everything by others that is linked into it. It is
// part of the build, not of the program.
package main

import (
	"errors"
	"fmt"
	"os"
	"path/filepath"

	"pavilight/app/icon"
)

const usage = `Usage:
  go run ./app/packaging icon FOLDER   writes the icon as SVG, PNG in the usual sizes, and ICO
  go run ./app/packaging licences      writes app/licences/third-party.txt anew`

func main() {
	if err := run(os.Args[1:]); err != nil {
		fmt.Fprintln(os.Stderr, err)
		os.Exit(1)
	}
}

func run(args []string) error {
	switch {
	case len(args) == 2 && args[0] == "icon":
		return writeIcon(args[1])
	case len(args) == 1 && args[0] == "licences":
		text, err := collect(".")
		if err != nil {
			return err
		}
		return os.WriteFile(filepath.FromSlash("app/licences/third-party.txt"), text, 0o644)
	default:
		return errors.New(usage)
	}
}

// writeIcon writes pavilight.svg, pavilight.ico and pavilight-SIZE.png into a folder.
func writeIcon(folder string) error {
	if err := os.MkdirAll(folder, 0o755); err != nil {
		return err
	}
	write := func(name string, content []byte) error {
		return os.WriteFile(filepath.Join(folder, name), content, 0o644)
	}
	// The sizes that the Icon Theme Specification's hicolor theme has folders for.
	for _, size := range []int{16, 22, 24, 32, 48, 64, 128, 256, 512} {
		if err := write(fmt.Sprintf("pavilight-%d.png", size), icon.PNG(size)); err != nil {
			return err
		}
	}
	return errors.Join(
		write("pavilight.svg", icon.SVG()),
		write("pavilight.ico", icon.ICO(16, 24, 32, 48, 64, 256)))
}
