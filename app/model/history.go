package model

import (
	"slices"

	"pavilight/app/words"
)

// history is what undo and redo walk along: the states of a document, each with
// the name of the step that led to it. The zero value holds nothing; start with
// newHistory.
type history[T any] struct {
	steps []step[T]
	at    int // the present one
	saved int // the one that is on disk; -1 if none is any more
}

type step[T any] struct {
	name  words.Text // what was done, as the Edit menu says it
	merge string     // steps with the same key, not empty, are one step
	state T
}

// mostSteps bounds the memory; the oldest steps are forgotten first.
const mostSteps = 500

func newHistory[T any](state T, saved bool) history[T] {
	h := history[T]{steps: []step[T]{{state: state}}, saved: -1}
	if saved {
		h.saved = 0
	}
	return h
}

func (h *history[T]) present() T { return h.steps[h.at].state }

// push makes state the present one. What could be redone is forgotten.
func (h *history[T]) push(name words.Text, merge string, state T) {
	if h.saved > h.at {
		h.saved = -1
	}
	last := &h.steps[h.at]
	if merge != "" && last.merge == merge {
		h.steps = h.steps[:h.at+1]
		last.name, last.state = name, state
		return
	}
	h.steps = append(h.steps[:h.at+1], step[T]{name, merge, state})
	h.at++
	if excess := len(h.steps) - mostSteps; excess > 0 {
		h.steps = append([]step[T](nil), h.steps[excess:]...)
		h.at -= excess
		h.saved = max(-1, h.saved-excess)
	}
}

// settle ends a run of merged steps: the next one stands by itself.
func (h *history[T]) settle() { h.steps[h.at].merge = "" }

// undoName names the step that undo takes back, false if there is none.
func (h *history[T]) undoName() (words.Text, bool) {
	if h.at == 0 {
		return words.Text{}, false
	}
	return h.steps[h.at].name, true
}

// redoName names the step that redo brings back, false if there is none.
func (h *history[T]) redoName() (words.Text, bool) {
	if h.at+1 >= len(h.steps) {
		return words.Text{}, false
	}
	return h.steps[h.at+1].name, true
}

func (h *history[T]) undo() bool {
	if h.at == 0 {
		return false
	}
	h.settle()
	h.at--
	h.settle()
	return true
}

func (h *history[T]) redo() bool {
	if h.at+1 >= len(h.steps) {
		return false
	}
	h.at++
	h.settle()
	return true
}

func (h *history[T]) modified() bool { return h.at != h.saved }

// markSaved says that the state for which is reports true is on disk; none if it is not
// remembered. A state that may be saved later must be settled before another is pushed.
func (h *history[T]) markSaved(is func(T) bool) {
	h.saved = slices.IndexFunc(h.steps, func(s step[T]) bool { return is(s.state) })
}
