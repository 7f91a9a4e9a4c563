package kerr

import (
	"fmt"
	"math"
	"math/cmplx"
	"strings"
	"testing"

	"knell/internal/checktable"
)

// TestPhysicsResponse compares with amplitudes computed at 60 digits, both
// parities and both signs of the frequency; see testdata/response.csv.
func TestPhysicsResponse(t *testing.T) {
	const source = "testdata/response.csv"
	table := checktable.New(t, "barrier response, complex, against an independent 60-digit calculation")
	worstR, worstT, rows := -1.0, -1.0, 0
	for _, row := range readTable(t, "response.csv") {
		l, m, spin, omega := int(row["l"]), int(row["m"]), row["a"], row["omega"]
		wantT := complex(row["re_T_BH"], row["im_T_BH"])
		for parity, want := range []complex128{
			Odd:  complex(row["re_R_BH_odd"], row["im_R_BH_odd"]),
			Even: complex(row["re_R_BH_even"], row["im_R_BH_even"]),
		} {
			for _, sign := range []float64{1, -1} {
				// Negative frequencies: the row with conjugate and -m.
				got, err := BarrierResponse(l, int(sign)*m, spin, sign*omega, Parity(parity))
				if err != nil {
					t.Error(err)
					continue
				}
				r, tr := got.Reflection, got.Transmission
				if sign < 0 {
					r, tr = cmplx.Conj(r), cmplx.Conj(tr)
				}
				worstR, worstT = max(worstR, offBy(r, want)), max(worstT, offBy(tr, wantT))
				rows++
				if spin == 0.7 && l == 2 && m == 2 && sign > 0 && (omega == 0.3 || omega == 0.5) {
					table.Complex(fmt.Sprintf("R (2,2) spin 0.7 Mω %g %v", omega, Parity(parity)), r, want, 1e-12, source)
				}
				// Some 60 chained series, each a few ε.
				if offBy(r, want) > 1e-12 || offBy(tr, wantT) > 1e-12 {
					t.Errorf("(%d,%d) a=%g ω=%g %v: R = %.12g, want %.12g; T off %.1e of itself", l, m, spin, sign*omega, Parity(parity), r, want, offBy(tr, wantT))
				}
			}
		}
	}
	table.Worst(fmt.Sprintf("R, %d values, relative", rows), worstR, 1e-12, source)
	table.Worst(fmt.Sprintf("T, %d values, relative", rows), worstT, 1e-12, source)
}

// TestPhysicsFaintResponse compares with amplitudes computed at 60 digits,
// R down to 3e-17, 1 - |R|² to 2e-56, by relative difference.
func TestPhysicsFaintResponse(t *testing.T) {
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

// TestBarrierResponseRange asks outside the domain, and at its corners.
func TestBarrierResponseRange(t *testing.T) {
	for _, tc := range []struct {
		l, m        int
		spin, omega float64
		parity      Parity
		want        string
	}{
		{1, 0, 0.5, 0.3, Odd, "l = 1, want 2 to 8"},
		{9, 0, 0.5, 0.3, Odd, "l = 9, want 2 to 8"},
		{2, 3, 0.5, 0.3, Odd, "m = 3, want -2 to 2"},
		{2, 2, 0.999, 0.3, Odd, "spin = 0.999, want 0 to 0.998"},
		{2, 2, -0.1, 0.3, Odd, "spin = -0.1, want 0 to 0.998"},
		{2, 2, math.NaN(), 0.3, Odd, "spin = NaN, want 0 to 0.998"},
		{2, 2, 0.5, 3.1, Odd, "Mω = 3.1, want -3 to 3"},
		{2, 2, 0.5, math.Inf(-1), Odd, "Mω = -Inf, want -3 to 3"},
		{2, 2, 0.5, math.NaN(), Odd, "Mω = NaN, want -3 to 3"},
		{2, 2, 0.5, 0.3, 7, "parity 7, want Odd (0) or Even (1)"},
	} {
		if _, err := BarrierResponse(tc.l, tc.m, tc.spin, tc.omega, tc.parity); err == nil || !strings.Contains(err.Error(), tc.want) {
			t.Errorf("%+v: error %v", tc, err)
		}
	}
	for _, l := range []int{2, 8} {
		for _, m := range []int{-l, 0, l} {
			for _, spin := range []float64{0, math.SmallestNonzeroFloat64, 1e-9, MaxSpin} {
				for _, omega := range []float64{0, math.SmallestNonzeroFloat64, 1e-12, 1e-3, min(MaxFrequency, float64(l)*HorizonFrequency(spin)), MaxFrequency, -MaxFrequency} {
					r, err := BarrierResponse(l, m, spin, omega, Even)
					if err != nil {
						t.Error(err)
						continue
					}
					far, through := r.FromInfinity()
					for _, z := range []complex128{r.Reflection, r.Transmission, far, through, complex(r.Greybody, r.Separation)} {
						if cmplx.IsNaN(z) || cmplx.IsInf(z) {
							t.Errorf("(%d,%d) a=%g ω=%g: %+v", l, m, spin, omega, r)
						}
					}
				}
			}
		}
	}
}

// TestDeepPath holds the two paths to Cin together where both know it, |R| from
// 0.2 down to 1e-2.
func TestDeepPath(t *testing.T) {
	compared := 0
	for _, spin := range []float64{0, 0.4, 0.8, 0.95} {
		for l := 2; l <= 4; l++ {
			for _, m := range []int{-l, -1, 1, l} {
				for omega := 0.3; omega < 2; omega += 0.0517 {
					h, err := newHarmonic(l, m, complex(spin*omega, 0))
					if err != nil {
						t.Fatal(err)
					}
					b := newBackground(m, spin, omega, real(h.separation))
					res, err := respond(m, spin, omega, real(h.separation), Odd)
					if err != nil {
						t.Fatal(err)
					}
					if size := cmplx.Abs(res.Reflection); size > 0.2 || size < 0.01 {
						continue
					}
					_, axis, err := b.upgoing()
					if err != nil {
						t.Fatal(err)
					}
					deep, err := b.deep()
					if err != nil {
						t.Fatal(err)
					}
					// Of 1 the path on the axis knows R to 2e-12 at kh = 16, the
					// most here: see needsDeep.
					if off := offBy(axis, deep) * cmplx.Abs(res.Reflection); off > 2e-12 {
						t.Errorf("(%d,%d) a=%g ω=%g: the paths differ by %.1e of 1", l, m, spin, omega, off)
					}
					compared++
				}
			}
		}
	}
	if compared < 100 {
		t.Errorf("%d points compared, want 100 or more", compared)
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
