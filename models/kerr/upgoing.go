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
//	u = Cout f(x) + Cin Δ² e^{-2iφ} g(x),   f(0) = g(0) = 1
//
// which converge for |x| < 1. A faint Cin takes a path of its own (deep).
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
	b.kh = horizonWave(spin, omega, m) / b.d
	if math.Abs(b.kh) < smallWave {
		b.kh = math.Copysign(smallWave, b.kh)
	}
	return b
}

// horizonPhase returns δ: φ = kr* + δ at the horizon when φ = ωr* far away.
func (b *background) horizonPhase() float64 {
	return float64(b.m) * HorizonFrequency(b.a) * (b.rp + 2*math.Log(b.d/2))
}

// matchAt is the |x| of the matching: far enough inside the circle of
// convergence for 40 terms, far enough outside for both waves to be seen.
const matchAt = 0.4

var errSeries = errors.New("a series did not converge")

// upgoing returns Cout and Cin of the solution
//
//	R → r³ exp(iφ) far away,   R → Cout exp(iφ) + Cin Δ² exp(-iφ) at the horizon
//
// by the path along the real axis. An error of ε in u anywhere on the axis is an
// error of ε |Cout| in Cin, so Cin loses its digits where the barrier reflects
// little: see deep.
func (b *background) upgoing() (out, in complex128, err error) {
	end := complex(b.d*matchAt, 0) // path variable: z = r - r+
	corner := complex(max(real(end), b.landing()), 0)
	u, du, err := b.descend(corner)
	if err != nil {
		return 0, 0, err
	}
	if u, du, err = b.walk(corner, end, u, du); err != nil {
		return 0, 0, err
	}
	out, in = b.match(matchAt, u, du)
	return out, in, nil
}

// landing returns the z at which the ray from far away meets the real axis. On
// the ray exp(-2iφ) has to fall all the way down, but the horizon adds 2r+k/z to
// -φ, which at large k makes it rise and fall again on a ray too near.
func (b *background) landing() float64 {
	return min(max(0.7, math.Sqrt(max(0, b.kh)*b.d/(8*b.w))), 3)
}

// The path of deep: deepReach bounds |exp(-2iφ)| at its end, deepHeight keeps it
// off the singular points.
const (
	deepReach  = 650.0
	deepHeight = 0.6
)

// deep returns Cin of upgoing with its relative accuracy where |Cin| is far
// below |Cout|. An error of ε in u at the place x is an error of
// ε exp(-2 Im φ(x)) |Cout| in Cin. Above the real axis Im φ grows, from far away
// and from the horizon (φ → kh ln x, kh > 0), and between the two lie the zeros of
// K on or near the line Re r = 0, where the faint reflection arises. The path goes
// over that pass, never lower: down the line, then to x = 0.4 exp(iθ), where the
// ingoing wave has grown by exp(2 kh θ), with θ = π unless that is more than
// deepReach lets it.
func (b *background) deep() (in complex128, err error) {
	x := complex(-matchAt, 0)
	if theta := deepReach / (2 * b.kh); theta < math.Pi {
		x = cmplx.Rect(matchAt, theta)
	}
	corner, end := complex(-b.rp, deepHeight), x*complex(b.d, 0)
	u, du, err := b.descend(corner)
	if err != nil {
		return 0, err
	}
	if u, du, err = b.walk(corner, end, u, du); err != nil {
		return 0, err
	}
	_, in = b.match(x, u, du)
	return in, nil
}

// needsDeep tells whether Cin has to come from deep: where |R|² is small, and
// where kh is so large that Δ² exp(-iφ) is faint beside exp(iφ) at the match (the
// amplitudes of equal fluxes differ by kh⁴ there).
func (b *background) needsDeep(out, in complex128) bool {
	const faintLevel, largeWave = 0.1, 6
	if b.kh <= 0 || b.kh > largeWave {
		return b.kh > 0
	}
	// |R|² = 16 kh² (1+kh²) (1+4kh²)² d⁸ |q|² / |C|²
	c, k2, d2 := b.teukolskyStarobinsky(), b.kh*b.kh, b.d*b.d
	q := cmplx.Abs(in) / cmplx.Abs(out) * d2 * d2
	return 16*k2*(1+k2)*(1+4*k2)*(1+4*k2)*q*q < faintLevel*(c*c+144*b.w*b.w)
}

// match splits u and du/dr at x into the two waves at the horizon,
//
//	u = out f + in Δ² e^{-2iφ} g
//
// The Wronskian of the two is known from the equation: it keeps its digits where
// kh → 0 and f becomes nearly a multiple of the other solution.
func (b *background) match(x, u, du complex128) (out, in complex128) {
	f, df := b.nearOut(x)
	g, dg := b.nearIn(x)
	gap := x * (1 + x) // Δ/d²
	delta := gap * complex(b.d*b.d, 0)
	wave := cmplx.Exp(-2i * b.phase(x))
	// Derivatives in x, from here on without Δ e^{-2iφ}. dφ/dx = K/(d x(1+x)).
	slope := complex(2, 0)*(1+2*x) - 2i*(complex(b.kh, 0)+complex(b.w, 0)*x*complex(2*b.rp, 0)+complex(b.w*b.d, 0)*x*x)
	h, dh := delta*g, delta*dg+slope*complex(b.d*b.d, 0)*g
	du *= complex(b.d, 0)
	wronskian := complex(2*b.d*b.d, -2*b.d*b.d*b.kh)
	out = quo(u*dh-du*h, wronskian)
	in = (f*du - df*u) / (wronskian * delta * wave)
	return out, in
}

