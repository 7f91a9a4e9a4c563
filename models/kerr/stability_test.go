package kerr

import (
	"fmt"
	"math"
	"strings"
	"testing"

	"knell/internal/checktable"
	"knell/internal/random"
)

// TestPhysicsSuperradiantGain holds the largest amplification and what it allows a
// surface to reflect against values from outside this package.
func TestPhysicsSuperradiantGain(t *testing.T) {
	table := checktable.New(t, "largest superradiant amplification, and the reflectivity that is stable against it")
	const (
		recomputed = "Teukolsky equation, direct integration, printed digits"
		digits     = "Teukolsky equation at 60 digits, printed digits"
	)
	gain := func(l, m int, spin float64) (g, omega float64) {
		g, omega, err := SuperradiantGain(l, m, spin)
		if err != nil {
			t.Fatal(err)
		}
		return g, omega
	}
	// Columns of a table by spin that was recomputed for this project from the
	// published equation; each to half a unit of its last digit.
	for _, row := range []struct {
		spin, omega, gain, amplitude, absorption, absorptionUnit float64
	}{
		{0.50, 0.2359, 0.00012, 0.99994, 0.012, 0.001},
		{0.60, 0.2970, 0.00060, 0.99970, 0.060, 0.001},
		{0.67, 0.3455, 0.00174, 0.99913, 0.174, 0.001},
		{0.70, 0.3683, 0.00273, 0.99864, 0.272, 0.001},
		{0.80, 0.4569, 0.01244, 0.99384, 1.229, 0.001},
		{0.85, 0.5125, 0.02745, 0.98655, 2.671, 0.001},
		{0.90, 0.5820, 0.06420, 0.96937, 6.033, 0.001},
		{0.95, 0.6803, 0.17252, 0.92351, 14.71, 0.01},
		{0.98, 0.7786, 0.38059, 0.85108, 27.57, 0.01},
		{0.99, 0.8341, 0.55522, 0.80187, 35.70, 0.01},
	} {
		g, omega := gain(2, 2, row.spin)
		name := func(what string) string { return fmt.Sprintf("%s, spin %.2f", what, row.spin) }
		table.Absolute(name("|R|²-1"), g, row.gain, 0.51e-5, recomputed)
		// The maximum is flat: the table's search stopped within 1e-4.
		table.Absolute(name("Mω there"), omega, row.omega, 1.01e-4, recomputed)
		s, err := MaxStableReflectivity(2, 2, row.spin)
		if err != nil {
			t.Fatal(err)
		}
		table.Absolute(name("stable amplitude"), s, row.amplitude, 0.51e-5, recomputed)
		table.Absolute(name("needed absorption (%)"), 100*(1-s*s), row.absorption, 0.51*row.absorptionUnit, recomputed)
	}
	for _, row := range []struct {
		l, m             int
		spin, gain, unit float64
	}{
		{2, 2, 0.3, 2.337e-6, 1e-9}, {2, 2, 0.5, 1.1919e-4, 1e-8}, {2, 2, 0.7, 2.7321e-3, 1e-7},
		{2, 2, 0.9, 0.064201, 1e-6}, {2, 2, 0.95, 0.172516, 1e-6}, {2, 2, 0.99, 0.555223, 1e-6},
		{3, 3, 0.99, 0.0795, 1e-4},
	} {
		g, _ := gain(row.l, row.m, row.spin)
		table.Absolute(fmt.Sprintf("|R|²-1 (%d,%d), spin %g", row.l, row.m, row.spin), g, row.gain, 0.51*row.unit, digits)
	}
	// Published: 0.3 % up to spin 0.7, 6 % up to 0.9, rounded to one digit.
	for _, row := range []struct{ spin, percent float64 }{{0.7, 0.3}, {0.9, 6}} {
		g, _ := gain(2, 2, row.spin)
		unit := math.Pow(10, math.Floor(math.Log10(row.percent)))
		table.Absolute(fmt.Sprintf("needed absorption (%%), spin %g, published", row.spin), 100*g/(1+g), row.percent, unit/2, "arXiv:1807.08840")
	}
	// The limit of spin 1 by a polynomial in √(1-a), good to a few per cent: "about
	// 60 %" for any spin, and a largest gain of about 138 %.
	var x, y [5]float64
	for i, spin := range []float64{0.96, 0.98, 0.99, 0.995, MaxSpin} {
		x[i] = math.Sqrt(1 - spin)
		y[i], _ = gain(2, 2, spin)
	}
	limit := 0.0
	for i := range x {
		w := y[i]
		for j := range x {
			if j != i {
				w *= x[j] / (x[j] - x[i])
			}
		}
		limit += w
	}
	table.Absolute("|R|²-1, spin → 1", limit, 1.38, 0.05, "ApJ 193, 443 (1974)")
	table.Absolute("needed absorption (%), any spin", 100*limit/(1+limit), 60, 5, "arXiv:1807.08840")
}

