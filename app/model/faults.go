package model

import (
	"errors"
	"path/filepath"
	"strings"

	"pavilight/app/words"
	"pavilight/facets"
)

// InWords returns what an error says, one fault a line, nil for none. Files are
// named without their folders, which the window has no room for.
func InWords(w *words.Words, err error) []string {
	if err == nil {
		return nil
	}
	faults := faultsOf(err)
	if faults == nil {
		return strings.Split(w.Error(err), "\n")
	}
	lines := make([]string, len(faults))
	for i, f := range faults {
		lines[i] = faultWords(w, f)
	}
	return lines
}

// faultsOf returns the faults of a plan or scan that an error tells of, nil if it tells of
// something else.
func faultsOf(err error) facets.Faults {
	var faults facets.Faults
	if errors.As(err, &faults) {
		return faults
	}
	var one *facets.Fault
	if errors.As(err, &one) {
		return facets.Faults{one}
	}
	return nil
}

// withoutPlace returns the error without the file and the lines of its faults, for a plan
// that no file holds as it is.
func withoutPlace(err error) error {
	faults := faultsOf(err)
	if faults == nil {
		return err
	}
	plain := make(facets.Faults, len(faults))
	for i, f := range faults {
		copied := *f
		copied.File, copied.Line = "", 0
		plain[i] = &copied
	}
	return plain
}

// faultWords tells a fault of a plan or scan. What is most often wrong while a plan is
// changed is told in the language; the rest is English.
func faultWords(w *words.Words, f *facets.Fault) string {
	short := *f
	if f.File != "" {
		short.File = filepath.Base(f.File)
	}
	short.Why, short.Remedy = w.Like(commonFaults(), f.Why), w.Like(commonFaults(), f.Remedy)
	text := short.Error()
	if f.Tier != "" {
		before, after, _ := strings.Cut(text, "tier \"")
		text = before + w.Say("tier \"%s", after)
	}
	return text
}

// commonFaults are what the solver says of tiers, and how it says to mend them.
func commonFaults() []words.Key {
	return []words.Key{
		"%s never touches the stone",
		"cut it deeper, cut it before the tiers that are in its place, or delete it",
		"%s touches a corner or an edge only and takes nothing off",
		"cut it deeper or delete it",
		"%s lies on a facet that is there already",
		"delete one of the two, or mark the earlier one temporary and cut this one deeper",
		"%s would take the whole stone off",
		"cut it less deep",
		"%s lies too close to other planes to tell where they meet",
		"move it apart or make it meet them at a corner",
		"%s is taken off by the other facets of its own tier",
		"cut the tier less deep, or give fewer indices",
		"%s is taken off by tier %s",
		"mark the tier temporary = true if it shall go, else cut %s less deep",
		"at index %s the facet misses %s by %s mm",
		"give these facets a tier of their own, or mend the angle or the index",
		"the angle is missing and cannot be found",
		"give it, or name two corners in meet",
		"the index is missing and cannot be found",
		"give it",
		"an upright facet never crosses the axis",
		"use distance or meet",
		"the other side of the girdle is not cut yet",
		"cut it first, or stop by level",
		"nothing says how deep the tier is cut",
		"give it a stop rule",
		"no girdle facet stands at index %s",
		"use meet, or an index of the girdle; there are %s",
		"that tier is level, so its edges all lie at one height",
		"stop by meet or level",
		"it has no facet at index %s, so the edge would not be level",
		"use an index that both tiers have, or stop by meet",
		"both tiers have the same slope and make no edge",
		"change the angle of one",
		"the outline is not cut yet, so the width is not known",
		"cut the girdle first",
		"the stone is nowhere this wide on this side, or not yet closed there",
		"cut the main facets of this side first, or ask for a smaller flat",
		"there is no tier of this name so far",
		"cut it before this tier",
		"nothing of that tier is left at this point",
		"stop by a tier that still stands",
		"nothing of that facet is left at this point",
		"stop by a facet that still stands",
		"that tier has no facet at this index",
		"it has %s",
		"these planes share no corner on the stone as it stands",
		"corners there with them: %s",
		"the facet at index %s finds no such corner",
		"give these facets a tier of their own",
		"the names fit too many corners",
		"name each facet with its index, as in P1@6",
		"check the corners, or give the angle and one corner",
		"the solid stays open toward %s",
		"add the tiers that close it there",
	}
}
