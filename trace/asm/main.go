// Command asm writes the passes of the fast tracer, ../kernel_amd64.s. Run it
// there by go generate; it stands in a module of its own, so that the program
// does not depend on the generator.
//
// Each pass is one page of this package. A pass walks over the groups of a
// flight, eight rays side by side in each 256-bit register (AVX2 and FMA).
package main

import (
	"fmt"
	"log"
	"os"
	"regexp"

	"github.com/mmcloughlin/avo/build"
	"github.com/mmcloughlin/avo/pass"
	"github.com/mmcloughlin/avo/printer"
)

func main() {
	aim()
	look()
	settle()
	depart()
	mirror("mirrorAveraged", false)
	mirror("mirrorPolarised", true)
	dim()
	splitAveraged()
	splitPolarised()
	tally()
	bin()
	if err := write("../kernel_amd64.s"); err != nil {
		log.Fatal(err)
	}
}

// write turns what the passes have said into a file of Go assembly. The places of
// fields come from go_asm.h, which the Go tools derive from the structures
// themselves, so the two cannot drift apart.
func write(name string) error {
	file, err := ctx.Result()
	if err != nil {
		build.LogError(log.Default(), err, 10)
		os.Exit(1)
	}
	if err := pass.Compile.Execute(file); err != nil {
		return err
	}
	file.Includes = append(file.Includes, "go_asm.h")
	text, err := printer.NewGoAsm(printer.Config{Name: "trace/asm", Argv: []string{"go", "generate"}}).Print(file)
	if err != nil {
		return err
	}
	// Where a pass needs more than the 16 registers of AVX2 the generator takes those
	// that only AVX-512 has.
	if found := regexp.MustCompile(`\bY(1[6-9]|[23][0-9])\b`).Find(text); found != nil {
		return fmt.Errorf("a pass uses %s: it holds too many values at a time", found)
	}
	return os.WriteFile(name, text, 0o644)
}
