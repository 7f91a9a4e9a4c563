package validation

import (
	"math"
	"slices"
)

// leastUniform is the least number of values for which the approximation in
// UniformP is good.
const leastUniform = 5

// UniformP returns the p-value of a Kolmogorov-Smirnov test that u is drawn from
// the uniform distribution on [0, 1], or NaN for fewer than 5 values. u is left
// as it is. The limit law 2 Σ (-1)^(j-1) exp(-2 j² x²) is taken at x = d (√n +
// 0.12 + 0.11/√n), good to 0.002 where p is 0.05 or less (J. R. Stat. Soc. B 32, 115 (1970), from memory).
func UniformP(u []float64) float64 {
	n := len(u)
	if n < leastUniform {
		return math.NaN()
	}
	s := slices.Clone(u)
	slices.Sort(s)
	var d float64
	for i, x := range s {
		d = max(d, x-float64(i)/float64(n), float64(i+1)/float64(n)-x)
	}
	root := math.Sqrt(float64(n))
	x := (root + 0.12 + 0.11/root) * d
	if x < 0.2 { // 1 - 5e-13 there, and the series converges slowly
		return 1
	}
	var sum float64
	sign := 1.0
	for j := 1.0; j <= 100; j++ {
		sum += sign * math.Exp(-2*j*j*x*x)
		sign = -sign
	}
	return min(1, max(0, 2*sum))
}
