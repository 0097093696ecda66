//go:build !windows

package main

// alarm does nothing here: what goes wrong is printed, also where a desktop started the
// program, which keeps it in its journal.
func alarm(error) {}
