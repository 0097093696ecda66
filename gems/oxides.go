package gems

// oxides returns the oxide minerals, corundum first.
func oxides() []*Material {
	return []*Material{
		{
			Key: "corundum", Name: "Corundum",
			Names: []string{"sapphire", "ruby", "padparadscha", "synthetic corundum"},
			Rays: []Dispersion{
				{Kind: Sellmeier, Coefficients: []float64{
					1.4313493, 0.0726631,
					0.65054713, 0.1193242,
					5.3414021, 18.028251,
				}, Lo: 200, Hi: 5000, Temperature: "20 °C", Source: malitsonDodge1972},
				{Kind: Sellmeier, Coefficients: []float64{
					1.5039759, 0.0740288,
					0.55069141, 0.1216529,
					6.5927379, 20.072248,
				}, Lo: 200, Hi: 5000, Temperature: "20 °C", Source: malitsonDodge1972},
			},
			Density: 4.0, DensityRange: Span{3.99, 4.01}, DensitySource: gemTable,
			Hardness: Span{9, 9}, WearSource: gemTable,
			Cleavage:  "none; parts on twin planes",
			Toughness: "tough; a twinned crystal parts", ToughnessSource: handbooks,
			Cautions:      []string{wet, stress},
			CautionSource: practice,
		},
		{
			Key: "chrysoberyl", Name: "Chrysoberyl",
			Names: []string{"alexandrite", "cat's-eye"},
			Rays: []Dispersion{
				{Kind: Resonance, Coefficients: []float64{1.70690, -0.01760, 1.28477, 0.01169},
					Lo: 250, Hi: 2600, Temperature: "room", Source: walling1980},
				{Kind: Resonance, Coefficients: []float64{1.78522, -0.01681, 1.21202, 0.01262},
					Lo: 250, Hi: 2600, Temperature: "room", Source: walling1980},
				{Kind: Resonance, Coefficients: []float64{1.58829, -0.01696, 1.42711, 0.01113},
					Lo: 250, Hi: 2600, Temperature: "room", Source: walling1980},
			},
			Density: 3.73, DensityRange: Span{3.7, 3.78}, DensitySource: gemTable,
			Hardness: Span{8.5, 8.5}, WearSource: gemTable,
			Cleavage:  "good {110}, poor {010}",
			Toughness: "excellent; bears knocks and pressure well", ToughnessSource: handbooks,
			Cautions:      []string{wet, beryllium},
			CautionSource: practice,
			Notes: "Measured on alexandrite, whose indices lie a little below the 1.746 to " +
				"1.755 of gem tables. The paper names its rays by crystal direction; here they stand " +
				"in ascending order (its gamma, alpha, beta).",
		},
		{
			Key: "spinel", Name: "Spinel",
			Names: []string{"red spinel", "blue spinel"},
			Rays: []Dispersion{
				{Kind: Sellmeier, Coefficients: []float64{1.8938, 0.09942, 3.0755, 15.826},
					Lo: 350, Hi: 5500, Temperature: "room", Source: tropfThomas1991},
			},
			Density: 3.6, DensityRange: Span{3.58, 3.61}, DensitySource: gemTable,
			Hardness: Span{8, 8}, WearSource: gemTable,
			Cleavage:  "imperfect, rarely seen",
			Toughness: "good", ToughnessSource: handbooks,
			Cautions:      []string{wet},
			CautionSource: practice,
			Notes: "The formula is for synthetic MgAl₂O₄ of the exact composition (1.716); " +
				"natural red and blue gems show 1.712 to 1.720, darker blue ones with iron or zinc " +
				"more. Flame-fusion stones: synthetic-spinel.",
		},
		{
			Key: "taaffeite", Name: "Taaffeite",
			Names: []string{"magnesiotaaffeite"},
			Rays: []Dispersion{
				fitted(1.722, 0.019, gemTable, handbooks),
				fitted(1.718, 0.019, gemTable, handbooks),
			},
			Density: 3.61, DensityRange: Span{3.6, 3.62}, DensitySource: gemTable,
			Hardness: Span{8, 8.5}, WearSource: gemTable,
			Cleavage:  "none",
			Toughness: "good", ToughnessSource: handbooks,
			Cautions:      []string{wet, beryllium},
			CautionSource: practice,
		},
		{
			Key: "cassiterite", Name: "Cassiterite",
			Names: []string{"tin stone"},
			Rays: []Dispersion{
				fitted(1.997, 0.071, gemTable, gemTable),
				fitted(2.093, 0.071, gemTable, gemTable),
			},
			Density: 6.95, DensityRange: Span{6.85, 7.04}, DensitySource: gemTable,
			Hardness: Span{6.5, 6.5}, WearSource: gemTable,
			Cleavage:  "poor {100}",
			Toughness: "brittle", ToughnessSource: handbooks,
			Cautions:      []string{wet, metalDust},
			CautionSource: practice,
		},
		{
			Key: "rutile", Name: "Rutile",
			Names: []string{"synthetic rutile"},
			Rays: []Dispersion{
				{Kind: Pole, Coefficients: []float64{5.913, 0, 0.2441, 0.0803},
					Lo: 430, Hi: 1530, Temperature: "room", Continued: true, Source: devore1951},
				{Kind: Pole, Coefficients: []float64{7.197, 0, 0.3322, 0.0843},
					Lo: 430, Hi: 1530, Temperature: "room", Continued: true, Source: devore1951},
			},
			Density: 4.25, DensityRange: Span{4.23, 4.26}, DensitySource: gemTable,
			Hardness: Span{6, 6.5}, WearSource: gemTable,
			Cleavage:  "distinct {110}",
			Toughness: "brittle; scratches easily", ToughnessSource: handbooks,
			Cautions:      []string{wet, stress},
			CautionSource: practice,
		},
		{
			Key: "periclase", Name: "Periclase",
			Names: []string{"magnesia"},
			Rays: []Dispersion{
				{Kind: Pole, Coefficients: []float64{2.957019, -0.0101373, 0.0216485, 0.0158650},
					Lo: 404.7, Hi: 767.9, Temperature: "30 °C", Continued: true, Source: stephensMalitson1952},
			},
			Density: 3.58, DensityRange: Span{3.55, 3.6}, DensitySource: handbooks,
			Hardness: Span{5.5, 6}, WearSource: handbooks,
			Cleavage:  "perfect {100}",
			Toughness: "brittle; its polish dulls in damp air", ToughnessSource: handbooks,
			Cautions:      []string{wet, cleaves},
			CautionSource: practice,
		},
		{
			Key: "bromellite", Name: "Bromellite",
			Names: []string{"beryllia"},
			Rays: []Dispersion{
				{Kind: Sellmeier, Coefficients: []float64{1.92274, 0.07908, 1.24209, 9.7131},
					Lo: 440, Hi: 7000, Temperature: "room", Continued: true, Source: edwardsWhite1991},
				{Kind: Sellmeier, Coefficients: []float64{1.96939, 0.08590, 1.67389, 10.4797},
					Lo: 440, Hi: 7000, Temperature: "room", Continued: true, Source: edwardsWhite1991},
			},
			Density: 3.01, DensityRange: Span{3.0, 3.02}, DensitySource: handbooks,
			Hardness: Span{9, 9}, WearSource: handbooks,
			Cleavage:  "good {100}",
			Toughness: "fair", ToughnessSource: handbooks,
			Cautions:      []string{beryllia},
			CautionSource: handbooks,
			Notes:         "Listed for its light only.",
		},
		{
			Key: "zincite", Name: "Zincite",
			Names: []string{"zinc oxide"},
			Rays: []Dispersion{
				{Kind: Resonance, Coefficients: []float64{2.81418, -0.00711, 0.87968, 0.3042 * 0.3042},
					Lo: 450, Hi: 4000, Temperature: "room", Continued: true, Source: bond1965},
				{Kind: Resonance, Coefficients: []float64{2.80333, -0.00714, 0.94470, 0.3004 * 0.3004},
					Lo: 450, Hi: 4000, Temperature: "room", Continued: true, Source: bond1965},
			},
			Density: 5.66, DensityRange: Span{5.64, 5.68}, DensitySource: handbooks,
			Hardness: Span{4, 4.5}, WearSource: handbooks,
			Cleavage:  "perfect {001}, hard to start",
			Toughness: "brittle", ToughnessSource: handbooks,
			Cautions:      []string{wet, metalDust, acid},
			CautionSource: practice,
			Notes: "The formula ends at 450 nm, near the absorption edge; its dispersion " +
				"from B to G cannot be compared with the 0.127 of gem tables.",
		},
	}
}
