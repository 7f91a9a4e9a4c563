package kerr

import (
	"fmt"
	"math"
	"testing"

	"knell/internal/checktable"
	"knell/internal/random"
)

func constantLaw(rs float64) func(float64) float64 { return func(float64) float64 { return rs } }

// boltzmannLaw is the amplitude exp(-|k|/(2 factor T_H)) (arXiv:1905.00464 gives its
// square).
func boltzmannLaw(spin, factor float64) func(float64) float64 {
	rate := 1 / (2 * factor * HawkingTemperature(spin))
	return func(k float64) float64 { return math.Exp(-rate * math.Abs(k)) }
}

func maxLoop(t testing.TB, l, m int, spin float64, law func(float64) float64) (gain, omega float64) {
	t.Helper()
	gain, omega, err := MaxLoop(l, m, spin, law)
	if err != nil {
		t.Fatal(err)
	}
	return gain, omega
}

// TestPhysicsBoltzmannIsStable: at the Hawking temperature the loop gain never
// exceeds 1, and reaches it only at k = 0 (arXiv:1905.00464). A hotter surface can be
// unstable. Close to k = 0 both logarithms are straight lines: the barrier's,
// ½ |k| |dΓ/dk|, wins over the surface's, ½ |k|/(factor T_H), once
//
//	factor > 1/(T_H dΓ/dk),   Γ = 1 - |R|² at k → 0,
//
// which here comes from BarrierResponse. The barrier's line bends down from
// there, so that this is the threshold.
func TestPhysicsBoltzmannIsStable(t *testing.T) {
	table := checktable.New(t, "loop gain of a surface with Boltzmann reflectivity")
	for _, spin := range []float64{0.1, 0.5, 0.7, 0.9, 0.99, MaxSpin} {
		gain, omega := maxLoop(t, 2, 2, spin, boltzmannLaw(spin, 1))
		table.Absolute(fmt.Sprintf("largest |Rs R|, spin %g", spin), gain, 1, 0, "arXiv:1905.00464")
		table.Absolute(fmt.Sprintf("k there, spin %g", spin), omega-2*HorizonFrequency(spin), 0, 0, "arXiv:1905.00464")
	}
	for l := minMultipole; l <= maxMultipole; l++ {
		for m := 1; m <= l; m++ {
			for _, spin := range []float64{0.05, 0.3, 0.7, 0.9, 0.97, MaxSpin} {
				if gain, _ := maxLoop(t, l, m, spin, boltzmannLaw(spin, 1)); gain != 1 {
					t.Errorf("(%d,%d) spin %g: loop gain 1%+.1e, want 1", l, m, spin, gain-1)
				}
			}
		}
	}
	for _, tc := range []struct {
		l, m int
		spin float64
	}{{2, 2, 0.5}, {2, 2, 0.7}, {2, 2, 0.9}, {2, 2, 0.99}, {2, 2, MaxSpin}, {3, 3, 0.9}, {2, 1, 0.9}} {
		turn, kappa := float64(tc.m)*HorizonFrequency(tc.spin), SurfaceGravity(tc.spin)
		slope := func(h float64) float64 { // dΓ/dk at 0 by a central difference
			var g [2]float64
			for i, k := range []float64{-h, h} {
				res, err := BarrierResponse(tc.l, tc.m, tc.spin, turn+k, Odd)
				if err != nil {
					t.Fatal(err)
				}
				g[i] = res.Greybody
			}
			return (g[1] - g[0]) / (2 * h)
		}
		h := 1e-3 * kappa
		threshold := 1 / (HawkingTemperature(tc.spin) * (4*slope(h) - slope(2*h)) / 3)
		low, high := threshold/2, threshold*2
		for range 40 {
			middle := (low + high) / 2
			if gain, _ := maxLoop(t, tc.l, tc.m, tc.spin, boltzmannLaw(tc.spin, middle)); gain > 1 {
				high = middle
			} else {
				low = middle
			}
		}
		// Just above the threshold the excess is quadratically small, and lost in
		// the rounding of 1.
		table.Relative(fmt.Sprintf("unstable temperature over T_H, (%d,%d) spin %g", tc.l, tc.m, tc.spin), high, threshold, 1e-3, "1/(T_H dΓ/dk) at k = 0")
		if !(threshold > 1) {
			t.Errorf("(%d,%d) spin %g: threshold %g, want more than 1", tc.l, tc.m, tc.spin, threshold)
		}
	}
}

