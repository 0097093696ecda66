package gems

// liquids returns air and the liquids that stones are looked at in, air, water and oil first.
func liquids() []*Material {
	return []*Material{
		{
			Key: "air", Name: "Air",
			Group: Gas,
			Rays: []Dispersion{
				{Kind: Constant, Coefficients: []float64{1},
					Lo: 230, Hi: 1690, Temperature: "15 °C", Source: ciddor1996},
			},
			Density: 0.001225, DensitySource: handbooks,
			Notes: "All indices are relative to air, so its own is 1; against vacuum it is 1.000277 " +
				"at the D line.",
		},
		{
			Key: "water", Name: "Water",
			Names: []string{"tap water"},
			Group: Liquid,
			Rays: []Dispersion{
				{Kind: Water, Coefficients: []float64{293.15, 998.2071},
					Lo: 200, Hi: 1100, Temperature: "20 °C", Vacuum: true, Source: iapws1997},
			},
			Density: 0.9982, DensitySource: itc,
			Notes: "The formula's index against vacuum, 1.33335 at the D line, is divided by that of " +
				"air: 1.33298.",
		},
		{
			Key: "oil", Name: "Medicinal white oil",
			Names: []string{"paraffin oil", "liquid paraffin", "mineral oil", "white oil"},
			Group: Liquid,
			Rays: []Dispersion{
				fittedAbbe(1.477, 56.5, itc, likeCyclohexane),
			},
			Density: 0.87, DensityRange: Span{0.83, 0.89}, DensitySource: handbooks,
			Cautions:      []string{skinOil},
			CautionSource: practice,
			Notes: "Its index is a single published value; its dispersion is that of a " +
				"saturated hydrocarbon.",
		},
		{
			Key: "immersion-oil", Name: "Microscope immersion oil, nominal",
			Names: []string{"ISO 8036 oil"},
			Group: Liquid,
			Rays: []Dispersion{
				{Kind: Cauchy, Coefficients: []float64{1.497524, 0.00610567},
					Lo: 400, Hi: 700, Temperature: "23 °C", Fitted: true, Source: iso8036},
			},
			Density: 1.02, DensityRange: Span{0.95, 1.06}, DensitySource: handbooks,
			Cautions:      []string{skinOil, "Some old immersion oils hold PCBs: handle unlabelled bottles as poison."},
			CautionSource: handbooks,
			Notes: "Made to have the nominal n_e 1.5180 and V_e 44 of the standard, which " +
				"allows ± 0.0005 and ± 3.",
		},
		{
			Key: "glycerol", Name: "Glycerol",
			Names: []string{"glycerin", "glycerine"},
			Group: Liquid,
			Rays: []Dispersion{
				{Kind: Cauchy, Coefficients: []float64{1.46004, 3.94934611e-3, -1.77343e-5},
					Lo: 400, Hi: 710, Temperature: "room", Source: gupta2022},
			},
			Density: 1.26, DensitySource: handbooks,
			Notes: "Handbooks print 1.473 for the pure liquid, which draws water and falls in index.",
		},
		{
			Key: "kerosene", Name: "Kerosene",
			Names: []string{"paraffin", "lamp oil"},
			Group: Liquid,
			Rays: []Dispersion{
				fittedAbbe(1.448, 56.5, itc, likeCyclohexane),
			},
			Density: 0.8, DensityRange: Span{0.78, 0.82}, DensitySource: handbooks,
			Cautions:      []string{flammable},
			CautionSource: practice,
		},
		{
			Key: "cedar-oil", Name: "Cedar oil",
			Names: []string{"cedarwood oil"},
			Group: Liquid,
			Rays: []Dispersion{
				fittedAbbe(1.516, 44, rika, likeImmersion),
			},
			Density: 0.97, DensitySource: handbooks,
			Cautions:      []string{skinOil},
			CautionSource: practice,
		},
		{
			Key: "vegetable-oil", Name: "Vegetable oil",
			Names: []string{"olive oil", "finger grease", "grease"},
			Group: Liquid,
			Rays: []Dispersion{
				{Kind: Constant, Coefficients: []float64{1.468},
					Lo: 400, Hi: 700, Temperature: "20 °C", Fitted: true, Source: handbooks},
			},
			Density: 0.92, DensitySource: handbooks,
			Notes: "Stands for the grease that fingers leave, too. Newton measured 22 : 15 = 1.467 " +
				"for olive oil. No dispersion was found: the index is taken as constant.",
		},
		{
			Key: "ethanol", Name: "Ethanol",
			Names: []string{"alcohol", "spirit"},
			Group: Liquid,
			Rays: []Dispersion{
				{Kind: Cauchy, Coefficients: []float64{1.35265, 0.00306, 0.00002},
					Lo: 476.5, Hi: 830, Temperature: "20 °C", Continued: true, Source: rheims1997},
			},
			Density: 0.789, DensitySource: handbooks,
			Cautions:      []string{flammable},
			CautionSource: practice,
		},
		{
			Key: "toluene", Name: "Toluene",
			Names: []string{"methylbenzene"},
			Group: Liquid,
			Rays: []Dispersion{
				{Kind: Laurent, Coefficients: []float64{
					2.161659124, 0,
					0.000495188, 2,
					0.02138179, -2,
					0.000058838, -4,
					0.000087632, -6,
				}, Lo: 450, Hi: 1551, Temperature: "27 °C", Continued: true, Source: moutzouris2013},
			},
			Density: 0.867, DensitySource: handbooks,
			Cautions:      []string{flammable, toxicLiquid},
			CautionSource: immersionSafety,
		},
		{
			Key: "carbon-tetrachloride", Name: "Carbon tetrachloride",
			Names: []string{"tetrachloromethane"},
			Group: Liquid,
			Rays: []Dispersion{
				{Kind: Laurent, Coefficients: []float64{
					2.085608282, 0,
					0.00053373, 2,
					0.012201206, -2,
					0.000056451, -4,
					0.000048106, -6,
				}, Lo: 450, Hi: 1551, Temperature: "27 °C", Continued: true, Source: moutzouris2013},
			},
			Density: 1.594, DensitySource: handbooks,
			Cautions:      []string{toxicLiquid},
			CautionSource: immersionSafety,
			Notes:         "Handbooks print 1.4607 at 20 °C.",
		},
		{
			Key: "bromoform", Name: "Bromoform",
			Names: []string{"tribromomethane"},
			Group: Liquid,
			Rays: []Dispersion{
				fittedAbbe(1.590, 30, gemPage, abbeFromMemory),
			},
			Density: 2.89, DensitySource: gemPage,
			Cautions:      []string{toxicLiquid},
			CautionSource: immersionSafety,
		},
		{
			Key: "chloronaphthalene", Name: "α-Chloronaphthalene",
			Names: []string{"1-chloronaphthalene"},
			Group: Liquid,
			Rays: []Dispersion{
				fittedAbbe(1.626, 20.5, itc, abbeFromMemory),
			},
			Density: 1.194, DensitySource: handbooks,
			Cautions:      []string{toxicLiquid},
			CautionSource: immersionSafety,
		},
		{
			Key: "bromonaphthalene", Name: "α-Bromonaphthalene",
			Names: []string{"1-bromonaphthalene"},
			Group: Liquid,
			Rays: []Dispersion{
				fittedAbbe(1.660, 20.2, rika, abbeFromMemory),
			},
			Density: 1.483, DensitySource: handbooks,
			Cautions:      []string{toxicLiquid},
			CautionSource: immersionSafety,
		},
		{
			Key: "diiodomethane", Name: "Diiodomethane",
			Names: []string{"methylene iodide"},
			Group: Liquid,
			Rays: []Dispersion{
				fittedAbbe(1.740, 19.5, itc, abbeFromMemory),
			},
			Density: 3.32, DensitySource: gemPage,
			Cautions:      []string{diiodomethane},
			CautionSource: immersionSafety,
			Notes: "Tables print 1.737 to 1.741; its dispersion is \"rather strong\" " +
				"(International Tables).",
		},
		{
			Key: "diiodomethane-sulfur", Name: "Diiodomethane saturated with sulfur",
			Names: []string{"refractometer fluid"},
			Group: Liquid,
			Rays: []Dispersion{
				fittedAbbe(1.778, 19.5, itc, likeDiiodomethane),
			},
			Density: 3.3, DensitySource: handbooks,
			Cautions:      []string{diiodomethane},
			CautionSource: immersionSafety,
		},
	}
}

