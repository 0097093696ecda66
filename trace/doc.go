// Package trace follows light through a convex stone and keeps the ledger of
// where it goes.
//
// Rays run from the eye back into the scene: light paths are reversible. A ray
// that enters an isotropic convex stone never splits inside: at each facet a
// known part leaves for good and the rest goes on.
//
// Viewer's frame. +Z to the eye, +X right, +Y up on every map; face-up, the
// stone's index 0 (its +x) points up the picture and indices grow anticlockwise.
// Up and down in the ledger are the viewer's.
package trace
