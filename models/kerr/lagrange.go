package kerr

// Spins are tabulated at equal steps of u = artanh(a), in which a = tanh u and
// √(1-a²) = 1/cosh u are smooth and the approach to extremality is not squeezed.

// stencil sets weights[j] of the polynomial through points 0, 1, ..., len-1 at
// t, in units of the step. Inside, its error is that of interpolation at
// len(weights) points; t may sit anywhere in the range.
func stencil(t float64, weights []float64) {
	n := len(weights)
	// weights[j] = Π_{k≠j} (t-k)/(j-k), by products from both ends.
	left := 1.0
	for j := range n {
		weights[j] = left
		left *= (t - float64(j)) / float64(j+1)
	}
	right := 1.0
	for j := n - 1; j >= 0; j-- {
		weights[j] *= right
		right *= (float64(j) - t) / float64(n-j)
	}
}

// locate splits a position x on a grid of size points into the first point of a
// centred stencil of n points and the place in it.
func locate(x float64, size, n int) (first int, t float64) {
	first = min(max(int(x)-n/2+1, 0), size-n)
	return first, x - float64(first)
}
