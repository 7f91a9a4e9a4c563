package kerr

import (
	"math"
	"math/cmplx"

	"gonum.org/v1/gonum/mat"
)

// jacobiSeparation returns A of spin weight s at real c = aω. With
// S = (1-x)^(α/2) (1+x)^(β/2) U, x = cosθ, α = |m+s|, β = |m-s|, h = (α+β)/2, the
// operator on U is diagonal in Jacobi polynomials but for powers of x, which is
// tridiagonal in them:
//
//	n(n+2h+1) - c²x² + 2csx,   A + s(s+1) - h(h+1) its eigenvalue.
func jacobiSeparation(l, m, s int, c float64) float64 {
	const size = 40
	alpha, beta := math.Abs(float64(m+s)), math.Abs(float64(m-s))
	sum := alpha + beta
	x := mat.NewDense(size+1, size+1, nil)
	for n := range size + 1 {
		k := float64(n)
		x.Set(n, n, (beta*beta-alpha*alpha)/((2*k+sum)*(2*k+sum+2)))
		if n > 0 {
			off := 2 / (2*k + sum) * math.Sqrt(k*(k+alpha)*(k+beta)*(k+sum)/((2*k+sum-1)*(2*k+sum+1)))
			x.Set(n, n-1, off)
			x.Set(n-1, n, off)
		}
	}
	var square mat.Dense
	square.Mul(x, x)
	operator := mat.NewSymDense(size, nil)
	for i := range size {
		for j := i; j < size; j++ {
			v := -c*c*square.At(i, j) + 2*c*float64(s)*x.At(i, j)
			if i == j {
				v += float64(i) * (float64(i) + sum + 1)
			}
			operator.SetSym(i, j, v)
		}
	}
	var eigen mat.EigenSym
	if !eigen.Factorize(operator, false) {
		return math.NaN()
	}
	// Real eigenvalues of one m never cross: they stay in the order of l.
	h := sum / 2
	return eigen.Values(nil)[l-max(absInt(m), absInt(s))] + h*(h+1) - float64(s*(s+1))
}

// teukolsky is the radial equation of one spin weight,
//
//	Δ² d²R/dr² + 2(s+1)(r-1) Δ dR/dr + [K² - 2is(r-1)K + (4isωr - λ)Δ] R = 0.
type teukolsky struct {
	s, m              int
	a, w, lambda      float64
	rp, rm, d, kh, am float64
}

func newTeukolsky(l, m, s int, spin, omega float64) *teukolsky {
	am := spin * float64(m)
	t := &teukolsky{s: s, m: m, a: spin, w: omega, am: am, rp: HorizonRadius(spin), rm: InnerHorizonRadius(spin)}
	t.d = t.rp - t.rm
	t.kh = (2*t.rp*omega - am) / t.d
	t.lambda = jacobiSeparation(l, m, s, spin*omega) + spin*spin*omega*omega - 2*am*omega
	return t
}

// potential is V of d²X/dr*² = -V X, X = √(r²+a²) Δ^(s/2) R (ApJ 185, 635 (1973)).
func (t *teukolsky) potential(r float64) complex128 {
	s := float64(t.s)
	q := r*r + t.a*t.a
	delta := (r - t.rp) * (r - t.rm)
	k := q*t.w - t.am
	g := s*(r-1)/q + r*delta/(q*q)
	dg := s/q - 2*s*r*(r-1)/(q*q) + (delta+2*r*(r-1))/(q*q) - 4*r*r*delta/(q*q*q)
	v := complex((k*k-t.lambda*delta)/(q*q)-g*g-delta/q*dg, 0)
	return v + complex(0, (-2*s*(r-1)*k+4*s*t.w*r*delta)/(q*q))
}

// asWave turns R and dR/dr at a gap z into X and dX/dr*.
func (t *teukolsky) asWave(z float64, value, slope complex128) wave {
	s := float64(t.s)
	r := t.rp + z
	q, delta := r*r+t.a*t.a, z*(r-t.rm)
	front := complex(math.Sqrt(q)*math.Pow(delta, s/2), 0)
	g := complex(s*(r-1)/q+r*delta/(q*q), 0)
	return wave{front * value, front * (g*value + complex(delta/q, 0)*slope), complex(math.Log(z), 0)}
}

// asRadial is the inverse of asWave.
func (t *teukolsky) asRadial(y wave) (value, slope complex128) {
	z := math.Exp(real(y.lnGap))
	one := t.asWave(z, 1, 0)
	two := t.asWave(z, 0, 1)
	value = y.x / one.x
	return value, (y.slope - value*one.slope) / two.slope
}

