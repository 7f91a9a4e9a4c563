package problems

import "math"

const (
	gaussianBox   = 2.0 // side of the prior's cube
	gaussianSigma = 0.1 // width of each coordinate
	gaussianRho   = 0.95
)

// gaussian is a normal density in the middle of [-1, 1]^D, of width 0.1 in every
// coordinate and correlation 0.95 between all pairs. The walls are ten widths
// away, so it is normalised over the box to 1e-23 times D and Z = 1/V whatever
// the covariance: ln Z = -D ln 2. (Definition of our own.)
func gaussian(dim int) *Problem {
	d := float64(dim)
	const s2 = gaussianSigma * gaussianSigma
	// C = σ²((1-ρ) I + ρ 11ᵀ): eigenvalues σ²(1-ρ), D-1 times, and σ²(1-ρ+Dρ).
	small, large := s2*(1-gaussianRho), s2*(1-gaussianRho+d*gaussianRho)
	logDet := (d-1)*math.Log(small) + math.Log(large)
	norm := -0.5 * (d*math.Log(2*math.Pi) + logDet)
	logV := d * math.Log(gaussianBox)
	return &Problem{
		Truth:  -logV,
		Source: "normalised density",
		logL: func(u []float64) float64 {
			var sum, square float64
			for _, v := range u {
				x := gaussianBox * (v - 0.5)
				sum += x
				square += x * x
			}
			along := sum * sum / d
			return norm - 0.5*((square-along)/small+along/large)
		},
		// Contours are ellipsoids r = const, whole as long as r widths of one
		// coordinate do not reach the wall.
		volume: func(logL float64) float64 {
			r2 := 2 * (norm - logL)
			const wall = 0.5 * gaussianBox / gaussianSigma
			if r2 > wall*wall {
				return math.NaN()
			}
			return logBall(dim) + 0.5*d*math.Log(r2) + 0.5*logDet - logV
		},
	}
}
