package kerr

import (
	"fmt"
	"math"
	"math/cmplx"
	"testing"

	"knell/internal/checktable"
)

// offAxis is the equation of upgoing.go at complex ω.
type offAxis struct {
	m             int
	w, lambda, kh complex128
	a, rp, rm, d  float64
}

// inverseTransmission returns 1/T at complex ω, up to a phase factor of ω: the
// analytic continuation of BarrierResponse. It comes in on the ray on which iωr
// falls fastest.
func inverseTransmission(t *testing.T, l, m int, spin float64, omega complex128) complex128 {
	t.Helper()
	h, err := newHarmonic(l, m, complex(spin, 0)*omega)
	if err != nil {
		t.Fatal(err)
	}
	am := complex(spin*float64(m), 0)
	c := &offAxis{m: m, w: omega, a: spin, rp: HorizonRadius(spin), rm: InnerHorizonRadius(spin), d: 2 * rootOfDeficit(spin)}
	c.lambda = h.separation + complex(spin*spin, 0)*omega*omega - 2*am*omega
	c.kh = (complex(2*c.rp, 0)*omega - am) / complex(c.d, 0)

	const x = 0.4
	corner, end := complex(max(0.7, x*c.d), 0), complex(x*c.d, 0)
	z := corner + cmplx.Rect(30/cmplx.Abs(omega)+20, math.Pi/2-cmplx.Phase(omega))
	u, du := c.far(z + complex(c.rp, 0))
	u, du = c.walk(z, corner, u, du)
	u, du = c.walk(corner, end, u, du)
	du *= complex(c.d, 0)

	// The ingoing wave Δ² e^{-2iφ} g, its slope and the Wronskian with the
	// outgoing one, all over Δ e^{-2iφ}.
	wr, wd := c.w*complex(c.rp, 0), c.w*complex(c.d, 0)
	g, dg := frobenius(x, func(n float64) (next, present, previous complex128) {
		k := complex(n, 0)
		return (k + 1) * (k + 3 - 2i*c.kh), k*(k-1) + k*(6-4i*wr) - 10i*wr - c.lambda + 4, -2i * wd * (k + 4)
	})
	d2 := complex(c.d*c.d, 0)
	gap := complex(x*(1+x), 0) * d2
	in, slope := gap*g, gap*dg+2*d2*(1+2*x-1i*(c.kh+c.w*x*complex(2*c.rp+c.d*x, 0)))*g
	out := (u*slope - du*in) / (2 * d2 * (1 - 1i*c.kh))
	return out * 2 * c.w * c.w * complex(math.Sqrt(2*c.rp), 0) / (d2 * 1i * c.kh * (1 - 2i*c.kh))
}

// far sums u = r³ (1 + ...) and its derivative.
func (c *offAxis) far(r complex128) (u, du complex128) {
	a2 := complex(c.a*c.a, 0)
	side := 2i * complex(c.a, 0) * (complex(c.a, 0)*c.w - complex(float64(c.m), 0))
	terms := [3]complex128{1, 0, 0}
	u, du = 1, 3
	for n := 1; n < 120; n++ {
		p1, p2, p3 := complex(float64(4-n), 0), complex(float64(5-n), 0), complex(float64(6-n), 0)
		sum := (p1*p1-3*p1-c.lambda)/r*terms[0] + (2*p2*(2-p2)+p2*side)/(r*r)*terms[1] + a2*p3*(p3-1)/(r*r*r)*terms[2]
		term := sum / (2i * c.w * complex(float64(n), 0))
		terms = [3]complex128{term, terms[0], terms[1]}
		u += term
		du += complex(float64(3-n), 0) * term
		if cmplx.Abs(terms[0])+cmplx.Abs(terms[1]) < 1e-17*cmplx.Abs(u) {
			break
		}
	}
	return u * r * r * r, du * r * r
}

