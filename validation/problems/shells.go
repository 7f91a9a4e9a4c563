package problems

import (
	"math"

	"gonum.org/v1/gonum/floats"
)

// shells is the sum of two Gaussian shells of radius 2 and width 0.1 with centres
// at ±3.5 on the first axis of [-6, 6]^D (arXiv:0809.3437, from memory). Their
// outer edges are five widths from the wall: what is cut is below 1e-6 of Z, so
// the truth is that of whole shells, an integral over the radius.
func shells(dim int) *Problem {
	const side, centre, radius, width = 12.0, 3.5, 2.0, 0.1
	norm := logNormal(0, width)
	d := float64(dim)
	// Twice the surface of the unit sphere, D times the unit ball's volume,
	// times the integral of r^(D-1) over the shell of 15 widths either way.
	nodes, weights := panels(60, radius-15*width, radius+15*width)
	terms := make([]float64, len(nodes))
	for i, r := range nodes {
		terms[i] = math.Log(weights[i]) + (d-1)*math.Log(r) + logNormal(r-radius, width)
	}
	return &Problem{
		Truth:  math.Log(2*d) + logBall(dim) + floats.LogSumExp(terms) - d*math.Log(side),
		Source: "quadrature over the radius",
		logL: func(u []float64) float64 {
			var rest float64
			for _, v := range u[1:] {
				y := side * (v - 0.5)
				rest += y * y
			}
			x := side * (u[0] - 0.5)
			a := (math.Sqrt((x-centre)*(x-centre)+rest) - radius) / width
			b := (math.Sqrt((x+centre)*(x+centre)+rest) - radius) / width
			return logAdd(norm-0.5*a*a, norm-0.5*b*b)
		},
	}
}
