package kerr

import (
	"fmt"
	"math"
	"math/cmplx"
	"testing"

	"knell/internal/checktable"
)

// TestBarrierResponseTable compares with amplitudes computed at 60 digits; see
// testdata/response.csv.
func TestBarrierResponseTable(t *testing.T) {
	var worstR, worstT, worstSquare float64
	for _, row := range readTable(t, "response.csv") {
		l, m, spin, omega := int(row["l"]), int(row["m"]), row["a"], row["omega"]
		for parity, want := range map[Parity]complex128{
			Odd:  complex(row["re_R_BH_odd"], row["im_R_BH_odd"]),
			Even: complex(row["re_R_BH_even"], row["im_R_BH_even"]),
		} {
			for _, sign := range []float64{1, -1} {
				// Negative frequencies: the row with conjugate and -m.
				got, err := BarrierResponse(l, int(sign)*m, spin, sign*omega, parity)
				if err != nil {
					t.Error(err)
					continue
				}
				wantT := complex(row["re_T_BH"], row["im_T_BH"])
				r, tr := got.Reflection, got.Transmission
				if sign < 0 {
					r, tr = cmplx.Conj(r), cmplx.Conj(tr)
				}
				errR, errT := cmplx.Abs(r-want), cmplx.Abs(tr-wantT)/cmplx.Abs(wantT)
				sq := math.Abs(real(r*cmplx.Conj(r)) - real(want*cmplx.Conj(want)))
				worstR, worstT, worstSquare = max(worstR, errR), max(worstT, errT), max(worstSquare, sq)
				// Some 60 chained series, each a few ε; T also has the start's tail.
				if errR > 1e-12 || errT > 1e-11 {
					t.Errorf("(%d,%d) a=%g ω=%g %v: R = %.12g, want %.12g (off %.1e); T off %.1e of itself", l, m, spin, sign*omega, parity, r, want, errR, errT)
				}
			}
		}
	}
	t.Logf("largest difference: R %.1e, |R|² %.1e, T %.1e of itself", worstR, worstSquare, worstT)
}

// TestPhysicsFaintReflection compares with amplitudes computed at 60 digits,
// R down to 3e-17, 1 - |R|² to 2e-56, by relative difference.
func TestPhysicsFaintReflection(t *testing.T) {
	const source = "testdata/faint.csv"
	worst := struct{ r, t, grey, separation float64 }{-1, -1, -1, -1}
	table := checktable.New(t, "barrier response against an independent 60-digit calculation")
	for _, row := range readTable(t, "faint.csv") {
		l, m, spin, omega := int(row["l"]), int(row["m"]), row["a"], row["omega"]
		got, err := BarrierResponse(l, m, spin, omega, Odd)
		if err != nil {
			t.Error(err)
			continue
		}
		wantR := complex(row["re_R_odd"], row["im_R_odd"])
		errR, errT := offBy(got.Reflection, wantR), offBy(got.Transmission, complex(row["re_T"], row["im_T"]))
		grey, sep := math.Abs(got.Greybody/row["greybody"]-1), math.Abs(got.Separation/row["A"]-1)
		worst.r, worst.t = max(worst.r, errR), max(worst.t, errT)
		worst.grey, worst.separation = max(worst.grey, grey), max(worst.separation, sep)
		if errR > 1e-12 || errT > 1e-13 || grey > 1e-13 {
			t.Errorf("(%d,%d) a=%g ω=%g: off by %.1e of R = %.12g, %.1e of T, %.1e of 1-|R|²", l, m, spin, omega, errR, wantR, errT, grey)
		}
		if omega > 2 {
			table.Complex(fmt.Sprintf("R (%d,%d) spin %g Mω %g", l, m, spin, omega), got.Reflection, wantR, 1e-12, source)
		}
	}
	table.Worst("R, relative", worst.r, 1e-12, source)
	table.Worst("T, relative", worst.t, 1e-13, source)
	table.Worst("1 - |R|², relative", worst.grey, 1e-13, source)
	table.Worst("A, relative", worst.separation, 1e-14, source)
}

// offBy returns |got - want|/|want|.
func offBy(got, want complex128) float64 { return cmplx.Abs(got-want) / cmplx.Abs(want) }

// TestFluxIdentity checks |R|² + (ω/k)|T|² = 1, which ties two amplitudes
// together that come out of the integration separately, over the whole range.
func TestFluxIdentity(t *testing.T) {
	var worst float64
	for _, spin := range []float64{0, 1e-6, 0.2, 0.5, 0.8, 0.95, 0.99, MaxSpin} {
		for _, l := range []int{2, 3, 4} {
			for _, m := range []int{-l, 0, 1, l} {
				for omega := -1.8; omega < 1.8; omega += 0.0371 {
					r, err := BarrierResponse(l, m, spin, omega, Odd)
					if err != nil {
						t.Fatal(err)
					}
					d := math.Abs(real(r.Reflection*cmplx.Conj(r.Reflection)) + r.Greybody - 1)
					worst = max(worst, d)
					if d > 1e-10 {
						t.Errorf("(%d,%d) a=%g ω=%g: |R|² + (ω/k)|T|² - 1 = %.1e", l, m, spin, omega, d)
					}
				}
			}
		}
	}
	t.Logf("largest violation %.1e", worst)
}

