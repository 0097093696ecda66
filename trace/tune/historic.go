package tune

// Historic is a published set of proportions of the round brilliant of diamond.
type Historic struct {
	Name            string
	Table           float64 // percent
	Crown, Pavilion float64 // degrees
	Source          string
}

// HistoricProportions returns published proportions, in the order of their years. They
// are shown as points beside what a field finds, without any judgement: each author had
// goals and models of his own.
func HistoricProportions() []Historic {
	const memory = "as quoted in the trade, from memory; its heights agree with its angles"
	return []Historic{
		{"Tolkowsky 1919", 53, 34.5, 40.75, "M. Tolkowsky, Diamond Design (1919), as tabulated in the trade"},
		{"Johnsen 1926", 56.1, 41.1, 38.7, "A. Johnsen (1926) and S. Rösch (1927), vertical light only; angles from the tabulated heights 19.2 % and 40.0 %"},
		{"Eppler 1939", 56, 33.2, 40.8, "W. F. Eppler (1939), practical fine cut; angles from the tabulated heights 14.4 % and 43.2 %"},
		{"Parker 1951", 55.9, 25.5, 40.9, memory},
		{"Eulitz 1968", 56.5, 33.6, 40.8, memory},
		{"Scandinavian 1969", 57.5, 34.5, 40.75, memory},
	}
}
