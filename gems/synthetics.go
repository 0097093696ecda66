package gems

// synthetics returns the crystals that are gem material only when made.
func synthetics() []*Material {
	return []*Material{
		{
			Key: "zirconia", Name: "Cubic zirconia",
			Names: []string{"cubic-zirconia", "cz", "cubic zirconium oxide"},
			Group: Synthetic,
			Rays: []Dispersion{
				{Kind: Sellmeier, Coefficients: []float64{
					1.347091, 0.062543,
					2.117788, 0.166739,
					9.452943, 24.320570,
				}, Lo: 361, Hi: 5135, Temperature: "25 °C", Source: woodNassau1982},
			},
			Density: 5.8, DensityRange: Span{5.65, 5.95}, DensitySource: gemTable,
			Hardness: Span{8, 8.5}, WearSource: gemTable,
			Cleavage:  "none",
			Toughness: "good; brittle at thin edges", ToughnessSource: handbooks,
			Cautions:      []string{wet, metalDust},
			CautionSource: practice,
			Notes:         "For 12.0 mol % of yttria; other stabilisers and contents give 2.15 to 2.18.",
		},
		{
			Key: "moissanite", Name: "Moissanite (6H silicon carbide)",
			Names: []string{"silicon carbide", "synthetic moissanite"},
			Group: Synthetic,
			Rays: []Dispersion{
				{Kind: Pole, Coefficients: []float64{6.57232, -0.02153, 0.1401, 0.03178},
					Lo: 435.8, Hi: 2325, Temperature: "room", Continued: true, Source: wang2013},
				{Kind: Pole, Coefficients: []float64{6.7452, -0.02249, 0.15352, 0.03597},
					Lo: 435.8, Hi: 2325, Temperature: "room", Continued: true, Source: wang2013},
			},
			Density: 3.22, DensityRange: Span{3.21, 3.22}, DensitySource: gemTable,
			Hardness: Span{9.25, 9.5}, WearSource: gemTable,
			Cleavage:  "indistinct",
			Toughness: "excellent", ToughnessSource: handbooks,
			Cautions:      []string{wet},
			CautionSource: practice,
		},
		{
			Key: "synthetic-spinel", Name: "Spinel, flame fusion",
			Names: []string{"verneuil spinel"},
			Group: Synthetic,
			Rays: []Dispersion{
				fitted(1.727, 0.02, gemTable, gemTable),
			},
			Density: 3.64, DensityRange: Span{3.62, 3.65}, DensitySource: gemTable,
			Hardness: Span{8, 8}, WearSource: gemTable,
			Cleavage:  "none",
			Toughness: "good; strained boules can split", ToughnessSource: handbooks,
			Cautions:      []string{wet, stress},
			CautionSource: practice,
			Notes:         "Richer in alumina than natural spinel.",
		},
		{
			Key: "yag", Name: "Yttrium aluminium garnet",
			Names: []string{"YAG"},
			Group: Synthetic,
			Rays: []Dispersion{
				{Kind: Resonance, Coefficients: []float64{1, 0, 2.28200, 0.01185, 3.27644, 282.734},
					Lo: 400, Hi: 5000, Temperature: "room", Source: zelmon1998yag},
			},
			Density: 4.55, DensityRange: Span{4.55, 4.57}, DensitySource: gemTable,
			Hardness: Span{8, 8.5}, WearSource: gemTable,
			Cleavage:  "none",
			Toughness: "good", ToughnessSource: handbooks,
			Cautions:      []string{wet},
			CautionSource: practice,
		},
		{
			Key: "luag", Name: "Lutetium aluminium garnet",
			Names: []string{"LuAG"},
			Group: Synthetic,
			Rays: []Dispersion{
				{Kind: Resonance, Coefficients: []float64{2.077, -0.0104, 1.237, 0.1376 * 0.1376},
					Lo: 193, Hi: 1690, Temperature: "room", Source: hrabovsky2021},
			},
			Density: 6.73, DensityRange: Span{6.7, 6.75}, DensitySource: gemTable,
			Hardness: Span{8.5, 8.5}, WearSource: gemTable,
			Cleavage:  "none",
			Toughness: "good", ToughnessSource: handbooks,
			Cautions:      []string{wet},
			CautionSource: practice,
			Notes: "Gem tables print the dispersion of yttrium aluminium garnet, 0.028; the " +
				"formula gives 0.025.",
		},
		{
			Key: "ggg", Name: "Gadolinium gallium garnet",
			Names: []string{"GGG"},
			Group: Synthetic,
			Rays: []Dispersion{
				{Kind: Sellmeier, Coefficients: []float64{
					1.7727, 0.1567,
					0.9767, 0.01375,
					4.9668, 22.715,
				}, Lo: 360, Hi: 6000, Temperature: "room", Source: woodNassau1990},
			},
			Density: 7.05, DensityRange: Span{7.02, 7.09}, DensitySource: gemTable,
			Hardness: Span{6.5, 6.5}, WearSource: gemTable,
			Cleavage:  "none",
			Toughness: "fair; may brown in sunlight", ToughnessSource: handbooks,
			Cautions:      []string{wet, metalDust},
			CautionSource: practice,
			Notes: "Measured as 1.970; gem tables that print 2.02 to 2.03 and a dispersion " +
				"of 0.038 disagree with the measurement, which is taken.",
		},
		{
			Key: "strontium-titanate", Name: "Strontium titanate",
			Names: []string{"tausonite", "fabulite"},
			Group: Synthetic,
			Rays: []Dispersion{
				{Kind: Sellmeier, Coefficients: []float64{
					3.042143, 0.1475902,
					1.170065, 0.2953086,
					30.83326, 33.18606,
				}, Lo: 430, Hi: 3800, Temperature: "room", Continued: true, Source: bondDodge},
			},
			Density: 5.13, DensityRange: Span{5.11, 5.14}, DensitySource: gemTable,
			Hardness: Span{5.5, 5.5}, WearSource: gemTable,
			Cleavage:  "none",
			Toughness: "brittle; scratches easily", ToughnessSource: handbooks,
			Cautions:      []string{wet, stress},
			CautionSource: practice,
			Notes: "Gem tables print a dispersion of 0.190; the formula gives 0.210 from B " +
				"to G and agrees with them from C to F.",
		},
		{
			Key: "lithium-niobate", Name: "Lithium niobate",
			Names: []string{"linobate"},
			Group: Synthetic,
			Rays: []Dispersion{
				{Kind: Resonance, Coefficients: []float64{
					1, 0,
					2.6734, 0.01764,
					1.2290, 0.05914,
					12.614, 474.60,
				}, Lo: 400, Hi: 5000, Temperature: "21 °C", Source: zelmon1997},
				{Kind: Resonance, Coefficients: []float64{
					1, 0,
					2.9804, 0.02047,
					0.5981, 0.0666,
					8.9543, 416.08,
				}, Lo: 400, Hi: 5000, Temperature: "21 °C", Source: zelmon1997},
			},
			Density: 4.64, DensityRange: Span{4.63, 4.65}, DensitySource: handbooks,
			Hardness: Span{5, 5.5}, WearSource: handbooks,
			Cleavage:  "none",
			Toughness: "brittle", ToughnessSource: handbooks,
			Cautions:      []string{wet, stress},
			CautionSource: practice,
		},
	}
}