// powers returns the coefficients of Δ², 2(s+1)(r-1)Δ and the rest of the
// equation in powers of r - r0.
func (t *teukolsky) powers(r0 float64) (second, first, plain []complex128) {
	s := complex(float64(t.s), 0)
	delta := []complex128{complex((r0-t.rp)*(r0-t.rm), 0), complex(2*r0-2, 0), 1}
	if r0 == t.rp {
		delta[1] = complex(t.d, 0)
	}
	k := []complex128{complex((r0*r0+t.a*t.a)*t.w-t.am, 0), complex(2*r0*t.w, 0), complex(t.w, 0)}
	half := []complex128{delta[1] / 2, 1}
	second = product(delta, delta)
	first = product(half, delta)
	for i := range first {
		first[i] *= 2 * (s + 1)
	}
	plain = product(k, k)
	for i, v := range product(half, k) {
		plain[i] -= 2i * s * v
	}
	iws := complex(0, 4*t.w) * s
	for i, v := range product(delta, []complex128{iws*complex(r0, 0) - complex(t.lambda, 0), iws}) {
		plain[i] += v
	}
	return second, first, plain
}

func product(p, q []complex128) []complex128 {
	out := make([]complex128, len(p)+len(q)-1)
	for i, x := range p {
		for j, y := range q {
			out[i+j] += x * y
		}
	}
	return out
}

func at(p []complex128, i int) complex128 {
	if i < 0 || i >= len(p) {
		return 0
	}
	return p[i]
}

// far returns the solution exp(σiωr*) r^p (1 + ...), σ = ±1, and its r-derivative
// at large r, from the equation in powers of 1/r.
func (t *teukolsky) far(sigma, r float64) (value, slope complex128) {
	second, first, plain := t.powers(0)
	iw := complex(0, sigma*t.w)
	head := -1.0
	if sigma > 0 {
		head = float64(-1 - 2*t.s)
	}
	p := complex(head, 0) + 2*iw
	weight := func(j int, q complex128) complex128 {
		v := at(second, 4-j)*iw*iw + at(second, 5-j)*2*iw*q + at(second, 6-j)*q*(q-1)
		return v + at(first, 4-j)*iw + at(first, 5-j)*q + at(plain, 4-j)
	}
	terms := []complex128{1}
	value, slope = 1, iw+p/complex(r, 0)
	for n := 1; n < 150; n++ {
		var sum complex128
		scale := complex(1/r, 0)
		for i := n - 1; i >= max(0, n-6); i-- {
			sum += terms[i] * scale * weight(n+1-i, p-complex(float64(i), 0))
			scale /= complex(r, 0)
		}
		term := -sum / weight(1, p-complex(float64(n), 0))
		terms = append(terms, term)
		value += term
		slope += term * (iw + (p-complex(float64(n), 0))/complex(r, 0))
		if cmplx.Abs(term)+cmplx.Abs(terms[n-1]) < 1e-17 {
			break
		}
	}
	// exp(iωr*) → exp(iω(r + 2 ln(r/2))): the expansion has the rest.
	front := cmplx.Exp(iw*complex(r+2*math.Log(r/2), 0)) * complex(math.Pow(r, head), 0)
	return front * value, front * slope
}

// near returns the solution exp(ikr*) (outgoing) or Δ^-s exp(-ikr*) at the
// horizon and its r-derivative at a gap z, from the equation in powers of r - r+.
func (t *teukolsky) near(outgoing bool, z float64) (value, slope complex128) {
	second, first, plain := t.powers(t.rp)
	k := t.kh * t.d / (2 * t.rp)
	rho := complex(0, t.kh)
	start := k * (t.rp + 2*math.Log(t.d/2)) // k r* without its ln x, x = z/d
	front := cmplx.Exp(complex(0, start))
	if !outgoing {
		rho = complex(float64(-t.s), -t.kh)
		front = cmplx.Exp(complex(0, -start)) * complex(math.Pow(t.d*t.d, float64(-t.s)), 0)
	}
	weight := func(j int, q complex128) complex128 {
		v := at(second, j+2)*q*(q-1) + at(first, j+1)*q
		if j == 0 {
			return v - at(second, 2)*rho*(rho-1) - at(first, 1)*rho // its root is ρ, to the last digit
		}
		return v + at(plain, j)
	}
	terms := []complex128{1}
	value, slope = 1, rho/complex(z, 0)
	for n := 1; n < 150; n++ {
		var sum complex128
		scale := complex(z, 0)
		for i := n - 1; i >= max(0, n-4); i-- {
			sum += terms[i] * scale * weight(n-i, rho+complex(float64(i), 0))
			scale *= complex(z, 0)
		}
		q := rho + complex(float64(n), 0)
		term := -sum / weight(0, q)
		terms = append(terms, term)
		value += term
		slope += term * q / complex(z, 0)
		if cmplx.Abs(term)+cmplx.Abs(terms[n-1]) < 1e-18*cmplx.Abs(value) {
			break
		}
	}
	front *= cmplx.Exp(rho * complex(math.Log(z/t.d), 0))
	return front * value, front * slope
}

