package models

import (
	"math"
	"math/cmplx"
	"testing"

	"gonum.org/v1/gonum/dsp/fourier"
)

// With its lead the model, cut to the band of a sampled segment, has the
// ringdown's own samples after the start; with a jump it has not.
func TestLeadGivesTheRingdownsSamples(t *testing.T) {
	const rate, n, before = 2048.0, 8192, 512
	grid := Grid{First: 1, Count: n/2 - 1, Step: rate / n}
	const mass, spin, iota, amplitude, phase = 68, 0.69, 0.7, 1.0, 0.9
	series := timeDomain(t, 2, 2, 0, mass, spin, iota, cmplx.Rect(amplitude, phase))
	largest := func(s Settings, theta []float64) float64 {
		h := fill(t, newTestModel(t, s), theta, grid.Count)
		c := make([]complex128, n/2+1)
		for j := range h.PlusRe {
			turn := cmplx.Exp(complex(0, -2*math.Pi*grid.Frequency(j)*before/rate))
			c[j+1] = complex(h.PlusRe[j], h.PlusIm[j]) * turn * complex(grid.Step, 0)
		}
		x := fourier.NewFFT(n).Sequence(nil, c)
		worst := 0.0
		for i := range 200 {
			plus, _ := series(float64(i) / rate)
			worst = max(worst, math.Abs(x[before+i]-plus))
		}
		return worst
	}
	s := Settings{Model: "ringdown", Modes: []string{"2,2,0"}, Grid: grid, Inclination: iota, Length: 3}
	theta := []float64{mass, spin, 0, amplitude, phase}
	jump := largest(s, theta)
	s.Lead = 0.25
	smooth := largest(s, theta)
	t.Logf("largest error of a sample after the start, in amplitudes: %.1e, with a jump %.1e", smooth, jump)
	// The spectrum of a function with a step in its second derivative falls with
	// the third power: what lies beyond 1024 Hz is (250/1024)^2 of the jump's.
	if smooth > 5e-3 {
		t.Errorf("a sample after the start is off by %.2g", smooth)
	}
	if jump < 0.1 {
		t.Errorf("without the lead the largest error is %.2g: this test sees nothing", jump)
	}
	// A surface that reflects nothing still is the horizon, bit for bit.
	want := fill(t, newTestModel(t, s), theta, grid.Count)
	s.Model, s.Reflectivity = "cavity", "constant"
	got := fill(t, newTestModel(t, s), append(theta, 0, 0, 0), grid.Count)
	for j := range want.PlusRe {
		if got.PlusRe[j] != want.PlusRe[j] || got.CrossIm[j] != want.CrossIm[j] {
			t.Fatalf("the cavity's lead differs at bin %d", j)
		}
	}
}
