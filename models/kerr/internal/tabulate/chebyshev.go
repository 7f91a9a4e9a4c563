package main

import "math"

// chebyshevNodes returns the zeros of T_n, growing.
func chebyshevNodes(n int) []float64 {
	x := make([]float64, n)
	for i := range x {
		x[i] = -math.Cos(math.Pi * (float64(i) + 0.5) / float64(n))
	}
	return x
}

// chebyshev returns the coefficients c_k of Σ c_k T_k that takes values v at
// chebyshevNodes(len(v)).
func chebyshev(v []complex128) []complex128 {
	n := len(v)
	c := make([]complex128, n)
	for k := range c {
		for i, z := range v {
			// T_k at the i-th node; nodes grow, so the angle runs down from π.
			f := math.Cos(math.Pi*float64(k)*(float64(n-i)-0.5)/float64(n)) * 2 / float64(n)
			c[k] += complex(f*real(z), f*imag(z))
		}
	}
	c[0] /= 2
	return c
}

func chebyshevReal(v []float64) []float64 {
	z := make([]complex128, len(v))
	for i, x := range v {
		z[i] = complex(x, 0)
	}
	c := make([]float64, len(v))
	for i, x := range chebyshev(z) {
		c[i] = real(x)
	}
	return c
}