// farGap, middleGap and nearGap are the places r - r+ of the expansion far away,
// of the change of spin weight and of the expansion at the horizon.
func (t *teukolsky) farGap() float64 { return (25+max(0, t.lambda)/4)/t.w + 15 }
func (t *teukolsky) nearGap() float64 {
	return t.d * min(0.3, 4/(1+math.Abs(t.kh))) // the series contains (1+x)^(-ikh): farther out it cancels
}

const middleGap = 1.5

// carry integrates a wave to another gap.
func (t *teukolsky) carry(y wave, gap float64) wave {
	from := t.rp + math.Exp(real(y.lnGap))
	return integrate(t.a, t.potential, y, Tortoise(t.a, t.rp+gap)-Tortoise(t.a, from))
}

// flip turns a wave of this spin weight into one of to, of the opposite: D⁴R for
// s = -2 and Δ² (D*)⁴ Δ²R for s = +2, D = d/dr - iK/Δ, by Taylor series.
func (t *teukolsky) flip(y wave, to *teukolsky) wave {
	gap := math.Exp(real(y.lnGap))
	value, slope := t.asRadial(y)
	second, first, plain := t.powers(t.rp + gap)
	const order = 8
	f := make([]complex128, order)
	f[0], f[1] = value, slope
	for n := range order - 2 {
		var sum complex128
		for i := range n + 2 {
			k := float64(i)
			sum += f[i] * (complex(k*(k-1), 0)*at(second, n+2-i) + complex(k, 0)*at(first, n+1-i) + at(plain, n-i))
		}
		f[n+2] = -sum / (second[0] * complex(float64((n+2)*(n+1)), 0))
	}
	delta := []complex128{complex(gap*(gap+t.d), 0), complex(2*gap+t.d, 0), 1}
	r := t.rp + gap
	turn := make([]complex128, order) // iK/Δ, then with the sign of the operator
	for n := range turn {
		turn[n] = (at([]complex128{complex(0, (r*r+t.a*t.a)*t.w-t.am), complex(0, 2*r*t.w), complex(0, t.w)}, n) - delta[1]*at(turn, n-1) - at(turn, n-2)) / delta[0]
	}
	square := product(delta, delta)
	if t.s > 0 {
		f = product(square, f)[:order]
	}
	for range 4 {
		next := product(turn, f)[:order]
		for n := range next {
			next[n] = complex(float64(t.s/2), 0)*next[n] + complex(float64(n+1), 0)*at(f, n+1)
		}
		f = next
	}
	if t.s > 0 {
		f = product(square, f)[:order]
	}
	return to.asWave(gap, f[0], f[1])
}

// split writes y as a sum of two solutions given as waves at the same place.
func split(y, one, two wave) (first, second complex128) {
	w := one.x*two.slope - two.x*one.slope
	return (y.x*two.slope - y.slope*two.x) / w, (one.x*y.slope - one.slope*y.x) / w
}

// atHorizon carries a wave to the horizon and returns its amplitudes Cout of
// exp(ikr*) and Cin of Δ^-s exp(-ikr*).
func (t *teukolsky) atHorizon(y wave) (out, in complex128) {
	y = t.carry(y, t.nearGap())
	gap := math.Exp(real(y.lnGap))
	f, df := t.near(true, gap)
	g, dg := t.near(false, gap)
	return split(y, t.asWave(gap, f, df), t.asWave(gap, g, dg))
}

// farAway carries a wave outwards and returns its amplitudes Binc of
// exp(-iωr*)/r and Bref of exp(iωr*) r^(-1-2s).
func (t *teukolsky) farAway(y wave) (incident, reflected complex128) {
	y = t.carry(y, t.farGap())
	gap := math.Exp(real(y.lnGap))
	f, df := t.far(-1, t.rp+gap)
	g, dg := t.far(1, t.rp+gap)
	return split(y, t.asWave(gap, f, df), t.asWave(gap, g, dg))
}