// TestSuperradiantGainSlow compares with the law of slow waves, whose first
// correction is a factor 1 + 2πω (the barrier's Coulomb tail).
func TestSuperradiantGainSlow(t *testing.T) {
	for l := minMultipole; l <= maxMultipole; l++ {
		for m := 1; m <= l; m++ {
			worst := 0.0
			for _, spin := range []float64{1e-9, 1.1e-5, 1e-4, 1e-3} {
				got, omega, err := SuperradiantGain(l, m, spin)
				if err != nil {
					t.Fatal(err)
				}
				b := newBand(l, m, spin)
				want, at := b.lowestOrderPeak()
				// Next come terms of order amω and ω² ln ω.
				worst = max(worst, math.Abs(got/want-1)/(at*at))
				if off := math.Abs(got/want - 1); !(off <= 100*at*at+1e-9) {
					t.Errorf("(%d,%d) spin %g: gain %g, want %g to order ω²", l, m, spin, got, want)
				}
				if math.Abs(omega/at-1) > 2*at+2e-6 {
					t.Errorf("(%d,%d) spin %g: largest at %g, want %g", l, m, spin, omega, at)
				}
			}
			t.Logf("(%d,%d): off by at most %.2g ω²", l, m, worst)
		}
	}
}

func TestSuperradiantGainEdges(t *testing.T) {
	for _, tc := range []struct {
		l, m int
		spin float64
	}{{2, 0, 0.9}, {2, 2, 0}, {3, -2, 0}, {4, 0, MaxSpin}} {
		if gain, omega, err := SuperradiantGain(tc.l, tc.m, tc.spin); gain != 0 || omega != 0 || err != nil {
			t.Errorf("%+v: gain %g at %g, error %v, want 0", tc, gain, omega, err)
		}
	}
	// The same remnant for -m: what the barrier does at the frequency found, and
	// what MaxStableReflectivity allows.
	for _, tc := range []struct {
		l, m int
		spin float64
	}{{2, -2, 0.9}, {2, 2, 0.9}, {4, -1, MaxSpin}, {3, -3, 1e-6}} {
		gain, omega, err := SuperradiantGain(tc.l, tc.m, tc.spin)
		if err != nil || !(omega*float64(tc.m) > 0) || !(gain > 0) {
			t.Fatalf("%+v: gain %g at %g, error %v", tc, gain, omega, err)
		}
		r, err := BarrierResponse(tc.l, tc.m, tc.spin, omega, Odd)
		if err != nil || math.Abs(-r.Greybody/gain-1) > 1e-4 {
			t.Errorf("%+v: gain %g at %g, there it is %g, error %v", tc, gain, omega, -r.Greybody, err)
		}
		if s, err := MaxStableReflectivity(tc.l, tc.m, tc.spin); err != nil || math.Abs(1/(s*s)-1-gain) > 1e-6*gain+1e-15 {
			t.Errorf("%+v: gain %g, but up to %.16g is stable, error %v", tc, gain, s, err)
		}
	}
	one := func(float64) float64 { return 1 }
	for _, tc := range []struct {
		l, m int
		spin float64
		want string
	}{{1, 1, 0.5, "2 to 4"}, {5, 2, 0.5, "2 to 4"}, {2, 3, 0.5, "-2 to 2"}, {2, 2, 0.999, "0 to 0.998"}, {2, 2, -0.1, "0 to 0.998"}, {3, 1, math.NaN(), "0 to 0.998"}} {
		_, _, err1 := SuperradiantGain(tc.l, tc.m, tc.spin)
		_, err2 := MaxStableReflectivity(tc.l, tc.m, tc.spin)
		_, _, err3 := MaxLoop(tc.l, tc.m, tc.spin, one)
		_, _, err4 := FastestGrowth(tc.l, tc.m, Odd, tc.spin, -100, 0, one)
		for i, err := range []error{err1, err2, err3, err4} {
			if err == nil || !strings.Contains(err.Error(), tc.want) {
				t.Errorf("%+v: function %d: error %v, want one with %q", tc, i+1, err, tc.want)
			}
		}
	}
}

