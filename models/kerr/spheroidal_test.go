package kerr

import (
	"math"
	"math/cmplx"
	"testing"
)

// TestSpheroidalOnTheSphere compares with the closed forms of arXiv:0709.0093.
func TestSpheroidalOnTheSphere(t *testing.T) {
	for _, theta := range []float64{0, 0.3, 1.1, math.Pi / 2, 2.6, math.Pi} {
		c, s := math.Cos(theta), math.Sin(theta)
		ch, sh := math.Cos(theta/2), math.Sin(theta/2)
		for _, tc := range []struct {
			l, m int
			want float64
		}{
			{2, 2, math.Sqrt(5/(64*math.Pi)) * (1 + c) * (1 + c)},
			{2, 1, math.Sqrt(5/(16*math.Pi)) * s * (1 + c)},
			{2, 0, math.Sqrt(15/(32*math.Pi)) * s * s},
			{2, -1, math.Sqrt(5/(16*math.Pi)) * s * (1 - c)},
			{2, -2, math.Sqrt(5/(64*math.Pi)) * (1 - c) * (1 - c)},
			{3, 3, -math.Sqrt(21/(2*math.Pi)) * math.Pow(ch, 5) * sh},
			{3, 2, math.Sqrt(7/math.Pi) * math.Pow(ch, 4) * (3*c - 2) / 2},
			{4, 4, 3 * math.Sqrt(7/math.Pi) * math.Pow(ch, 6) * sh * sh},
			{4, -4, 3 * math.Sqrt(7/math.Pi) * math.Pow(sh, 6) * ch * ch},
		} {
			got, err := Spheroidal(tc.l, tc.m, 0, theta)
			if err != nil {
				t.Fatal(err)
			}
			// The value climbs two steps in l: a few units of the last place.
			if cmplx.Abs(got-complex(tc.want, 0)) > 1e-15 {
				t.Errorf("(%d,%d) θ=%g: %.16g, want %.16g", tc.l, tc.m, theta, got, tc.want)
			}
		}
	}
}

// TestSpheroidalEquation puts the function into its differential equation, at
// mode frequencies and beyond, and checks its norm by quadrature.
func TestSpheroidalEquation(t *testing.T) {
	for _, tc := range []struct {
		l, m int
		c    complex128
	}{
		{2, 2, 0.37 - 0.06i}, {2, 2, 0.93 - 0.03i}, {2, -2, 0.2 - 1.7i}, {3, 3, 1.3 - 0.03i},
		{4, 1, 0.5 - 1.2i}, {2, 0, -1.6}, {4, 4, 2.5}, {3, -1, 3.9i},
	} {
		h, err := newHarmonic(tc.l, tc.m, tc.c)
		if err != nil {
			t.Error(err)
			continue
		}
		const s = spinWeight
		norm, overlap := 0.0, complex128(0)
		sphere, err := sphericalHarmonic(tc.l, tc.m)
		if err != nil {
			t.Fatal(err)
		}
		const n = 400
		for i := range n {
			// Midpoints of cosθ: the trapezoid rule's error in θ is spectral.
			theta := (float64(i) + 0.5) * math.Pi / n
			v := h.at(theta)
			area := 2 * math.Pi * math.Sin(theta) * math.Pi / n
			norm += real(v*cmplx.Conj(v)) * area
			overlap += v * cmplx.Conj(sphere.at(theta)) * complex(area, 0)
		}
		// The integrand is odd at the poles, so the rule is only O(n⁻²) there.
		if math.Abs(norm-1) > 1e-4 {
			t.Errorf("(%d,%d) c=%g: norm %.8f, want 1", tc.l, tc.m, tc.c, norm)
		}
		if real(overlap) < 0.3 || math.Abs(imag(overlap)) > 1e-5 {
			t.Errorf("(%d,%d) c=%g: overlap with the sphere's function %.3g, want real and positive", tc.l, tc.m, tc.c, overlap)
		}
		for _, theta := range []float64{0.4, 1.3, 2.2} {
			const d = 1e-3
			// Fourth-order differences: 1e-12 from the step, 1e-10 from rounding.
			f := func(k float64) complex128 { return h.at(theta + k*d) }
			s0 := f(0)
			s1 := (8*(f(1)-f(-1)) - f(2) + f(-2)) / (12 * d)
			s2 := (16*(f(1)+f(-1)) - f(2) - f(-2) - 30*s0) / (12 * d * d)
			cos, sin := math.Cos(theta), math.Sin(theta)
			cot := cos / sin
			m := float64(tc.m)
			v := tc.c*tc.c*complex(cos*cos, 0) - complex(m*m/(sin*sin)+2*m*s*cot/sin+s*s*cot*cot-s, 0) -
				2*s*tc.c*complex(cos, 0) + h.separation
			if res := cmplx.Abs(s2 + complex(cot, 0)*s1 + v*s0); res > 1e-8 {
				t.Errorf("(%d,%d) c=%g θ=%g: residual %.1e", tc.l, tc.m, tc.c, theta, res)
			}
		}
	}
}

// TestSeparationConstants holds the spectral separation constant against that of
// the table, which comes from the continued fraction: two methods that share no
// code.
func TestSeparationConstants(t *testing.T) {
	for l := minMultipole; l <= maxMultipole; l++ {
		for m := -l; m <= l; m++ {
			for n := 0; n <= maxOvertone; n++ {
				for _, spin := range []float64{0, 1e-8, 0.3, 0.7, 0.99, MaxSpin} {
					mode, err := TabulatedMode(l, m, n, spin)
					if err != nil {
						t.Fatal(err)
					}
					h, err := newHarmonic(l, m, complex(spin, 0)*mode.Omega)
					if err != nil {
						t.Error(err)
						continue
					}
					if d := cmplx.Abs(h.separation - mode.Separation); d > 1e-12*(1+cmplx.Abs(mode.Separation)) {
						t.Errorf("(%d,%d,%d) a=%g: spectral A = %.15g, fraction's %.15g", l, m, n, spin, h.separation, mode.Separation)
					}
				}
			}
		}
	}
}

func TestSpheroidalRange(t *testing.T) {
	for _, err := range []error{
		second(Spheroidal(1, 0, 0, 1)), second(Spheroidal(9, 0, 0, 1)), second(Spheroidal(2, -3, 0, 1)),
		second(Spheroidal(2, 2, 5, 1)), second(Spheroidal(2, 2, 0, -1)), second(Spheroidal(2, 2, 0, math.NaN())),
		second(Spheroidal(2, 2, cmplx.NaN(), 1)),
	} {
		if err == nil {
			t.Error("no error for an argument out of range")
		}
	}
}

func second(_ complex128, err error) error { return err }