// TestResponseIsContinuous steps over ω = 0 and k = 0, where the formulas have
// factors 0/0.
func TestResponseIsContinuous(t *testing.T) {
	for _, spin := range []float64{0, 0.3, 0.9, MaxSpin} {
		for _, at := range []float64{0, 2 * HorizonFrequency(spin)} {
			middle, err := BarrierResponse(2, 2, spin, at, Odd)
			if err != nil {
				t.Fatal(err)
			}
			if d := math.Abs(cmplx.Abs(middle.Reflection) - 1); d > 1e-12 {
				t.Errorf("a=%g ω=%g: |R| - 1 = %.1e, want 0", spin, at, d)
			}
			for _, step := range []float64{1e-13, 1e-11, 1e-9, 1e-7, 1e-5} {
				low, err := BarrierResponse(2, 2, spin, at-step, Odd)
				if err != nil {
					t.Fatal(err)
				}
				high, err := BarrierResponse(2, 2, spin, at+step, Odd)
				if err != nil {
					t.Fatal(err)
				}
				// |dR/dω| = |2r*| at the reflection point, below 100; second
				// differences are of the order of its square.
				tol := 1e-11 + 1e4*step*step + 100*smallFrequency
				if d := cmplx.Abs((low.Reflection+high.Reflection)/2 - middle.Reflection); d > tol {
					t.Errorf("a=%g ω=%g±%g: R jumps by %.1e", spin, at, step, d)
				}
				if d := cmplx.Abs(high.Reflection - low.Reflection); d > 200*step+tol {
					t.Errorf("a=%g ω=%g±%g: R changes by %.1e", spin, at, step, d)
				}
			}
		}
	}
}

// TestGreybodyTable compares with transmissivities 1 - |R|² of the Teukolsky
// equation to their printed digits, l = m = 2; recomputed for this project from
// the published equation by direct integration.
func TestGreybodyTable(t *testing.T) {
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

// TestSuperradiantGain finds the largest amplification of l = m = 2 and compares
// with the values of the Teukolsky equation at 60 digits.
func TestSuperradiantGain(t *testing.T) {
	for _, tc := range []struct{ spin, gain, tol float64 }{
		{0.5, 1.1919e-4, 1e-8}, {0.7, 2.7321e-3, 1e-7}, {0.9, 0.064201, 1e-6},
		{0.95, 0.172516, 1e-6}, {0.99, 0.555223, 1e-6},
	} {
		top := 2 * HorizonFrequency(tc.spin)
		gain := func(w float64) float64 {
			r, err := BarrierResponse(2, 2, tc.spin, w, Odd)
			if err != nil {
				t.Fatal(err)
			}
			return -r.Greybody
		}
		// Golden section: gain rises to one peak and falls to 0 at the edge.
		lo, hi := 0.5*top, top
		const g = 0.6180339887498949
		for hi-lo > 1e-6 {
			if x, y := hi-g*(hi-lo), lo+g*(hi-lo); gain(x) > gain(y) {
				hi = y
			} else {
				lo = x
			}
		}
		if got := gain((lo + hi) / 2); math.Abs(got-tc.gain) > tc.tol {
			t.Errorf("a=%g: largest gain %.7g at ω = %.5f, want %.7g", tc.spin, got, lo, tc.gain)
		}
	}
}

func TestBarrierResponseRange(t *testing.T) {
	for _, tc := range []struct {
		l, m        int
		spin, omega float64
		parity      Parity
	}{
		{1, 0, 0.5, 0.3, Odd}, {9, 0, 0.5, 0.3, Odd}, {2, 3, 0.5, 0.3, Odd}, {2, 2, 0.999, 0.3, Odd},
		{2, 2, math.NaN(), 0.3, Odd}, {2, 2, 0.5, 3.1, Odd}, {2, 2, 0.5, math.NaN(), Odd}, {2, 2, 0.5, 0.3, 7},
	} {
		if _, err := BarrierResponse(tc.l, tc.m, tc.spin, tc.omega, tc.parity); err == nil {
			t.Errorf("%+v: no error", tc)
		}
	}
}

func BenchmarkBarrierResponse(b *testing.B) {
	for _, tc := range []struct {
		name        string
		m           int
		spin, omega float64
	}{
		{"real axis", 2, 0.69, 0.4}, {"faint", 2, 0.69, 1.2}, {"edge of the domain", -2, MaxSpin, MaxFrequency}, {"slow wave", 2, 0.69, 0.001},
	} {
		b.Run(tc.name, func(b *testing.B) {
			b.ReportAllocs()
			for b.Loop() {
				if _, err := BarrierResponse(2, tc.m, tc.spin, tc.omega, Odd); err != nil {
					b.Fatal(err)
				}
			}
		})
	}
}
