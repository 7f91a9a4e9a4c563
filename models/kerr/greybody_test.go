package kerr

import (
	"fmt"
	"math"
	"math/cmplx"
	"math/rand/v2"
	"testing"

	"knell/internal/checktable"
)

// TestPhysicsGreybody compares 1 - |R|² and the separation constants with values
// computed at 60 digits; see testdata/scatter.csv.
func TestPhysicsGreybody(t *testing.T) {
	const source = "testdata/scatter.csv"
	table := checktable.New(t, "greybody factors and separation constants against an independent 60-digit calculation")
	worstGrey, worstA, rows := -1.0, -1.0, 0
	for i, row := range readTable(t, "scatter.csv") {
		l, m, spin, omega := int(row["l"]), int(row["m"]), row["a"], row["omega"]
		got, err := BarrierResponse(l, m, spin, omega, Parity(i%2))
		if err != nil {
			t.Fatal(err)
		}
		if want := row["greybody"]; omega == 0.5 && l == 2 && absInt(m) == 2 && spin == 0.7 {
			table.Relative(fmt.Sprintf("1 - |R|², (%d,%d) spin %g Mω %g", l, m, spin, omega), got.Greybody, want, 1e-10, source)
		}
		worstGrey = max(worstGrey, math.Abs(got.Greybody/row["greybody"]-1))
		worstA = max(worstA, math.Abs(got.Separation/row["A_lm"]-1))
		rows++
	}
	table.Worst(fmt.Sprintf("1 - |R|², %d values, relative", rows), worstGrey, 1e-10, source)
	table.Worst(fmt.Sprintf("A, %d values, relative", rows), worstA, 1e-10, source)
}

// largestGain returns the largest |R|² - 1 of l = m over the superradiant band,
// beyond MaxSpin too, and where it is.
func largestGain(t *testing.T, m int, spin float64) (gain, omega float64) {
	t.Helper()
	top := float64(m) * HorizonFrequency(spin)
	gainAt := func(w float64) float64 {
		h, err := newHarmonic(m, m, complex(spin*w, 0))
		if err != nil {
			t.Fatal(err)
		}
		r, err := respond(m, spin, w, real(h.separation), Odd)
		if err != nil {
			t.Fatal(err)
		}
		return -r.Greybody
	}
	// Golden section: the gain rises to one peak and falls to 0 at the edge. At
	// the peak an error of 1e-7 of the band changes it by the square of that.
	lo, hi := 0.5*top, top
	const g = 0.6180339887498949
	for hi-lo > 1e-7*top {
		if x, y := hi-g*(hi-lo), lo+g*(hi-lo); gainAt(x) > gainAt(y) {
			hi = y
		} else {
			lo = x
		}
	}
	return gainAt((lo + hi) / 2), (lo + hi) / 2
}

// TestPhysicsSuperradiance finds the largest amplification and compares with
// values of the Teukolsky equation at 60 digits, to half a unit of their last
// digit, and its limit for spin → 1 with the published one.
func TestPhysicsSuperradiance(t *testing.T) {
	const source = "Teukolsky equation at 60 digits"
	table := checktable.New(t, "largest superradiant amplification |R|² - 1")
	for _, tc := range []struct {
		m               int
		spin, gain, tol float64
	}{
		{2, 0.3, 2.337e-6, 5e-10}, {2, 0.5, 1.1919e-4, 5e-9}, {2, 0.7, 2.7321e-3, 5e-8}, {2, 0.9, 0.064201, 5e-7},
		{2, 0.95, 0.172516, 5e-7}, {2, 0.99, 0.555223, 5e-7}, {2, 0.999, 1.022454, 5e-7}, {2, 0.9999, 1.246957, 5e-7},
		{2, 0.99999, 1.332227, 5e-7}, {3, 0.99, 0.0795, 5e-5}, {3, 0.999, 0.184, 5e-4},
	} {
		gain, _ := largestGain(t, tc.m, tc.spin)
		table.Absolute(fmt.Sprintf("l = m = %d, spin %g", tc.m, tc.spin), gain, tc.gain, tc.tol, source)
	}
	for _, tc := range []struct{ spin, omega float64 }{{0.9, 0.58195}, {0.99, 0.83411}, {0.999, 0.93978}} {
		// The gain is flat at its peak: 1e-14 of it is 1e-7 of the frequency.
		_, omega := largestGain(t, 2, tc.spin)
		table.Absolute(fmt.Sprintf("Mω of the peak, l = m = 2, spin %g", tc.spin), omega, tc.omega, 6e-6, source)
	}
	// What is missing of the limit falls as √(1-a).
	near, _ := largestGain(t, 2, 0.99999)
	nearer, _ := largestGain(t, 2, 0.999999)
	table.Absolute("limit for spin → 1, l = m = 2", nearer+(nearer-near)/(math.Sqrt(10)-1), 1.38, 0.005, "138 %, ApJ 193, 443 (1974)")
}

// slowGreybody is the greybody factor for ω → 0 (Phys. Rev. D 13, 198 (1976)),
// spin weight 2:
//
//	Γ = 4Q [(l-2)! (l+2)! / ((2l)! (2l+1)!!)]² Π_{j=1}^{l} (1 + 4Q²/j²) (ωd)^{2l+1},   Q = k/(2κ)
func slowGreybody(l, m int, spin, omega float64) float64 {
	q := (omega - float64(m)*HorizonFrequency(spin)) / (2 * SurfaceGravity(spin))
	factorial := func(n int) float64 { return math.Gamma(float64(n + 1)) }
	odd := 1.0
	for i := 3; i <= 2*l+1; i += 2 {
		odd *= float64(i)
	}
	c := factorial(l-2) * factorial(l+2) / (factorial(2*l) * odd)
	g := 4 * q * c * c * math.Pow(omega*2*rootOfDeficit(spin), float64(2*l+1))
	for j := 1; j <= l; j++ {
		g *= 1 + 4*q*q/float64(j*j)
	}
	return g
}