// phase returns φ(x) with φ → ωr* far away, ωr* - (am/d) ln(x/(1+x)), above the
// real axis, and on its upper side where x < 0.
func (b *background) phase(x complex128) complex128 {
	ln, ln1 := cmplx.Log(x), cmplx.Log(1+x)
	lnHalf := complex(math.Log(b.d/2), 0)
	rstar := complex(b.rp, 0) + complex(b.d, 0)*x +
		(complex(2*b.rp, 0)*(ln+lnHalf)-complex(2*b.rm, 0)*(ln1+lnHalf))/complex(b.d, 0)
	return complex(b.w, 0)*rstar - complex(float64(b.m)*b.a/b.d, 0)*(ln-ln1)
}

// nearOut returns f and df/dx of the outgoing local series,
//
//	(n+1)(n-1+2i kh) f_{n+1} = -[n(n-1) + n(-2+4iωr+) - 6iωr+ - λ] f_n - 2iωd (n-4) f_{n-1}
//
// f_2 has kh below it: for small k, f is mostly a multiple of the other
// solution, and R, which carries a factor kh, comes out whole.
func (b *background) nearOut(x complex128) (f, df complex128) {
	wr, wd := b.w*b.rp, b.w*b.d
	return frobenius(x, func(n float64) (next, present, previous complex128) {
		return complex((n+1)*(n-1), (n+1)*2*b.kh), complex(n*(n-1)-2*n-b.lambda, (4*n-6)*wr), complex(0, 2*wd*(n-4))
	})
}

// nearIn returns g and dg/dx of the ingoing local series,
//
//	(n+1)(n+3-2i kh) g_{n+1} = -[n(n-1) + n(6-4iωr+) - 10iωr+ - λ + 4] g_n + 2iωd (n+4) g_{n-1}
func (b *background) nearIn(x complex128) (g, dg complex128) {
	wr, wd := b.w*b.rp, b.w*b.d
	return frobenius(x, func(n float64) (next, present, previous complex128) {
		return complex((n+1)*(n+3), -(n+1)*2*b.kh), complex(n*(n-1)+6*n-b.lambda+4, -(4*n+10)*wr), complex(0, -2*wd*(n+4))
	})
}

// frobenius sums a series Σ f_n xⁿ, f_0 = 1, whose coefficients obey
// next(n) f_{n+1} + present(n) f_n + previous(n) f_{n-1} = 0, and its derivative.
func frobenius(x complex128, coefficients func(n float64) (next, present, previous complex128)) (f, df complex128) {
	var before complex128
	term := complex128(1) // f_n xⁿ
	f = 1
	inv := quo(1, x)
	for n := 0.0; n < 200; n++ {
		next, present, previous := coefficients(n)
		after := -quo(x*(present*term+x*previous*before), next)
		before, term = term, after
		f += term
		d := complex(n+1, 0) * inv * term
		df += d
		if size1(d)+(n+1)*size1(inv)*size1(before) < 1e-17*size1(df) && size1(term)+size1(before) < 1e-17*size1(f) {
			break
		}
	}
	return f, df
}

// descend returns u and du/dr at z = r - r+, for u → r³ far away, by the path
// from straight above z.
func (b *background) descend(z complex128) (u, du complex128, err error) {
	// The asymptotic terms fall to exp(-2ω|r|) before they grow, from later the
	// larger λ is.
	start := complex(real(z), imag(z)+(22+max(0, b.lambda)/8)/b.w+4)
	u, du, ok := b.asymptotic(start + complex(b.rp, 0))
	if !ok {
		return 0, 0, errSeries
	}
	return b.walk(start, z, u, du)
}

// walk carries u and du/dr straight from one z to another.
func (b *background) walk(from, to, u, du complex128) (complex128, complex128, error) {
	length := cmplx.Abs(to - from)
	for done := 0.0; done < length; {
		z := from + (to-from)*complex(done/length, 0)
		h := b.stepAt(z)
		next := from + (to-from)*complex((done+h)/length, 0)
		if done += h; done > length-0.25*h {
			next, done = to, length
		}
		var ok bool
		if u, du, ok = b.taylor(z, next-z, u, du); !ok {
			return 0, 0, errSeries
		}
	}
	return u, du, nil
}

// stepAt returns how long a Taylor step from r+ + z may be: half the distance to
// the nearest singular point, and short enough for exp(-2iφ), which rounding
// mixes into u, not to grow by more than e³ within the terms of one step.
func (b *background) stepAt(z complex128) float64 {
	outer, inner := cmplx.Abs(z), cmplx.Abs(z+complex(b.d, 0))
	wave := cmplx.Abs(b.waveNumber(z)) / (outer * inner)
	return min(0.5*min(outer, inner), 1.5/wave)
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
