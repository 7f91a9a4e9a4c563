package problems

import (
	"math"
)

// ridge is a thin thread along a bent curve: the first coordinate is normal of
// width 0.08 around ½, each other one normal of width 0.005 around
// 0.3 + 2.5 (x - ½)², x its predecessor. That is a normal density after a shear
// of unit Jacobian, and the curve stays between 0 and 0.93: Z = 1 but for the
// first coordinate's tails beyond 6.2 widths. (Definition of our own.)
func ridge(int) *Problem {
	const wide, narrow = 0.08, 0.005
	return &Problem{
		Truth:  math.Log(inside(0.5, wide)),
		Source: "sheared normal density, unit Jacobian",
		logL: func(u []float64) float64 {
			l := logNormal(u[0]-0.5, wide)
			for i, y := range u[1:] {
				x := u[i] - 0.5
				l += logNormal(y-0.3-2.5*x*x, narrow)
			}
			return l
		},
	}
}

// winding has a periodic first coordinate φ that enters as φ + 3a - 2b, a and b
// the next two coordinates, with the density exp(κ (cos 2π· - 1)), κ = 200; all
// coordinates but φ are normal of width 0.04 around ½. Whatever they are, the
// integral over φ is that over one period, so Z = ∫₀¹ exp(κ (cos 2πt - 1)) dt = e^-κ I₀(κ).
// The ridge crosses φ = 0 several times. (Definition of our own.)
func winding(dim int) *Problem {
	const kappa, sigma = 200.0, 0.04
	// Equal steps over a period: exact to rounding at eleven per width.
	const n = 1024
	var sum float64
	for i := range n {
		sum += math.Exp(kappa * (math.Cos(2*math.Pi*float64(i)/n) - 1))
	}
	periodic := make([]bool, dim)
	periodic[0] = true
	return &Problem{
		Truth:    math.Log(sum/n) + float64(dim-1)*math.Log(inside(0.5, sigma)),
		Source:   "trapezoid rule over one period",
		Periodic: periodic,
		logL: func(u []float64) float64 {
			l := kappa * (math.Cos(2*math.Pi*(u[0]+3*u[1]-2*u[2])) - 1)
			for _, x := range u[1:] {
				l += logNormal(x-0.5, sigma)
			}
			return l
		},
	}
}