// TestMaxStableReflectivity compares the table with the direct route.
func TestMaxStableReflectivity(t *testing.T) {
	rng := random.New(3, "stable reflectivity")
	value := func(l, m int, spin float64) float64 {
		s, err := MaxStableReflectivity(l, m, spin)
		if err != nil {
			t.Fatal(err)
		}
		return s
	}
	for l := minMultipole; l <= maxMultipole; l++ {
		for m := 1; m <= l; m++ {
			var worst, worstOwn float64
			for i := range 30 {
				spin := math.Tanh(rng.Float64() * math.Atanh(MaxSpin))
				switch i {
				case 0:
					spin = MaxSpin
				case 1:
					spin = 0.997
				case 2:
					spin = 0.003
				}
				gain, _, err := SuperradiantGain(l, m, spin)
				if err != nil {
					t.Fatal(err)
				}
				got, want := value(l, m, spin), 1/math.Sqrt(1+gain)
				worst = max(worst, math.Abs(got-want))
				if off := want * math.Expm1(math.Log1p(gain)/2); off > 1e-8 {
					worstOwn = max(worstOwn, math.Abs(got-want)/off)
				}
				if got != value(l, -m, spin) {
					t.Errorf("(%d,%d) spin %g: differs from m = %d", l, m, spin, -m)
				}
			}
			if worst > 1e-8 || worstOwn > 1e-6 {
				t.Errorf("(%d,%d): off by %.1e, by %.1e of 1 - value", l, m, worst, worstOwn)
			}
			t.Logf("(%d,%d): off by at most %.1e, by %.1e of 1 - value", l, m, worst, worstOwn)
			if value(l, m, 0) != 1 || value(l, 0, 0.9) != 1 {
				t.Errorf("(%d,%d): not 1 without a superradiant band", l, m)
			}
			for spin, last := 0.0, 1.0; spin < MaxSpin; spin += 0.001 {
				s := value(l, m, spin)
				if l == m && s > last { // for m < l the gain falls again near spin 1
					t.Errorf("(%d,%d) spin %g: rises to %.12g", l, m, spin, s)
				}
				last = s
			}
		}
	}
	if n := testing.AllocsPerRun(100, func() { value(2, 2, 0.7) }); n != 0 {
		t.Errorf("%g allocations, want 0", n)
	}
}

func BenchmarkSuperradiantGain(b *testing.B) {
	for b.Loop() {
		if _, _, err := SuperradiantGain(2, 2, 0.69); err != nil {
			b.Fatal(err)
		}
	}
}

func BenchmarkMaxStableReflectivity(b *testing.B) {
	spin := 0.0
	if _, err := MaxStableReflectivity(2, 2, 0.5); err != nil {
		b.Fatal(err)
	}
	b.ReportAllocs()
	for b.Loop() {
		if spin += 0.0137; spin > MaxSpin {
			spin = 0
		}
		if _, err := MaxStableReflectivity(2, 2, spin); err != nil {
			b.Fatal(err)
		}
	}
}
