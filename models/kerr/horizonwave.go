package kerr

import "math"

// horizonWave returns 2r+ k = 2r+ω - am to its last digits. Near the edge of the
// superradiant band it is a small difference, and T and 1 - |R|² are proportional
// to it; so r+ and the products are carried with their rounding errors.
func horizonWave(spin, omega float64, m int) float64 {
	square := spin * spin
	rest := 1 - square
	restLow := (1 - rest) - square - math.FMA(spin, spin, -square)
	root := math.Sqrt(rest)
	rootLow := (math.FMA(-root, root, rest) + restLow) / (2 * root)

	twice := 2 * omega
	product := twice * root
	turn := spin * float64(m)
	low := math.FMA(twice, root, -product) + twice*rootLow - math.FMA(spin, float64(m), -turn)
	sum, low1 := twoSum(twice, product)
	sum, low2 := twoSum(sum, -turn)
	return sum + (low + low1 + low2)
}

// twoSum returns a+b and its rounding error.
func twoSum(a, b float64) (sum, low float64) {
	sum = a + b
	c := sum - a
	return sum, (a - (sum - c)) + (b - c)
}
