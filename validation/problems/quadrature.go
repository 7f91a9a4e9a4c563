package problems

import (
	"math"

	"gonum.org/v1/gonum/integrate/quad"
)

// panelNodes is the number of Gauss-Legendre nodes in each panel.
const panelNodes = 8

// panels returns the nodes and weights of the Gauss-Legendre rule on n equal
// panels of [lo, hi].
func panels(n int, lo, hi float64) (nodes, weights []float64) {
	nodes = make([]float64, n*panelNodes)
	weights = make([]float64, n*panelNodes)
	for i := range n {
		a := lo + (hi-lo)*float64(i)/float64(n)
		b := lo + (hi-lo)*float64(i+1)/float64(n)
		part := i * panelNodes
		quad.Legendre{}.FixedLocations(nodes[part:part+panelNodes], weights[part:part+panelNodes], a, b)
	}
	return nodes, weights
}

// logAdd returns ln(exp(a) + exp(b)).
func logAdd(a, b float64) float64 {
	if a < b {
		a, b = b, a
	}
	if math.IsInf(a, -1) {
		return a
	}
	return a + math.Log1p(math.Exp(b-a))
}

// logBall is ln of the volume of the unit ball in dim dimensions.
func logBall(dim int) float64 {
	half := 0.5 * float64(dim)
	g, _ := math.Lgamma(half + 1)
	return half*math.Log(math.Pi) - g
}

// logNormal is ln of the normal density of width sigma at a distance x from its
// middle.
func logNormal(x, sigma float64) float64 {
	return -0.5*x*x/(sigma*sigma) - math.Log(sigma) - 0.5*math.Log(2*math.Pi)
}

// inside is the share of a normal distribution that lies between 0 and 1.
func inside(mean, sigma float64) float64 {
	scale := sigma * math.Sqrt2
	return 1 - 0.5*math.Erfc(mean/scale) - 0.5*math.Erfc((1-mean)/scale)
}
