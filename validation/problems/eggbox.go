package problems

import (
	"math"

	"gonum.org/v1/gonum/floats"
)

// eggbox has 18 peaks: ln L = (2 + cos(x/2) cos(y/2))^5 on [0, 10π]²
// (arXiv:0809.3437, from memory; 235.88 is in print there, from a coarser grid).
func eggbox(int) *Problem {
	// Over the box x/2 runs through five half-turns, so cos(x/2) is distributed
	// as over one. The integrand is even about both ends of that: the midpoint
	// rule converges faster than any power of its number of points.
	const n = 400
	terms := make([]float64, 0, n*n)
	for i := range n {
		for j := range n {
			c := math.Cos(math.Pi*(float64(i)+0.5)/n) * math.Cos(math.Pi*(float64(j)+0.5)/n)
			terms = append(terms, math.Pow(2+c, 5))
		}
	}
	return &Problem{
		Truth:  floats.LogSumExp(terms) - 2*math.Log(n),
		Source: "midpoint quadrature",
		logL: func(u []float64) float64 {
			return math.Pow(2+math.Cos(5*math.Pi*u[0])*math.Cos(5*math.Pi*u[1]), 5)
		},
	}
}
