package problems

import (
	"math"

	"gonum.org/v1/gonum/mathext"
)

// hypercube has cubes for contours: ln L = -r/σ with r the largest |2u - 1| and
// σ = 0.01, so the volume above a likelihood is r^D and every shrinkage of a run
// can be tested. The paper (arXiv:1407.5459, from memory) has a power of r far
// below one; the first power gives the evidence depth as well:
//
//	Z = ∫₀¹ e^(-r/σ) D r^(D-1) dr = σ^D D! P(D, 1/σ)
//
// with P the regularised incomplete gamma function.
func hypercube(dim int) *Problem {
	const sigma = 0.01
	d := float64(dim)
	factorial, _ := math.Lgamma(d + 1)
	return &Problem{
		Truth:  d*math.Log(sigma) + factorial + math.Log(mathext.GammaIncReg(d, 1/sigma)),
		Source: "incomplete gamma function",
		logL:   func(u []float64) float64 { return -chebyshev(u) / sigma },
		volume: func(logL float64) float64 { return d * math.Log(-sigma*logL) },
	}
}
