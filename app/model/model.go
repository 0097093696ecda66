// Package model holds the state behind the window: the plan that is open, its
// history, the maps that are being traced and the words and numbers that are
// shown about them. It knows no widget and needs no display.
//
// Threads. The methods of Document and Look are called on one goroutine, the
// window's. What runs elsewhere hands its answers over through the do function
// that NewLook was given; fields may be read whenever one of the callbacks runs.
package model