// walk carries u and du/dr along a straight line in Taylor steps.
func (c *offAxis) walk(from, to, u, du complex128) (complex128, complex128) {
	for z := from; z != to; {
		left := to - z
		h := left * complex(min(1, 0.3*cmplx.Abs(z)/cmplx.Abs(left)), 0)
		if wave := cmplx.Abs(c.w) * cmplx.Abs(h); wave > 1 {
			h /= complex(wave, 0)
		}
		r := z + complex(c.rp, 0)
		delta, slope := z*(z+complex(c.d, 0)), 2*z+complex(c.d, 0)
		k := complex(c.d, 0)*c.kh + c.w*z*(z+complex(2*c.rp, 0))
		p0, p1, p2 := -2*(r-1)+2i*k, -2+4i*c.w*r, 2i*c.w
		q0, q1 := -(6i*c.w*r + c.lambda), -6i*c.w
		c0, c1, before := u, du, complex128(0)
		sum, dsum, power := u+du*h, du, h
		for n := range 200 {
			j := complex(float64(n), 0)
			c2 := -((j+1)*(j*slope+p0)*c1 + (j*(j-1)+p1*j+q0)*c0 + (p2*(j-1)+q1)*before) / (delta * (j + 2) * (j + 1))
			dsum += (j + 2) * c2 * power
			power *= h
			sum += c2 * power
			before, c0, c1 = c0, c1, c2
			if cmplx.Abs(c2*power) < 1e-18*cmplx.Abs(sum) && cmplx.Abs(c0*power) < 1e-18*cmplx.Abs(sum) {
				break
			}
		}
		if u, du = sum, dsum; cmplx.Abs(left-h) < 1e-3*cmplx.Abs(h) {
			z = to
		} else {
			z += h
		}
	}
	return u, du
}

// TestPhysicsPoles finds the poles of T in the complex plane and compares them
// with the quasi-normal modes, which come from the continued fractions.
func TestPhysicsPoles(t *testing.T) {
	// On the real axis the continuation is T itself, up to its phase.
	for _, tc := range []struct {
		l, m        int
		spin, omega float64
	}{{2, 2, 0.7, 0.4}, {3, -1, 0.3, 0.9}} {
		got, err := BarrierResponse(tc.l, tc.m, tc.spin, tc.omega, Odd)
		if err != nil {
			t.Fatal(err)
		}
		inverse := cmplx.Abs(inverseTransmission(t, tc.l, tc.m, tc.spin, complex(tc.omega, 0)))
		if off := math.Abs(inverse*cmplx.Abs(got.Transmission) - 1); off > 1e-12 {
			t.Errorf("%+v: |T| by continuation off by %.1e", tc, off)
		}
	}

	table := checktable.New(t, "poles of the transmission against the quasi-normal modes")
	for _, tc := range []struct {
		l, m, n int
		spin    float64
	}{
		{2, 2, 0, 0}, {2, 2, 0, 0.7}, {2, 2, 0, 0.95}, {2, 2, 1, 0.7}, {2, -2, 0, 0.6}, {2, -2, 1, 0.4}, {2, 1, 1, 0.5},
		{2, 0, 0, 0.99}, {3, 3, 0, 0.5}, {3, 2, 1, 0.8}, {4, 4, 0, 0.9}, {4, -3, 1, 0.3}, {3, -3, 0, 0.9}, {2, 2, 2, 0.5},
	} {
		mode, err := QuasiNormalMode(tc.l, tc.m, tc.n, tc.spin)
		if err != nil {
			t.Fatal(err)
		}
		// Secant method from two points beside the mode.
		at := func(w complex128) complex128 { return inverseTransmission(t, tc.l, tc.m, tc.spin, w) }
		w0, w1 := mode.Omega*(1+2e-3), mode.Omega*(1+1e-3i)
		f0, f1 := at(w0), at(w1)
		for range 12 {
			if f1 == f0 || cmplx.Abs(w1-w0) < 1e-14 {
				break
			}
			w0, w1, f0 = w1, w1-f1*(w1-w0)/(f1-f0), f1
			f1 = at(w1)
		}
		table.Complex(fmt.Sprintf("(%d,%d,%d) spin %g", tc.l, tc.m, tc.n, tc.spin), w1, mode.Omega, 1e-12, "QuasiNormalMode, continued fractions")
	}
}
