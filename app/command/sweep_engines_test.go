package command

import (
	"errors"
	"flag"
	"fmt"
	"os"
	"os/exec"
	"path/filepath"
	"regexp"
	"strings"
	"testing"
	"time"
)

var engines = flag.Bool("engines", false, "sweep under GNU parallel, Slurm (as root) and as a Kubernetes job would, by the lines of SWEEP.md")

// page returns the block of code of SWEEP.md below a heading, with so many parts.
func page(t *testing.T, heading string, parts int) string {
	t.Helper()
	text := mustRead(t, filepath.Join("..", "SWEEP.md"))
	_, text, ok := strings.Cut(text, "\n## "+heading+"\n")
	block := regexp.MustCompile("(?s)```[a-z]*\n(.*?)```").FindStringSubmatch(text)
	if !ok || block == nil {
		t.Fatalf("the page has no lines for %s", heading)
	}
	return regexp.MustCompile(`\b32\b`).ReplaceAllString(block[1], fmt.Sprint(parts))
}

// engineFolder makes a folder with the built program, the sample plans and a list of 210
// jobs, and returns it with what the sweep results in on one machine.
func engineFolder(t *testing.T) (folder, want string) {
	t.Helper()
	folder = t.TempDir()
	build := exec.Command("go", "build", "-buildvcs=false", "-o", filepath.Join(folder, "pavilight"), "pavilight/app")
	build.Env = append(os.Environ(), "CGO_ENABLED=0")
	if text, err := build.CombinedOutput(); err != nil {
		t.Fatalf("%v: %s", err, text)
	}
	plans, err := filepath.Glob("../../testdata/plans/*.toml")
	if err != nil || len(plans) < 30 {
		t.Fatal(len(plans), err)
	}
	var list strings.Builder
	for _, p := range plans {
		name := filepath.Base(p)
		if err := os.WriteFile(filepath.Join(folder, name), []byte(mustRead(t, p)), 0o644); err != nil {
			t.Fatal(err)
		}
		fmt.Fprintf(&list, "%s --pixels 60 --error 0.002 --over tilt=-20..20/20 --over material=quartz,beryl\n", name)
	}
	if err := os.WriteFile(filepath.Join(folder, "jobs.txt"), []byte(list.String()), 0o644); err != nil {
		t.Fatal(err)
	}
	began := time.Now()
	engine(t, folder, "bash", "-c", "pavilight look --list jobs.txt --out whole")
	want = results(t, filepath.Join(folder, "whole"))
	t.Logf("%d jobs on one machine in %.1f s", strings.Count(want, `{"job":`), time.Since(began).Seconds())
	return folder, want
}

// engine runs a command in the folder, whose program comes first on the path.
func engine(t *testing.T, folder, name string, args ...string) string {
	t.Helper()
	if _, err := exec.LookPath(name); err != nil {
		t.Skipf("%v: install it to sweep under it", err)
	}
	cmd := exec.Command(name, args...)
	cmd.Dir = folder
	cmd.Env = append(os.Environ(), "PATH="+folder+":"+os.Getenv("PATH"))
	text, err := cmd.CombinedOutput()
	var exit *exec.ExitError
	if errors.As(err, &exit) && exit.ExitCode() == 77 {
		t.Skipf("%s", text)
	}
	if err != nil {
		t.Fatalf("%v: %s", err, text)
	}
	return string(text)
}

// TestEngines runs the lines of the page on sweeps under the engines themselves: each
// makes the bytes of the sweep on one machine, with parts lost, stopped and run again.
func TestEngines(t *testing.T) {
	if !*engines {
		t.Skip("without -engines")
	}
	slurmNode, err := filepath.Abs("testdata/slurm.bash")
	if err != nil {
		t.Fatal(err)
	}
	folder, want := engineFolder(t)
	same := func(t *testing.T) {
		t.Helper()
		for _, name := range []string{"parts", "swept"} {
			defer os.RemoveAll(filepath.Join(folder, name))
		}
		if got := results(t, filepath.Join(folder, "swept")); got != want {
			t.Error("other bytes than on one machine")
		}
	}
	const merge = "\npavilight look --merge parts --out swept"
	t.Run("GNU parallel", func(t *testing.T) {
		if _, err := exec.LookPath("parallel"); err != nil {
			t.Skip(err)
		}
		for _, n := range []int{2, 7, 40} {
			engine(t, folder, "bash", "-c", "set -e\n"+page(t, "GNU parallel", n))
			same(t)
		}
	})
	t.Run("Slurm", func(t *testing.T) {
		script := strings.Replace(page(t, "Slurm", 7), "--cpus-per-task=4", "--cpus-per-task=1", 1)
		if err := os.WriteFile(filepath.Join(folder, "sweep.sbatch"), []byte(script), 0o755); err != nil {
			t.Fatal(err)
		}
		one := strings.Replace(script, "$SLURM_ARRAY_TASK_COUNT", "7", 1)
		if err := os.WriteFile(filepath.Join(folder, "one.sbatch"), []byte(one), 0o755); err != nil {
			t.Fatal(err)
		}
		for name, commands := range map[string]string{
			"the whole array": "sbatch --wait sweep.sbatch",
			"a lost part":     "sbatch --wait sweep.sbatch; rm parts/shard-2-of-7.jsonl; sbatch --wait --array=2 one.sbatch",
			"a part repeated": "sbatch --wait sweep.sbatch; mv parts/shard-1-of-7.jsonl parts/first.jsonl; sbatch --wait --array=1 one.sbatch",
			"stopped half-way": `job=$(sbatch --parsable sweep.sbatch)
				until grep -qs '"job"' parts/.shard-2-of-7.jsonl.*.part; do sleep 0.05; done
				scancel --signal=KILL --full "$job" || true
				scancel "$job"
				while [[ -n $(squeue --noheader) ]]; do sleep 0.2; done
				ls -A parts; [[ ! -e parts/shard-7-of-7.jsonl ]]
				sbatch --wait sweep.sbatch`,
		} {
			t.Run(name, func(t *testing.T) {
				t.Log(engine(t, folder, slurmNode, "bash", "-c", "set -e\n"+commands+merge))
				same(t)
			})
		}
	})
	t.Run("Kubernetes", func(t *testing.T) { // its command and its variable, in plain processes
		line := regexp.MustCompile(`(?s)args:\s*- ([^\n]*)`).FindStringSubmatch(page(t, "Kubernetes", 7))
		if line == nil {
			t.Fatal("the page has no command of a pod")
		}
		for index := range 7 {
			engine(t, folder, "env", fmt.Sprint("JOB_COMPLETION_INDEX=", index), "/bin/sh", "-c", line[1])
		}
		engine(t, folder, "sh", "-c", merge)
		same(t)
	})
}
