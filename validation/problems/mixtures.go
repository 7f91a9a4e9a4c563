package problems

import "math"

// ball is an isotropic normal density with its middle at the same value of every
// coordinate of the unit cube.
type ball struct{ at, sigma float64 }

func (b ball) logDensity(u []float64) float64 {
	var square float64
	for _, x := range u {
		square += (x - b.at) * (x - b.at)
	}
	return -0.5*square/(b.sigma*b.sigma) - float64(len(u))*(math.Log(b.sigma)+0.5*math.Log(2*math.Pi))
}

// logInside is ln of what the cube holds of it.
func (b ball) logInside(dim int) float64 { return float64(dim) * math.Log(inside(b.at, b.sigma)) }

// mixture is the sum of two balls of given masses.
func mixture(dim int, massA float64, a ball, massB float64, b ball) *Problem {
	logA, logB := math.Log(massA), math.Log(massB)
	return &Problem{
		Truth:  logAdd(logA+a.logInside(dim), logB+b.logInside(dim)),
		Source: "normalised densities, error function at the walls",
		logL: func(u []float64) float64 {
			return logAdd(logA+a.logDensity(u), logB+b.logDensity(u))
		},
	}
}

// spikeAndSlab is a spike of width 0.01 and mass 100 in a slab of width 0.1 and
// mass 1, both in the middle of the cube. In 20 dimensions (Bayesian Anal. 1,
// 833 (2006), from memory) likelihood against volume has a phase transition: the
// spike holds 99 % of Z = 101 and stands out of the slab in a volume of e^-50 alone,
// when the slab's own evidence has all been gathered at e^-30. Remaining is what
// the slab has left within the spike's volume.
func spikeAndSlab(dim int) *Problem {
	const mass, narrow, wide = 100.0, 0.01, 0.1
	p := mixture(dim, mass, ball{0.5, narrow}, 1, ball{0.5, wide})
	d := float64(dim)
	// The spike's density is above the slab's within r: mass N(r; narrow) = N(r; wide).
	r2 := 2 * (math.Log(mass) + d*math.Log(wide/narrow)) / (1/(narrow*narrow) - 1/(wide*wide))
	left := math.Exp(logBall(dim) + 0.5*d*math.Log(r2) + d*logNormal(0, wide))
	if left < 0.001 {
		p.Remaining = left
	}
	return p
}

// twoModes is a wide mode of mass 0.3 at 0.4 and one of mass 0.7 at 0.8 that is
// 20 times smaller in volume. (Definition of our own.)
func twoModes(dim int) *Problem {
	const wide = 0.06
	narrow := wide * math.Pow(20, -1/float64(dim))
	return mixture(dim, 0.3, ball{0.4, wide}, 0.7, ball{0.8, narrow})
}
