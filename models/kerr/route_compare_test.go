package kerr

import (
	"math"
	"math/cmplx"
	"testing"

	"knell/internal/checktable"
)

// secondRoute is the barrier by the second route, from amplitudes of s = +2 and
// s = -2 by the identities of Teukolsky and Starobinsky (ApJ 193, 443
// (1974)). With D = d/dr - iK/Δ, R(+2) = D⁴ R(-2) and
// |C|² R(-2) = Δ² (D*)⁴ Δ² R(+2), and on the leading terms at the horizon and far
// away
//
//	Cin(+2) = p Cin(-2),   |C|² Cout(-2) = p* Cout(+2),   |C|² Z(-2) = 16 ω⁴ Z(+2),
//	Binc(+2) = 16 ω⁴ Binc(-2),   p = d⁴ (2-2i kh)(1-2i kh)(-2i kh)(-1-2i kh).
//
// far and back are the factors of Response's T and R for s = -2; that of the
// incident wave from far away follows from the complex conjugate of the outgoing
// one under the same identities.
type secondRoute struct {
	t                 *teukolsky // s = -2
	up                *teukolsky // s = +2
	p, far, back      complex128
	constant, omega16 float64 // |C|², 16 ω⁴
}

func newSecondRoute(l, m int, spin, omega float64, parity Parity) *secondRoute {
	t := newTeukolsky(l, m, -2, spin, omega)
	s := &secondRoute{t: t, up: newTeukolsky(l, m, 2, spin, omega)}
	kh, d, w, lam := t.kh, complex(t.d, 0), t.w, t.lambda
	i := complex(0, kh)
	maw, aw2 := t.am*w, spin*spin*w*w
	s.constant = ((lam+2)*(lam+2)+4*maw-4*aw2)*(lam*lam+36*maw-36*aw2) + (2*lam+3)*(96*aw2-48*maw) + 144*w*w*(1-spin*spin)
	s.omega16 = 16 * w * w * w * w
	k := complex(math.Sqrt(s.constant-144*w*w), -12*w)
	if parity == Even {
		k = cmplx.Conj(k)
	}
	s.p = d * d * d * d * (2 - 2*i) * (1 - 2*i) * (-2 * i) * (-1 - 2*i)
	s.far = d * d * i * (1 - 2*i) / complex(2*w*w*math.Sqrt(2*t.rp), 0)
	s.back = d * d * d * d * (-4 * i) * (1 - i) * (1 - 2*i) * (1 - 2*i) / k
	return s
}

// horizonSide starts far away with s = +2, in which errors fall inwards beside the
// outgoing wave, and changes the spin weight on the way: Cin is read from s = +2
// and Cout from s = -2, in which they are not the faint one of two.
func (s *secondRoute) horizonSide() (reflection, transmission complex128) {
	gap := s.up.farGap()
	value, slope := s.up.far(1, s.up.rp+gap)
	y := s.up.carry(s.up.asWave(gap, value, slope), middleGap)
	_, in := s.up.atHorizon(y)
	out, _ := s.t.atHorizon(s.up.flip(y, s.t))
	// flip leaves |C|² R(-2), with 16 ω⁴ r³ far away.
	return s.back * in / s.p * complex(s.constant, 0) / out, s.far * complex(s.omega16, 0) / out
}

// farSide starts at the horizon with s = -2 and reads Bref from it, Binc from
// s = +2, Binc(+2) = 16 ω⁴ Binc(-2).
func (s *secondRoute) farSide() (reflection, transmission complex128) {
	gap := s.t.nearGap()
	value, slope := s.t.near(false, gap)
	y := s.t.carry(s.t.asWave(gap, value, slope), middleGap)
	_, reflected := s.t.farAway(y)
	incident, _ := s.up.farAway(s.t.flip(y, s.up))
	incident /= complex(s.omega16, 0)
	scale := s.p / (complex(s.omega16, 0) * cmplx.Conj(s.far))
	return s.far / s.back * scale * reflected / incident, scale / incident
}

// TestPhysicsSecondRoute compares the two routes over the domain. They agree to
// 3e-11 from the horizon side and 2e-12 from far away, of T and of 1 for R; the
// limit is the second one's 2e-15 a step, which the growth of one wave beside the
// other multiplies. It knows a faint R to that part of 1e-5 only.
func TestPhysicsSecondRoute(t *testing.T) {
	const source = "integration with s = +2 and -2"
	worst := struct{ r, rel, t, far, through, separation float64 }{-1, -1, -1, -1, -1, -1}
	spins := []float64{0, 0.3, 0.7, 0.9, 0.99, MaxSpin}
	omegas := []float64{0.001, 0.03, 0.2, 0.45, 0.8, 1.3, 2}
	for l := 2; l <= 4; l++ {
		for m := -l; m <= l; m++ {
			for i, spin := range spins {
				for j, omega := range omegas {
					if testing.Short() && (i+j+l+m)%3 != 0 {
						continue
					}
					parity := Parity((i + j) % 2)
					got, err := BarrierResponse(l, m, spin, omega, parity)
					if err != nil {
						t.Fatal(err)
					}
					second := newSecondRoute(l, m, spin, omega, parity)
					wantR, wantT := second.horizonSide()
					wantFar, wantThrough := second.farSide()
					far, through := got.FromInfinity()
					offR := cmplx.Abs(got.Reflection - wantR)
					if cmplx.Abs(wantR) > 1e-5 {
						worst.rel = max(worst.rel, offR/cmplx.Abs(wantR))
					}
					worst.r, worst.t = max(worst.r, offR), max(worst.t, offBy(got.Transmission, wantT))
					worst.far, worst.through = max(worst.far, cmplx.Abs(far-wantFar)), max(worst.through, offBy(through, wantThrough))
					worst.separation = max(worst.separation, math.Abs(got.Separation-jacobiSeparation(l, m, -2, spin*omega)))
				}
			}
		}
	}
	table := checktable.New(t, "barrier response by two routes, l = 2 to 4, all m, spin 0 to 0.998, Mω 0.001 to 2")
	table.Worst("R, absolute", worst.r, 1e-10, source)
	table.Worst("R where |R| > 1e-5, relative", worst.rel, 1e-10, source)
	table.Worst("T, relative", worst.t, 1e-10, source)
	table.Worst("R∞, absolute", worst.far, 1e-10, source)
	table.Worst("T∞, relative", worst.through, 1e-10, source)
	table.Worst("A, absolute", worst.separation, 1e-12, "eigenvalue in Jacobi polynomials")
}