// coatings returns films and cements that lie on a stone.
func coatings() []*Material {
	return []*Material{
		{
			Key: "magnesium-fluoride", Name: "Magnesium fluoride film",
			Names: []string{"sellaite", "MgF2"},
			Group: Coating,
			Rays: []Dispersion{
				{Kind: Sellmeier, Coefficients: []float64{
					0.48755108, 0.04338408,
					0.39875031, 0.09461442,
					2.3120353, 23.793604,
				}, Lo: 200, Hi: 7000, Temperature: "19 °C", Source: dodge1984},
			},
			Density: 3.18, DensityRange: Span{3.15, 3.18}, DensitySource: handbooks,
			Cautions:      []string{filmCare},
			CautionSource: practice,
			Notes: "The ordinary index of the crystal; an evaporated film is a little less " +
				"dense and lies lower.",
		},
		{
			Key: "optical-cement", Name: "Optical cement",
			Names: []string{"UV cement", "doublet cement"},
			Group: Coating,
			Rays: []Dispersion{
				{Kind: Cauchy, Coefficients: []float64{1.5375, 0.00829045, -0.000211046},
					Lo: 450, Hi: 1550, Temperature: "room", Continued: true, Source: norland},
			},
			Density: 1.29, DensitySource: handbooks,
			Cautions:      []string{cement},
			CautionSource: practice,
			Notes:         "A light-cured cement of doublets and triplets.",
		},
	}
}
