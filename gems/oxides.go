package gems

func oxides() []*Material {
	return []*Material{
		{Key: "diamond", Name: "Diamond", Density: 3.515,
			Rays: []Dispersion{{Kind: Sellmeier, Coefficients: []float64{0.3306, 0.1750, 4.3356, 0.1060}, Lo: 226, Hi: 760}}},
		{Key: "corundum", Name: "Corundum", Density: 4.00,
			Rays: []Dispersion{
				{Kind: Sellmeier, Coefficients: []float64{1.4313493, 0.0726631, 0.65054713, 0.1193242, 5.3414021, 18.028251}, Lo: 200, Hi: 5000},
				{Kind: Sellmeier, Coefficients: []float64{1.5039759, 0.0740288, 0.55069141, 0.1216529, 6.5927379, 20.072248}, Lo: 200, Hi: 5000}}},
		{Key: "quartz", Name: "Quartz", Density: 2.65,
			Rays: []Dispersion{
				{Kind: Resonance, Coefficients: []float64{1.28604141, 0, 1.07044083, 1.00585997e-2, 1.10202242, 100}, Lo: 198, Hi: 2053.1},
				{Kind: Resonance, Coefficients: []float64{1.28851804, 0, 1.09509924, 1.02101864e-2, 1.15662475, 100}, Lo: 198, Hi: 2053.1}}},
	}
}

func liquids() []*Material {
	return []*Material{
		{Key: "air", Name: "Air", Group: Gas, Rays: []Dispersion{{Kind: Constant, Coefficients: []float64{1}, Lo: 230, Hi: 1690}}},
		{Key: "water", Name: "Water", Group: Liquid, Density: 0.9982,
			Rays: []Dispersion{{Kind: Water, Coefficients: []float64{293.15, 998.2071}, Lo: 200, Hi: 1100, Vacuum: true}}},
		{Key: "oil", Name: "Medicinal white oil", Group: Liquid, Density: 0.87,
			Rays: []Dispersion{{Kind: Constant, Coefficients: []float64{1.477}, Lo: 400, Hi: 700, Fitted: true}}},
	}
}
