package models

// lorentzianLaw reflects reflectivity / (1 + (k/kc)^2), kc = corner T_H: flat below
// the corner, half of it there.
var lorentzianLaw = reflectivity{
	name: "lorentzian",
	parameters: []Parameter{
		{Name: "reflectivity", Note: "amplitude reflectivity of the surface at k = 0", Low: 0, High: 1},
		cornerParameter(),
	},
	fill: func(law []float64, temperature, k0, dk float64, rs []float64) {
		inverse := 1 / (law[1] * temperature)
		for j := range rs {
			x := (k0 + float64(j)*dk) * inverse
			rs[j] = law[0] / (1 + x*x)
		}
	},
}
