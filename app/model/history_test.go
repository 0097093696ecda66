package model

import (
	"math/rand/v2"
	"testing"

	"pavilight/app/words"
)

func TestHistoryMergesADragIntoOneStep(t *testing.T) {
	h := newHistory(41.5, true)
	for _, v := range []float64{41.6, 41.7, 41.8} {
		h.push(words.Later("angle of P1"), "P1", v)
	}
	h.settle()
	h.push(words.Later("angle of P1"), "P1", 42)
	if h.undo(); h.present() != 41.8 {
		t.Fatalf("after one undo %v, want 41.8, where the drag ended", h.present())
	}
	if h.undo(); h.present() != 41.5 || h.modified() {
		t.Fatalf("after two undos %v, modified %v; want 41.5, unmodified", h.present(), h.modified())
	}
	if h.undo() {
		t.Error("undo beyond the first state")
	}
	if name, ok := h.redoName(); !ok || name.String() != "angle of P1" {
		t.Errorf("redo is named %q, %v", name, ok)
	}
}

func TestHistoryNeverMergesIntoTheSavedState(t *testing.T) {
	h := newHistory(1, true)
	h.push(words.Later("a"), "k", 2)
	h.settle()
	h.markSaved(func(s int) bool { return s == h.present() })
	h.push(words.Later("a"), "k", 3)
	if !h.modified() {
		t.Error("a step after saving is not marked as modified")
	}
	if h.undo(); h.present() != 2 || h.modified() {
		t.Errorf("undo after saving gives %d, modified %v; want the saved 2", h.present(), h.modified())
	}
}

func TestHistoryForgetsTheSavedStateWhenItIsCutOff(t *testing.T) {
	h := newHistory(1, true)
	h.push(words.Later("a"), "", 2)
	h.settle()
	h.markSaved(func(s int) bool { return s == h.present() })
	h.undo()
	h.push(words.Later("b"), "", 3) // the saved state can no longer be reached
	for h.undo() {
		if !h.modified() {
			t.Error("a state that differs from the file counts as saved")
		}
	}
	for h.redo() {
		if !h.modified() {
			t.Error("a state that differs from the file counts as saved")
		}
	}
}

func TestHistoryIsBounded(t *testing.T) {
	h := newHistory(0, true)
	for i := 1; i <= 3*mostSteps; i++ {
		h.push(words.Later("%d", i), "", i)
	}
	if len(h.steps) != mostSteps || h.present() != 3*mostSteps || !h.modified() {
		t.Errorf("%d steps, at %d, modified %v", len(h.steps), h.present(), h.modified())
	}
}

// TestHistoryAgainstPlainModel walks at random and compares with the obvious
// list of states kept beside it.
func TestHistoryAgainstPlainModel(t *testing.T) {
	rng := rand.New(rand.NewPCG(1, 2))
	for range 200 {
		h := newHistory(0, true)
		states, at := []int{0}, 0
		for i := 1; i < 60; i++ {
			switch rng.IntN(3) {
			case 0:
				h.push(words.Later("step"), "", i)
				states = append(states[:at+1], i)
				at++
			case 1:
				if h.undo() != (at > 0) {
					t.Fatal("undo disagrees about the start")
				}
				at = max(0, at-1)
			case 2:
				if h.redo() != (at+1 < len(states)) {
					t.Fatal("redo disagrees about the end")
				}
				at = min(len(states)-1, at+1)
			}
			if h.present() != states[at] {
				t.Fatalf("state %d, want %d", h.present(), states[at])
			}
		}
	}
}
