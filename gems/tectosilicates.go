package gems

// tectosilicates returns quartz, opal, the feldspars and their kin.
func tectosilicates() []*Material {
	return []*Material{
		{
			Key: "quartz", Name: "Quartz",
			Names: []string{"rock crystal", "amethyst", "citrine", "ametrine", "smoky quartz", "rose quartz", "prasiolite", "tiger's-eye"},
			Rays: []Dispersion{
				{Kind: Resonance, Coefficients: []float64{
					1.28604141, 0,
					1.07044083, 1.00585997e-2,
					1.10202242, 100,
				}, Lo: 198, Hi: 2053.1, Temperature: "room", Source: ghosh1999},
				{Kind: Resonance, Coefficients: []float64{
					1.28851804, 0,
					1.09509924, 1.02101864e-2,
					1.15662475, 100,
				}, Lo: 198, Hi: 2053.1, Temperature: "room", Source: ghosh1999},
			},
			Density: 2.65, DensityRange: Span{2.65, 2.66}, DensitySource: gemTable,
			Hardness: Span{7, 7}, WearSource: gemTable,
			Cleavage:  "none",
			Toughness: "good; heat from dopping can crack it or change its colour", ToughnessSource: handbooks,
			Cautions:      []string{silica, stress, tigersEye},
			CautionSource: silicaSource,
			Notes:         "Optically active along its axis, which is not traced.",
		},
		{
			Key: "opal", Name: "Opal",
			Names: []string{"fire opal", "hyalite", "crystal opal"},
			Rays: []Dispersion{
				fitted(1.454, 0.0115, herbertSmith, likeSilica),
			},
			Density: 2.1, DensityRange: Span{1.98, 2.25}, DensitySource: gemTable,
			Hardness: Span{5.5, 6.5}, WearSource: gemTable,
			Cleavage:  "none",
			Toughness: "brittle; cracks when it dries out or is heated", ToughnessSource: handbooks,
			Cautions:      []string{silica, dries, stress},
			CautionSource: silicaSource,
			Notes:         "Its index runs from 1.37 to 1.47 with its water; fire opal lies low.",
		},
		{
			Key: "orthoclase", Name: "Orthoclase",
			Names: []string{"moonstone", "sanidine", "yellow orthoclase"},
			Rays: []Dispersion{
				fitted(1.518, 0.012, gemTable, gemTable),
				fitted(1.524, 0.012, betaFromMemory, gemTable),
				fitted(1.526, 0.012, gemTable, gemTable),
			},
			Density: 2.56, DensityRange: Span{2.55, 2.63}, DensitySource: gemTable,
			Hardness: Span{6, 6.5}, WearSource: gemTable,
			Cleavage:  "perfect in two directions at about 90 degrees",
			Toughness: "cleaves easily", ToughnessSource: handbooks,
			Cautions:      []string{wet, cleaves},
			CautionSource: practice,
		},
		{
			Key: "oligoclase", Name: "Oligoclase",
			Names: []string{"sunstone"},
			Rays: []Dispersion{
				fitted(1.537, 0.012, gemTable, gemTable),
				fitted(1.541, 0.012, betaFromMemory, gemTable),
				fitted(1.547, 0.012, gemTable, gemTable),
			},
			Density: 2.65, DensityRange: Span{2.62, 2.67}, DensitySource: gemTable,
			Hardness: Span{6, 6.5}, WearSource: gemTable,
			Cleavage:  "perfect in two directions at about 90 degrees",
			Toughness: "cleaves easily", ToughnessSource: handbooks,
			Cautions:      []string{wet, cleaves},
			CautionSource: practice,
		},
		{
			Key: "labradorite", Name: "Labradorite",
			Names: []string{"Oregon sunstone", "transparent labradorite"},
			Rays: []Dispersion{
				fitted(1.559, 0.012, gemTable, gemTable),
				fitted(1.563, 0.012, betaFromMemory, gemTable),
				fitted(1.568, 0.012, gemTable, gemTable),
			},
			Density: 2.7, DensityRange: Span{2.69, 2.72}, DensitySource: gemTable,
			Hardness: Span{6, 6.5}, WearSource: gemTable,
			Cleavage:  "perfect in two directions at about 90 degrees",
			Toughness: "cleaves easily", ToughnessSource: handbooks,
			Cautions:      []string{wet, cleaves},
			CautionSource: practice,
		},
		{
			Key: "scapolite", Name: "Scapolite",
			Names: []string{"marialite", "meionite"},
			Rays: []Dispersion{
				fitted(1.56, 0.017, handbooks, schumann),
				fitted(1.543, 0.017, handbooks, schumann),
			},
			Density: 2.65, DensityRange: Span{2.5, 2.78}, DensitySource: gemTable,
			Hardness: Span{5.5, 6}, WearSource: gemTable,
			Cleavage:  "distinct {100} and {110}",
			Toughness: "brittle", ToughnessSource: handbooks,
			Cautions:      []string{wet, stress},
			CautionSource: practice,
			Notes: "A solid solution: its indices run from 1.536 to 1.600 and its " +
				"birefringence from 0.004 to 0.037. The row is a usual yellow stone; measure yours.",
		},
		{
			Key: "pollucite", Name: "Pollucite",
			Rays: []Dispersion{
				fitted(1.525, 0.012, handbooks, handbooks),
			},
			Density: 2.9, DensityRange: Span{2.85, 2.94}, DensitySource: handbooks,
			Hardness: Span{6.5, 6.5}, WearSource: handbooks,
			Cleavage:  "none",
			Toughness: "fair", ToughnessSource: handbooks,
			Cautions:      []string{wet},
			CautionSource: practice,
		},
	}
}
