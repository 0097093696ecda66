package gems

// garnets returns the garnets, all isotropic.
func garnets() []*Material {
	return []*Material{
		{
			Key: "pyrope", Name: "Pyrope",
			Names: []string{"chrome pyrope"},
			Rays: []Dispersion{
				fitted(1.746, 0.022, handbooks, gemTable),
			},
			Density: 3.7, DensityRange: Span{3.51, 3.78}, DensitySource: gemTable,
			Hardness: Span{7, 7.5}, WearSource: gemTable,
			Cleavage:  "none",
			Toughness: "good", ToughnessSource: handbooks,
			Cautions:      []string{wet},
			CautionSource: practice,
			Notes:         "Tables print dispersions of 0.022 and 0.027.",
		},
		{
			Key: "rhodolite", Name: "Rhodolite",
			Names: []string{"pyrope-almandine"},
			Rays: []Dispersion{
				fitted(1.76, 0.027, gemTable, gemTable),
			},
			Density: 3.84, DensityRange: Span{3.8, 3.88}, DensitySource: gemTable,
			Hardness: Span{7, 7.5}, WearSource: gemTable,
			Cleavage:  "none",
			Toughness: "good", ToughnessSource: handbooks,
			Cautions:      []string{wet},
			CautionSource: practice,
		},
		{
			Key: "almandine", Name: "Almandine",
			Names: []string{"almandite"},
			Rays: []Dispersion{
				fitted(1.79, 0.024, herbertSmith, gemTable),
			},
			Density: 4.05, DensityRange: Span{4.05, 4.3}, DensitySource: gemTable,
			Hardness: Span{7, 7.5}, WearSource: gemTable,
			Cleavage:  "none",
			Toughness: "good", ToughnessSource: handbooks,
			Cautions:      []string{wet},
			CautionSource: practice,
		},
		{
			Key: "spessartine", Name: "Spessartine",
			Names: []string{"mandarin garnet", "malaya garnet"},
			Rays: []Dispersion{
				fitted(1.8, 0.027, gemTable, gemTable),
			},
			Density: 4.15, DensityRange: Span{4.12, 4.2}, DensitySource: gemTable,
			Hardness: Span{7, 7.5}, WearSource: gemTable,
			Cleavage:  "none",
			Toughness: "good", ToughnessSource: handbooks,
			Cautions:      []string{wet},
			CautionSource: practice,
			Notes: "The index is the middle of 1.79 to 1.81; malaya stones, mixed with " +
				"pyrope, lie near 1.76.",
		},
		{
			Key: "grossular", Name: "Grossular",
			Names: []string{"tsavorite", "hessonite", "mint garnet"},
			Rays: []Dispersion{
				fitted(1.74, 0.028, gemTable, herbertSmith),
			},
			Density: 3.61, DensityRange: Span{3.57, 3.73}, DensitySource: gemTable,
			Hardness: Span{6.5, 7.5}, WearSource: gemTable,
			Cleavage:  "none",
			Toughness: "good", ToughnessSource: handbooks,
			Cautions:      []string{wet},
			CautionSource: practice,
			Notes:         "Hessonite lies at 1.742 to 1.748.",
		},
		{
			Key: "andradite", Name: "Andradite",
			Names: []string{"demantoid", "topazolite"},
			Rays: []Dispersion{
				fitted(1.888, 0.057, gemTable, gemTable),
			},
			Density: 3.84, DensityRange: Span{3.82, 3.9}, DensitySource: gemTable,
			Hardness: Span{6.5, 7}, WearSource: gemTable,
			Cleavage:  "none",
			Toughness: "fair", ToughnessSource: handbooks,
			Cautions:      []string{wet, horsetail},
			CautionSource: practice,
		},
		{
			Key: "uvarovite", Name: "Uvarovite",
			Rays: []Dispersion{
				fitted(1.87, 0.027, gemTable, gemTable),
			},
			Density: 3.77, DensityRange: Span{3.71, 3.81}, DensitySource: gemTable,
			Hardness: Span{6.5, 7}, WearSource: gemTable,
			Cleavage:  "none",
			Toughness: "fair", ToughnessSource: handbooks,
			Cautions:      []string{wet},
			CautionSource: practice,
			Notes:         "Rarely large enough to cut.",
		},
	}
}
