package kerr

import (
	"errors"
	"math"
	"math/cmplx"
)

// The radial equation for s = -2 at real ω, with Δ = (r-r+)(r-r-),
// K = (r²+a²)ω - am and dφ/dr = K/Δ (ApJ 185, 635 (1973)). Two substitutions
// leave polynomial coefficients and take the waves' phases out:
//
//	R = e^{iφ} u:     Δu'' + [-2(r-1) + 2iK] u' - (6iωr + λ) u = 0
//	R = Δ² e^{-iφ} g:  Δg'' + [ 6(r-1) - 2iK] g' - (10iωr + λ - 4) g = 0
//
// The wave that is purely outgoing far away is one u with u → r³. It starts
// from its asymptotic series on the ray r = r_m + iy, where the other solution
// dies inwards as exp(-2ωy): an error cannot grow. From r_m the path follows the
// real axis, where under the barrier the outgoing solution is the growing one,
// again stable. Every step is a Taylor series. Close to the horizon it is
// matched to the two local series in x = (r-r+)/d,
//
//	u = Fo f(x) + Fi Δ² e^{-2iφ} g(x),   f(0) = g(0) = 1
//
// which converge for x < 1.
type background struct {
	m         int
	a, w      float64 // spin, ω > 0
	lambda    float64 // A + a²ω² - 2amω
	rp, rm, d float64 // r+, r-, r+ - r-
	kh        float64 // 2 r+ k/d, never 0
}

func newBackground(m int, spin, omega, separation float64) *background {
	am := spin * float64(m)
	b := &background{m: m, a: spin, w: omega, lambda: separation + spin*spin*omega*omega - 2*am*omega,
		rp: HorizonRadius(spin), rm: InnerHorizonRadius(spin), d: 2 * rootOfDeficit(spin)}
	b.kh = (2*b.rp*omega - am) / b.d
	if math.Abs(b.kh) < smallWave {
		b.kh = math.Copysign(smallWave, b.kh)
	}
	return b
}

// horizonPhase returns δ: φ = kr* + δ at the horizon when φ = ωr* far away.
func (b *background) horizonPhase() float64 {
	return float64(b.m) * HorizonFrequency(b.a) * (b.rp + 2*math.Log(b.d/2))
}

// matchAt is the x of the matching: far enough inside the circle of convergence
// for 40 terms, far enough outside for both waves to be seen.
const matchAt = 0.4

var errSeries = errors.New("a series did not converge")

// upgoing returns q = Cin/Cout and t = 1/Cout of the solution
//
//	R → r³ exp(iωr*) far away,   R → Cout exp(ikr*) + Cin Δ² exp(-ikr*) at the horizon.
func (b *background) upgoing() (q, t complex128, err error) {
	u, du, err := b.outgoingAt(matchAt)
	if err != nil {
		return 0, 0, err
	}
	const x = matchAt
	f, df := b.nearOut(x)
	g, dg := b.nearIn(x)
	delta := b.d * b.d * x * (1 + x)
	phi := b.phase(x)
	in := cmplx.Rect(delta*delta, -2*phi)
	// Derivatives in x. dφ/dx = K/(d x(1+x)).
	slope := complex(2*(1+2*x)/(x*(1+x)), -2*(b.kh+b.w*x*(2*b.rp+b.d*x))/(x*(1+x)))
	h, dh := in*g, in*(dg+slope*g)
	wronskian := f*dh - df*h
	out := (u*dh - du*h) / wronskian
	back := (f*du - df*u) / wronskian
	turn := cmplx.Rect(1, -b.horizonPhase())
	return back / out * turn * turn, turn / out, nil
}

// phase returns φ(x) with φ → ωr* far away: ωr* - (am/d) ln(x/(1+x)).
func (b *background) phase(x float64) float64 {
	rstar := TortoiseLog(b.a, math.Log(b.d*x))
	return b.w*rstar - float64(b.m)*b.a/b.d*math.Log(x/(1+x))
}

// nearOut returns f and df/dx of the outgoing local series,
//
//	(n+1)(n-1+2i kh) f_{n+1} = -[n(n-1) + n(-2+4iωr+) - 6iωr+ - λ] f_n - 2iωd (n-4) f_{n-1}
//
// f_2 has kh below it: for small k, f is mostly a multiple of the other
// solution, and R, which carries a factor kh, comes out whole.
func (b *background) nearOut(x float64) (f, df complex128) {
	wr, wd := b.w*b.rp, b.w*b.d
	return frobenius(x, func(n float64) (next, present, previous complex128) {
		return complex((n+1)*(n-1), (n+1)*2*b.kh), complex(n*(n-1)-2*n-b.lambda, (4*n-6)*wr), complex(0, 2*wd*(n-4))
	})
}

// nearIn returns g and dg/dx of the ingoing local series,
//
//	(n+1)(n+3-2i kh) g_{n+1} = -[n(n-1) + n(6-4iωr+) - 10iωr+ - λ + 4] g_n + 2iωd (n+4) g_{n-1}
func (b *background) nearIn(x float64) (g, dg complex128) {
	wr, wd := b.w*b.rp, b.w*b.d
	return frobenius(x, func(n float64) (next, present, previous complex128) {
		return complex((n+1)*(n+3), -(n+1)*2*b.kh), complex(n*(n-1)+6*n-b.lambda+4, -(4*n+10)*wr), complex(0, -2*wd*(n+4))
	})
}