// TestPhysicsLowFrequency checks that the greybody factor tends to its law: what
// is missing falls in proportion to ω, with slope 2π at spin 0 (the attraction of
// the mass far away).
func TestPhysicsLowFrequency(t *testing.T) {
	table := checktable.New(t, "low-frequency law of the greybody factor")
	missing := func(l, m int, spin, omega float64) float64 {
		r, err := BarrierResponse(l, m, spin, omega, Odd)
		if err != nil {
			t.Fatal(err)
		}
		return 1 - slowGreybody(l, m, spin, omega)/r.Greybody
	}
	for l := 2; l <= 4; l++ {
		table.Relative(fmt.Sprintf("(1 - law/Γ)/ω at Mω = 1e-4, l = %d, spin 0", l), missing(l, l, 0, 1e-4)/1e-4, 2*math.Pi, 2e-3, "2π, the Coulomb-type factor of a mass 1")
	}
	for _, tc := range []struct {
		l, m int
		spin float64
	}{{2, 2, 0.7}, {2, -2, 0.7}, {2, 0, 0.9}, {2, 2, 0.99}, {3, 1, 0.5}, {4, 4, 0.9}, {4, -3, MaxSpin}} {
		// The next order is ω times some 50 at most, of the first.
		a, b := missing(tc.l, tc.m, tc.spin, 1e-4), missing(tc.l, tc.m, tc.spin, 1e-5)
		// The slope itself, 2.6 to 11.7 here, has no published value.
		table.Absolute(fmt.Sprintf("law/Γ at Mω = 1e-5, (%d,%d) spin %g", tc.l, tc.m, tc.spin), 1-b, 1, 2e-4, "Phys. Rev. D 13, 198 (1976)")
		table.Relative("    what is missing, at 1e-4 over 1e-5", a/b, 10, 5e-3, "linear in ω")
	}
}

// TestPhysicsFlux checks |R|² + (ω/k)|T|² = 1, which ties two amplitudes together
// that come out of the integration separately, on random points of the whole
// domain, half of them at low frequency and most at high spin, and that all is
// finite there.
func TestPhysicsFlux(t *testing.T) {
	rng := rand.New(rand.NewPCG(7, 11))
	worst, far, n := -1.0, -1.0, 0
	for range 4000 {
		l := minMultipole + rng.IntN(maxSpherical-minMultipole+1)
		m := rng.IntN(2*l+1) - l
		spin := min(MaxSpin, 1-math.Pow(10, -3*rng.Float64()))
		omega := MaxFrequency * (2*rng.Float64() - 1)
		if n%2 == 0 {
			omega *= math.Pow(10, -4*rng.Float64())
		}
		r, err := BarrierResponse(l, m, spin, omega, Parity(n/2%2))
		if err != nil {
			t.Fatal(err)
		}
		back, through := r.FromInfinity()
		for _, z := range []complex128{r.Reflection, r.Transmission, back, through, complex(r.Separation, r.Greybody)} {
			if cmplx.IsNaN(z) || cmplx.IsInf(z) {
				t.Fatalf("(%d,%d) a=%g ω=%g: %+v", l, m, spin, omega, r)
			}
		}
		square := func(z complex128) float64 { return real(z)*real(z) + imag(z)*imag(z) }
		k := omega - float64(m)*HorizonFrequency(spin)
		worst = max(worst, math.Abs(square(r.Reflection)+r.Greybody-1))
		far = max(far, math.Abs(square(back)+k/omega*square(through)-1))
		n++
	}
	table := checktable.New(t, "conservation of energy over the domain, l = 2 to 8, all m, spin 0 to 0.998, |Mω| up to 3")
	table.Worst(fmt.Sprintf("|R|² + (ω/k)|T|² - 1, %d random points", n), worst, 1e-11, "identity")
	table.Worst(fmt.Sprintf("|R∞|² + (k/ω)|T∞|² - 1, %d random points", n), far, 1e-11, "identity")
}

// TestGreybodyPrinted compares with transmissivities 1 - |R|² of the Teukolsky
// equation to their printed digits, l = m = 2; recomputed for this project from
// the published equation by direct integration.
func TestGreybodyPrinted(t *testing.T) {
	spins := []float64{0, 0.5, 0.7, 0.9}
	for omega, row := range map[float64][4]float64{
		0.10: {3.055e-6, -3.618e-6, -7.684e-6, -1.446e-5},
		0.20: {8.676e-4, -8.030e-5, -2.126e-4, -4.216e-4},
		0.30: {5.479e-2, 8.594e-4, -1.415e-3, -3.048e-3},
		0.40: {0.68982, 7.441e-2, -1.281e-3, -1.245e-2},
		0.45: {0.92441, 0.35127, 2.444e-2, -2.212e-2},
		0.50: {0.98452, 0.77168, 0.19490, -3.678e-2},
		0.55: {0.99685, 0.95238, 0.64064, -5.609e-2},
		0.60: {0.99934, 0.99126, 0.92339, -5.804e-2},
		0.70: {0.99997, 0.99970, 0.99793, 0.75529},
	} {
		for i, want := range row {
			got, err := BarrierResponse(2, 2, spins[i], omega, Odd)
			if err != nil {
				t.Fatal(err)
			}
			// Half a unit of the fourth digit, at worst 5e-4 of the value.
			if math.Abs(got.Greybody-want) > 5.1e-4*math.Abs(want) {
				t.Errorf("a=%g ω=%g: 1-|R|² = %.5g, want %.5g", spins[i], omega, got.Greybody, want)
			}
		}
	}
}
