package trace

import (
	"os/exec"
	"path/filepath"
	"regexp"
	"strings"
	"testing"
	"unsafe"
)

// TestFlightStandsOnCacheLines: a vector that straddles two lines costs twice.
func TestFlightStandsOnCacheLines(t *testing.T) {
	const line = 64
	tr, err := newTracer(brilliant(t), Settings{})
	if err != nil {
		t.Fatal(err)
	}
	k := newKernel(tr)
	if k == nil {
		t.Skip("this processor has no kernel")
	}
	f := k.newFlight()
	for name, at := range map[string]uintptr{
		"flight":     uintptr(unsafe.Pointer(f)),
		"groups":     unsafe.Offsetof(f.groups),
		"each group": unsafe.Sizeof(f.groups[0]),
	} {
		if at%line != 0 {
			t.Errorf("%s: %d bytes past a cache line", name, at%line)
		}
	}
}

// TestKernelDisassembles reads the passes as a processor gets them, where the GNU
// disassembler is installed: that of the Go tools does not know the newer encoding. It is
// to find what TestKernelHasNoOldInstructions looks for in the source.
func TestKernelDisassembles(t *testing.T) {
	objdump, err := exec.LookPath("objdump")
	if err != nil {
		t.Skip("objdump of the GNU binutils is not installed")
	}
	program := filepath.Join(t.TempDir(), "trace.test") // the one that runs has no names in it
	if out, err := exec.Command("go", "test", "-c", "-o", program, ".").CombinedOutput(); err != nil {
		t.Fatalf("%v\n%s", err, out)
	}
	instruction := regexp.MustCompile(`^\s*[0-9a-f]+:\s+(\S+)(.*)`)
	for _, pass := range []string{"aim", "look", "settle", "depart", "mirrorAveraged", "mirrorPolarised", "dim",
		"splitAveraged", "splitPolarised", "tally", "bin"} {
		out, err := exec.Command(objdump, "-d", "--no-show-raw-insn", "--disassemble=pavilight/trace."+pass+".abi0", program).Output()
		if err != nil {
			t.Fatal(err)
		}
		vectors, last := 0, ""
		for line := range strings.Lines(string(out)) {
			m := instruction.FindStringSubmatch(line)
			if m == nil {
				continue
			}
			if strings.Contains(m[2], "mm") { // xmm, ymm
				vectors++
				if !strings.HasPrefix(m[1], "v") {
					t.Errorf("%s: old instruction: %s", pass, line)
				}
			}
			if m[1] == "ret" && last != "vzeroupper" {
				t.Errorf("%s returns without clearing the upper halves", pass)
			}
			last = m[1]
		}
		const least = 20
		if vectors < least {
			t.Errorf("%s: %d vector instructions found: the test looks in the wrong place", pass, vectors)
		}
	}
}