// TestMaxLoop compares with a dense scan of direct responses.
func TestMaxLoop(t *testing.T) {
	rng := random.New(5, "loop")
	for range 12 {
		l := 2 + rng.IntN(3)
		m := 1 + rng.IntN(l)
		spin := math.Tanh((0.1 + 0.9*rng.Float64()) * math.Atanh(MaxSpin))
		turn := float64(m) * HorizonFrequency(spin)
		width := turn * (0.1 + rng.Float64())
		for name, law := range map[string]func(float64) float64{
			"constant":  constantLaw(0.97),
			"lorentz":   func(k float64) float64 { return 1 / (1 + k*k/(width*width)) },
			"off":       func(k float64) float64 { return math.Exp(-(k + width/3) * (k + width/3) / (width * width)) },
			"boltzmann": boltzmannLaw(spin, 3),
		} {
			gain, omega := maxLoop(t, l, m, spin, law)
			top := 0.0
			for i := 0.0; i <= 400; i++ {
				w := turn * i / 400
				res, err := BarrierResponse(l, m, spin, w, Odd)
				if err != nil {
					t.Fatal(err)
				}
				top = max(top, law(w-turn)*math.Sqrt(1-res.Greybody))
			}
			res, err := BarrierResponse(l, m, spin, omega, Odd)
			if err != nil {
				t.Fatal(err)
			}
			own := law(omega-turn) * math.Sqrt(1-res.Greybody)
			// The scan may miss the top by its curvature over half a step.
			if math.Abs(gain-own) > 1e-7 || gain < top-1e-12 || gain > top+1e-4 {
				t.Errorf("%s (%d,%d) spin %.4f: %.9f at %.5f, where it is %.9f; scan %.9f", name, l, m, spin, gain, omega, own, top)
			}
			mirrored, at := maxLoop(t, l, -m, spin, func(k float64) float64 { return law(-k) })
			if mirrored != gain || at != -omega {
				t.Errorf("%s (%d,%d) spin %.4f: mirrored %g at %g", name, l, -m, spin, mirrored, at)
			}
		}
		gain, _ := maxLoop(t, l, m, spin, constantLaw(0.5))
		s, err := MaxStableReflectivity(l, m, spin)
		if err != nil {
			t.Fatal(err)
		}
		if math.Abs(gain*s-0.5) > 1e-8 {
			t.Errorf("(%d,%d) spin %.4f: constant law %.10f, want %.10f", l, m, spin, gain, 0.5/s)
		}
	}
	if gain, omega := maxLoop(t, 2, 2, 0, constantLaw(0.8)); gain != 0.8 || omega != 0 {
		t.Errorf("spin 0: %g at %g, want 0.8 at 0", gain, omega)
	}
	if gain, omega := maxLoop(t, 2, 0, 0.9, constantLaw(0.8)); gain != 0.8 || omega != 0 {
		t.Errorf("m = 0: %g at %g, want 0.8 at 0", gain, omega)
	}
	if gain, _ := maxLoop(t, 2, 2, 0.9, constantLaw(0)); gain != 0 {
		t.Errorf("no reflection: %g, want 0", gain)
	}
	law := boltzmannLaw(0.7, 1)
	if n := testing.AllocsPerRun(100, func() { maxLoop(t, 2, 2, 0.7, law) }); n != 0 {
		t.Errorf("%g allocations, want 0", n)
	}
}

func BenchmarkMaxLoop(b *testing.B) {
	law := boltzmannLaw(0.7, 1.5)
	if _, _, err := MaxLoop(2, 2, 0.7, law); err != nil {
		b.Fatal(err)
	}
	b.ReportAllocs()
	for b.Loop() {
		if _, _, err := MaxLoop(2, 2, 0.7, law); err != nil {
			b.Fatal(err)
		}
	}
}

func BenchmarkFastestGrowth(b *testing.B) {
	law := constantLaw(1)
	if _, _, err := FastestGrowth(2, 2, Odd, 0.7, -400, 0, law); err != nil {
		b.Fatal(err)
	}
	b.ReportAllocs()
	for b.Loop() {
		if _, _, err := FastestGrowth(2, 2, Odd, 0.7, -400, 0, law); err != nil {
			b.Fatal(err)
		}
	}
}
