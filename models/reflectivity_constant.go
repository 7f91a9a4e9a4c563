package models

// constantLaw is the surface that reflects the same share of every frequency.
var constantLaw = reflectivity{
	name: "constant",
	parameters: []Parameter{
		{Name: "reflectivity", Note: "amplitude reflectivity of the surface", Low: 0, High: 1},
	},
	fill: func(law []float64, _, _, _ float64, rs []float64) { fillConstant(law[0], rs) },
}

func fillConstant(value float64, rs []float64) {
	for j := range rs {
		rs[j] = value
	}
}
