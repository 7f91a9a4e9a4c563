package validation

import (
	"math"
	"testing"

	"knell/internal/random"
)

func TestUniformP(t *testing.T) {
	// Critical values of the statistic d, two-sided (J. Am. Stat. Assoc. 51, 111
	// (1956), from memory).
	for _, tc := range []struct {
		n    int
		d, p float64
	}{{5, 0.56328, 0.05}, {5, 0.66853, 0.01}, {10, 0.40925, 0.05}, {10, 0.48893, 0.01}, {20, 0.29408, 0.05}, {20, 0.35241, 0.01}} {
		// Values that hold d exactly: the empirical steps, all moved to the left.
		u := make([]float64, tc.n)
		for i := range u {
			u[i] = max(0, float64(i+1)/float64(tc.n)-tc.d)
		}
		// What the approximation is off by at n = 5, as measured here.
		if got := UniformP(u); math.Abs(got-tc.p) > 0.002 {
			t.Errorf("n = %d, d = %g: p = %.4f, want %.4f", tc.n, tc.d, got, tc.p)
		}
	}
	if p := UniformP([]float64{0.1, 0.2, 0.3, 0.4}); !math.IsNaN(p) {
		t.Errorf("p of four values = %g, want NaN", p)
	}
}

// The p-values of uniform draws are uniform: of 2000, a share q is below q.
func TestUniformPIsUniform(t *testing.T) {
	const trials, n = 2000, 30
	rng := random.New(1, "uniform p")
	var below [3]int
	limits := [3]float64{0.05, 0.3, 0.7}
	u := make([]float64, n)
	for range trials {
		for i := range u {
			u[i] = rng.Float64()
		}
		p := UniformP(u)
		for i, q := range limits {
			if p < q {
				below[i]++
			}
		}
	}
	for i, q := range limits {
		if sigma := math.Sqrt(trials * q * (1 - q)); math.Abs(float64(below[i])-trials*q) > 4*sigma {
			t.Errorf("%d of %d p-values below %g, want %.0f ± %.0f", below[i], trials, q, trials*q, sigma)
		}
	}
}
