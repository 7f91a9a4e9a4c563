package problems

import "math"

// chebyshev is the largest |2u - 1|: the cube r <= c has the volume c^D.
func chebyshev(u []float64) float64 {
	var r float64
	for _, x := range u {
		r = max(r, math.Abs(2*x-1))
	}
	return r
}

// halfPlateau has L = 1 on half of the cube and rises inside nested cubes on the
// other: with v = 2 r^D < 1, ln L = 6 (1 - v). So Z = ½ + ½ ∫₀¹ exp(6 (1-v)) dv =
// ½ + ½ (e⁶ - 1)/6. (Definition of our own.)
func halfPlateau(dim int) *Problem {
	const height = 6.0
	return &Problem{
		Truth:  math.Log(0.5 + 0.5*math.Expm1(height)/height),
		Source: "closed form",
		logL: func(u []float64) float64 {
			v := 2 * math.Pow(chebyshev(u), float64(dim))
			return height * max(0, 1-v)
		},
	}
}

// tiers is all plateaus (arXiv:2010.13884, from memory): the i-th is the shell of
// cubes of volume α^i to α^(i+1) and has ln L = -α^(2i/D)/(8 s²), α = ½, s = 0.1.
func tiers(dim int) *Problem { return tiersOf(dim, 0.5, 0.1) }

func tiersOf(dim int, alpha, s float64) *Problem {
	d := float64(dim)
	height := func(i float64) float64 { return -math.Pow(alpha, 2*i/d) / (8 * s * s) }
	var sum float64
	share := 1 - alpha
	for i := 0.0; share > 1e-18; i++ { // L is at most 1: the rest is below that
		sum += share * math.Exp(height(i))
		share *= alpha
	}
	return &Problem{
		Truth:  math.Log(sum),
		Source: "sum over the tiers",
		logL: func(u []float64) float64 {
			r := chebyshev(u)
			if r == 0 {
				return 0
			}
			return height(math.Floor(d * math.Log(r) / math.Log(alpha)))
		},
	}
}

// mostlyZero has a likelihood of zero but in a cube of volume 0.008 in a corner,
// where it is an uncorrelated normal density ten widths from that cube's walls:
// Z = 1. (Definition of our own.)
func mostlyZero(dim int) *Problem {
	side := math.Pow(0.008, 1/float64(dim))
	b := ball{0.5 * side, 0.05 * side}
	return &Problem{
		Truth:  0,
		Source: "normalised density",
		logL: func(u []float64) float64 {
			for _, x := range u {
				if x > side {
					return math.Inf(-1)
				}
			}
			return b.logDensity(u)
		},
	}
}
