package problems

import "math"

// logGamma is the mixture of arXiv:1304.7808 on [-30, 30]^D (from memory): an
// equal mixture of log-gamma densities at ±10 in the first coordinate, of
// normal ones at ±10 in the second, one log-gamma at 10 in each coordinate up to
// (D+2)/2, one normal at 10 in the others. All of unit scale and normalised:
// ln Z = -D ln 60, but for exp(-20) of the long tails.
func logGamma(dim int) *Problem {
	const side, place = 60.0, 10.0
	gamma := func(x, at float64) float64 { return x - at - math.Exp(x-at) }
	return &Problem{
		Truth:  -float64(dim) * math.Log(side),
		Source: "normalised density",
		logL: func(u []float64) float64 {
			x, y := side*(u[0]-0.5), side*(u[1]-0.5)
			l := -2*math.Ln2 + logAdd(gamma(x, place), gamma(x, -place)) +
				logAdd(logNormal(y-place, 1), logNormal(y+place, 1))
			for i := 2; i < len(u); i++ {
				x := side * (u[i] - 0.5)
				if 2*(i+1) <= len(u)+2 {
					l += gamma(x, place)
				} else {
					l += logNormal(x-place, 1)
				}
			}
			return l
		},
	}
}
