package models

import "math"

// boltzmannLaw is the surface in thermal balance with the horizon: amplitude
// exp(-|k| / 2 T), T = temperature T_H. arXiv:1905.00464 states the flux
// reflectivity exp(-|k| / T_H).
var boltzmannLaw = reflectivity{
	name: "boltzmann",
	parameters: []Parameter{
		{Name: "reflectivity", Note: "factor on the Boltzmann reflectivity", Low: 0, High: 1, Default: 1, HasDefault: true},
		{Name: "temperature", Note: "surface temperature over Hawking temperature", Low: math.SmallestNonzeroFloat64, High: math.Inf(1), Default: 1, HasDefault: true},
	},
	fill: func(law []float64, temperature, k0, dk float64, rs []float64) {
		// A temperature near the least double makes the rate infinite.
		fillExponential(law[0], math.Min(1/(2*law[1]*temperature), 1e300), k0, dk, rs)
	},
}

// fillExponential writes scale * exp(-rate |k0 + j dk|), by multiplication
// between fresh exponentials as a rotor does, each side of k = 0 for itself.
func fillExponential(scale, rate, k0, dk float64, rs []float64) {
	step := math.Abs(dk)
	if rate*step > 1 {
		// The ratio over a span could overflow; few values differ from 0 anyway.
		for j := range rs {
			rs[j] = scale * math.Exp(-rate*math.Abs(k0+float64(j)*dk))
		}
		return
	}
	up, down := math.Exp(rate*step), math.Exp(-rate*step)
	for j := 0; j < len(rs); {
		k := k0 + float64(j)*dk
		end := min(j+turnSpan, len(rs))
		ratio := down
		if k*dk < 0 {
			// |k| shrinks, as far as the sign lasts.
			ratio = up
			if left := -k / dk; left < turnSpan {
				end = min(end, j+int(left)+1)
			}
		}
		value := scale * math.Exp(-rate*math.Abs(k))
		for ; j < end; j++ {
			rs[j] = value
			value *= ratio
		}
	}
}
