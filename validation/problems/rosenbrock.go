package problems

import "math"

// rosenbrock is the curved valley ln L = -Σ 100 (x_(i+1) - x_i²)² + (1 - x_i)² on
// [-5, 5]^D. Some papers put ½ in front or take another box.
func rosenbrock(dim int) *Problem {
	const side = 10.0
	return &Problem{
		Truth:  rosenbrockTruth(dim, 400),
		Source: "quadrature along the chain",
		logL: func(u []float64) float64 {
			var sum float64
			for i := range len(u) - 1 {
				x, y := side*(u[i]-0.5), side*(u[i+1]-0.5)
				sum += 100*(y-x*x)*(y-x*x) + (1-x)*(1-x)
			}
			return -sum
		},
	}
}

// rosenbrockTruth integrates one coordinate after another from the end of the
// chain: f(x) = ∫ exp(-100 (y-x²)² - (1-x)²) f'(y) dy with f' = 1 at the end,
// each on the same panels.
func rosenbrockTruth(dim, count int) float64 {
	const half, reach = 5.0, 0.9 // exp(-100·0.9²) = 7e-36 is nothing
	nodes, weights := panels(count, -half, half)
	after := make([]float64, len(nodes))
	for i := range after {
		after[i] = 1
	}
	before := make([]float64, len(nodes))
	logScale := 0.0
	for range dim - 1 {
		top := 0.0
		for i, x := range nodes {
			var sum float64
			middle := x * x
			first := int(float64(len(nodes)) * (middle - reach + half) / (2 * half))
			for j := max(first, 0); j < len(nodes) && nodes[j] < middle+reach; j++ {
				sum += weights[j] * math.Exp(-100*(nodes[j]-middle)*(nodes[j]-middle)) * after[j]
			}
			before[i] = sum * math.Exp(-(1-x)*(1-x))
			top = max(top, before[i])
		}
		for i := range before {
			before[i] /= top
		}
		logScale += math.Log(top)
		before, after = after, before
	}
	var sum float64
	for i, f := range after {
		sum += weights[i] * f
	}
	return math.Log(sum) + logScale - float64(dim)*math.Log(2*half)
}