// frobenius sums a series Σ f_n xⁿ, f_0 = 1, whose coefficients obey
// next(n) f_{n+1} + present(n) f_n + previous(n) f_{n-1} = 0, and its derivative.
func frobenius(x float64, coefficients func(n float64) (next, present, previous complex128)) (f, df complex128) {
	var before complex128
	term := complex128(1) // f_n xⁿ
	f = 1
	cx := complex(x, 0)
	for n := 0.0; n < 200; n++ {
		next, present, previous := coefficients(n)
		after := -quo(cx*(present*term+cx*previous*before), next)
		before, term = term, after
		f += term
		d := complex((n+1)/x, 0) * term
		df += d
		if size1(d)+(n+1)/x*size1(before) < 1e-17*size1(df) && size1(term)+size1(before) < 1e-17*size1(f) {
			break
		}
	}
	return f, df
}

// outgoingAt returns u and du/dx at x, for u → r³ far away.
func (b *background) outgoingAt(x float64) (u, du complex128, err error) {
	end := b.d * x // path variable: z = r - r+
	corner := max(end, 0.7)
	far := 30/b.w + 20
	z := complex(corner, far)
	r := z + complex(b.rp, 0)
	u, du, ok := b.asymptotic(r)
	if !ok {
		return 0, 0, errSeries
	}
	for imag(z) > 0 {
		h := b.stepAt(z)
		next := complex(corner, imag(z)-h)
		if imag(z)-h < 0.3*h {
			next = complex(corner, 0)
		}
		if u, du, ok = b.taylor(z, next-z, u, du); !ok {
			return 0, 0, errSeries
		}
		z = next
	}
	for real(z) > end {
		h := b.stepAt(z)
		next := real(z) - h
		if next < end+0.2*h {
			next = end
		}
		if u, du, ok = b.taylor(z, complex(next, 0)-z, u, du); !ok {
			return 0, 0, errSeries
		}
		z = complex(next, 0)
	}
	return u, du * complex(b.d, 0), nil
}

// stepAt returns how long a Taylor step from r+ + z may be: half the distance to
// the nearest singular point, and short enough for exp(-2iφ), which rounding
// mixes into u, not to grow by more than e³ within the terms of one step.
func (b *background) stepAt(z complex128) float64 {
	wave := cmplx.Abs(b.waveNumber(z)) / cmplx.Abs(z*(z+complex(b.d, 0)))
	return min(0.5*cmplx.Abs(z), 1.5/wave)
}

// waveNumber returns K at r+ + z without cancellation near the horizon.
func (b *background) waveNumber(z complex128) complex128 {
	return complex(b.d*b.kh, 0) + complex(b.w, 0)*z*(z+complex(2*b.rp, 0))
}

// asymptotic sums u = r³ Σ a_n r^{-n} and du/dr, with p = 3 - n of each term:
//
//	2iωn a_n = [p²-3p-λ]_{n-1} a_{n-1} + [2p(2-p) + 2ip a(aω-m)]_{n-2} a_{n-2} + [a²p(p-1)]_{n-3} a_{n-3}
//
// ok is false if the terms grow before they are small.
func (b *background) asymptotic(r complex128) (u, du complex128, ok bool) {
	inv := quo(1, r)
	t := [3]complex128{1, 0, 0} // the last three terms a_n r^{-n}
	u = 1
	du = 3
	side := 2 * b.a * (b.a*b.w - float64(b.m))
	for n := 1; n < 120; n++ {
		p1, p2, p3 := float64(4-n), float64(5-n), float64(6-n)
		sum := complex(p1*p1-3*p1-b.lambda, 0)*t[0]*inv +
			complex(2*p2*(2-p2), p2*side)*t[1]*inv*inv +
			complex(b.a*b.a*p3*(p3-1), 0)*t[2]*inv*inv*inv
		term := quo(sum, complex(0, 2*b.w*float64(n)))
		t[2], t[1], t[0] = t[1], t[0], term
		u += term
		du += complex(float64(3-n), 0) * term
		// Two in a row: for a = 0, l = 2 the fifth term is exactly 0.
		if size1(t[0])+size1(t[1]) < 1e-17*size1(u) {
			r3 := r * r * r
			return u * r3, du * r * r, true
		}
	}
	return 0, 0, false
}

// taylor carries u and du/dr from r+ + z over a step.
func (b *background) taylor(z, step, u, du complex128) (complex128, complex128, bool) {
	// Polynomials in y = r - r0, times powers of the step: Δ, first-derivative
	// and plain coefficients.
	r := z + complex(b.rp, 0)
	k := b.waveNumber(z)
	inv := quo(step, z*(z+complex(b.d, 0)))
	iw := complex(0, b.w)
	d1 := 2 * (r - 1) * inv
	q0 := (-2*(r-1) + 2i*k) * inv
	s2 := step * inv
	q1, w0 := -2+4*iw*r, -6*iw*r-complex(b.lambda, 0)
	q1, w0 = q1*s2, w0*s2
	s3 := s2 * step
	q2, w1 := 2*iw*s3, -6*iw*s3
	c0, c1, cm := u, du*step, complex128(0) // c_n, c_{n+1}, c_{n-1} times stepⁿ
	sum, dsum := c0+c1, c1
	for n := 0.0; n < 300; n++ {
		x := complex(n, 0)
		top := complex(n+1, 0)*(d1*x+q0)*c1 + (complex(n*(n-1), 0)*s2+q1*x+w0)*c0 + (q2*complex(n-1, 0)+w1)*cm
		c2 := top * complex(-1/((n+2)*(n+1)), 0)
		sum += c2
		d := complex(n+2, 0) * c2
		dsum += d
		cm, c0, c1 = c0, c1, c2
		if (n+2)*(size1(c0)+size1(c1)) < 1e-17*size1(dsum) && size1(c0)+size1(c1) < 1e-17*size1(sum) {
			return sum, quo(dsum, step), true
		}
	}
	return 0, 0, false
}
