package sheet

import (
	"pavilight/app/words"
	"pavilight/facets"
)

// Machine is a faceting machine in its user's own terms. The zero Machine shows
// every angle to a hundredth of a degree, has no cheater, and keeps the crown's
// numbers as they were on the pavilion.
type Machine struct {
	Name           string
	Gear           int          // teeth; 0 takes the gear of the plan
	PavilionOffset facets.Angle // the machine shows the angle plus this while the pavilion faces the lap
	CrownOffset    facets.Angle // likewise for the crown
	AngleStep      facets.Angle // smallest step of the angle scale; 0 is a hundredth of a degree
	Cheater        facets.Angle // how far the index can be shifted to either side of a tooth; 0 without one
	CrownReversed  bool         // after transfer the numbers run the other way round the stone
	TransferIndex  float64      // where the gear stands while the stone is transferred
	TableAdapter   facets.Angle // angle of the adapter that the table is cut with; 0 without one
	Grit           []string     // the user's own notes on laps and grits, printed as they stand
}

// plainName is what the machine of a user who has described none is called.
const plainName words.Key = "plain machine, none named"

// Plain is the machine of a user who has described none. It reverses the crown's
// numbers, because a stone that is turned over end for end on a keyed dop shows
// its azimuths the other way round; it adds nothing to the angles, and can shift
// the index by half a tooth of any gear from 32 teeth on.
func Plain() Machine {
	return Machine{
		Name:          plainName.English(),
		AngleStep:     0.01 * facets.Degree,
		Cheater:       6 * facets.Degree,
		CrownReversed: true,
	}
}

// offset returns what the machine adds to an angle on a side.
func (m *Machine) offset(facing facets.Side) facets.Angle {
	if facing == facets.Crown {
		return m.CrownOffset
	}
	return m.PavilionOffset
}
