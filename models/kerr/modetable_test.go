package kerr

import (
	"math"
	"math/cmplx"
	"sync"
	"testing"

	"knell/internal/random"
)

// TestTabulatedMode holds every mode of the table against the direct calculation
// at spins between the table's nodes and at the ends. internal/tabulatemodes
// -measure does the same at many more.
func TestTabulatedMode(t *testing.T) {
	rng := random.New(1, "mode table")
	most := math.Atanh(MaxSpin)
	var worst float64
	for l := minMultipole; l <= maxMultipole; l++ {
		for m := -l; m <= l; m++ {
			for n := 0; n <= maxOvertone; n++ {
				for _, spin := range []float64{0, math.Tanh(most * rng.Float64()), MaxSpin} {
					got, err := TabulatedMode(l, m, n, spin)
					if err != nil {
						t.Fatal(err)
					}
					want, err := QuasiNormalMode(l, m, n, spin)
					if err != nil {
						t.Fatal(err)
					}
					off := max(cmplx.Abs(got.Omega/want.Omega-1), cmplx.Abs(got.Separation-want.Separation)/(1+cmplx.Abs(want.Separation)))
					worst = max(worst, off)
					if off > 2e-12 {
						t.Errorf("(%d,%d,%d) a=%.6f: off by %.1e", l, m, n, spin, off)
					}
					if got.L != l || got.M != m || got.N != n || got.Spin != spin {
						t.Errorf("(%d,%d,%d) a=%g comes back as (%d,%d,%d) a=%g", l, m, n, spin, got.L, got.M, got.N, got.Spin)
					}
				}
			}
		}
	}
	t.Logf("largest relative difference: %.1e", worst)
}

// TestTabulatedModeIsSmooth: neighbouring panels meet, for every mode.
func TestTabulatedModeIsSmooth(t *testing.T) {
	for l := minMultipole; l <= maxMultipole; l++ {
		for m := -l; m <= l; m++ {
			for n := 0; n <= maxOvertone; n++ {
				c, err := tabulatedCurve(l, m, n)
				if err != nil {
					t.Fatal(err)
				}
				for _, u := range c.index.start[1:] {
					belowW, belowA := c.at(math.Nextafter(u, 0))
					aboveW, aboveA := c.at(u)
					if off := max(cmplx.Abs(belowW-aboveW), cmplx.Abs(belowA-aboveA)/(1+cmplx.Abs(aboveA))); off > 4e-12 {
						t.Errorf("(%d,%d,%d): jump of %.1e at spin %.6f", l, m, n, off, math.Tanh(u))
					}
				}
			}
		}
	}
}

// TestTabulatedModeAnywhere: at any spin a mode decays, has Re ω > 0 and no NaN;
// outside the range there is an error.
func TestTabulatedModeAnywhere(t *testing.T) {
	rng := random.New(1, "any mode")
	for range 100000 {
		l := 2 + rng.IntN(3)
		m, n, spin := rng.IntN(2*l+1)-l, rng.IntN(8), MaxSpin*rng.Float64()
		mode, err := TabulatedMode(l, m, n, spin)
		if err != nil {
			t.Fatal(err)
		}
		// The largest decay rate is l = 2, n = 7, m = -2's, below 2; A moves by
		// less than |aω|² + 4|aω| from the sphere's.
		if w, a := mode.Omega, mode.Separation; !(imag(w) < 0 && imag(w) > -2 && real(w) > 0 && real(w) < 2.5) ||
			!(cmplx.Abs(a-complex(float64(l*(l+1)-2), 0)) < 12) {
			t.Fatalf("(%d,%d,%d) a=%g: ω = %g, A = %g", l, m, n, spin, w, a)
		}
	}
	for _, q := range []struct {
		l, m, n int
		spin    float64
	}{{1, 0, 0, 0}, {5, 0, 0, 0}, {2, 3, 0, 0}, {2, -3, 0, 0}, {2, 0, -1, 0}, {2, 0, 8, 0},
		{2, 2, 0, -1e-9}, {2, 2, 0, 0.99801}, {2, 2, 0, math.NaN()}, {2, 2, 0, math.Inf(1)}} {
		if _, err := TabulatedMode(q.l, q.m, q.n, q.spin); err == nil {
			t.Errorf("%+v: no error", q)
		}
	}
	if n := testing.AllocsPerRun(100, func() { TabulatedMode(3, 1, 2, 0.7) }); n != 0 {
		t.Errorf("TabulatedMode allocates %g times, want 0", n)
	}
}

// TestTabulatedModeConcurrently asks many goroutines for modes at once; run with
// -race it checks the lazy decoding.
func TestTabulatedModeConcurrently(t *testing.T) {
	var all sync.WaitGroup
	for i := range 8 {
		all.Go(func() {
			for n := range 8 {
				if _, err := TabulatedMode(4, i-4, n, 0.5); err != nil {
					t.Error(err)
				}
			}
		})
	}
	all.Wait()
}

func BenchmarkTabulatedMode(b *testing.B) {
	b.ReportAllocs()
	spin := 0.0
	for b.Loop() {
		if spin += 0.001; spin > MaxSpin {
			spin = 0
		}
		if _, err := TabulatedMode(2, 2, 1, spin); err != nil {
			b.Fatal(err)
		}
	}
}
