package ui

import "pavilight/app/words"

// The words of all tips, in one place. A tip says what a control does, and which keys
// do the same; it does not repeat its label.
const (
	tipMaterial = "What the stone is made of"
	tipWidth    = "Width of the girdle's outline: all other sizes follow"
	tipStop     = "End the tracing under way, or go on with it (Ctrl+.)"
	tipTier     = "Add a tier of facets to the plan"

	tipTilt  = "How far the stone is rocked; negative the other way. Arrow keys step it"
	tipTurn  = "Index that the stone is rocked toward, as on the gear"
	tipHead  = "Half-angle of the cone that the viewer's head takes out of the light"
	tipLight = "The light under which true colour is seen"
	tipRange = "How far the strip rocks the stone to either side, in degrees, toward the index above the maps and away from it"

	tipMedium = "What surrounds the stone in this column, without or with a dish"
	tipRow    = "What this row of maps shows"

	tipFaceUp   = "Look down on the table, index 0 up"
	tipSide     = "Look at the girdle, table up"
	tipFaceDown = "Look up at the culet"
	tipAskew    = "Look from above the girdle"

	tipAngle  = "Angle from the girdle's plane, 0° at the table. Also 41,8 or 41 deg 48 min"
	tipSlider = "Drag to see all maps follow. Ticks are critical angles: below its tick a pavilion facet begins to leak"

	tipBeside   = "Follow the same ray in another surrounding"
	tipCopy     = "Put the ray on the clipboard, as a table"
	tipDraw     = "Draw the ray into a file, or tell it as text"
	tipPageBack = "The page before (Page Up)"
	tipPageNext = "The next page (Page Down)"
	tipMachine  = "The machine whose numbers the sheet prints; yours can be described"
	tipOther    = "A stone to set beside this one, on the same scales"

	tipStrip = "A click on a small map tilts the large ones; the arrow keys go from one to the next"
	tipFrom  = "A line for each surrounding: how much of what comes back comes from each angle. What lies in the shaded part the viewer's head takes"

	tipLeast = "The least that the search tries"
	tipMost  = "The most that the search tries"
	tipLimit = "Empty: nothing is asked for"

	tipLetGo = "Follow no ray any more (Esc)"
)

// tipOf returns the tip on the name of a row in the rooms where something is asked for;
// empty where the name says enough.
func tipOf(name words.Key) words.Key {
	return map[words.Key]words.Key{
		"First":       "What the search makes as good as it can",
		"And":         "A second goal, weighed against the first",
		"counting":    "How many times as much as the first the second goal counts",
		"Forgives":    "Seeks a stone that stays good with any one angle off by up to so much, tried every 0.1°: it counts as its worst neighbour does. Takes several times as long",
		"Indices":     "In which order the facets of a tier stand on the sheet",
		"Other gears": "The indices are printed for these gears, too; Enter takes them",
		"For":         "Plain words for a client, more numbers for a colleague",
		"Pictured in": "The lights of the two pictures in true colour",
	}[name]
}

// tipRoom says what a room is for.
func tipRoom(r room) words.Key {
	return [...]words.Key{
		"See where the light goes (Ctrl+1)",
		"Search for better angles (Ctrl+2)",
		"The sheet to cut by (Ctrl+3)",
		"The report that explains the stone (Ctrl+4)",
	}[r]
}
