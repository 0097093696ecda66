// Package testdata holds the sample plans and what the tests compare with.
//
// The plans are our own inventions, and so are their names.
package testdata

import (
	"embed"
	"io/fs"
)

// Bundled is the name of the plan that the program takes when none is named.
const Bundled = "round.toml"

//go:embed plans/*.toml
var plans embed.FS

// Plans returns the sample plans, one .toml file each, in a flat file system.
func Plans() fs.FS {
	sub, err := fs.Sub(plans, "plans")
	if err != nil {
		panic(err) // "plans" is a valid path, which is all that fs.Sub asks for
	}
	return sub
}
