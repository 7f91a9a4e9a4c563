package kerr

import "math"

// double is an unevaluated sum hi + lo of two float64 with |lo| <= ulp(hi)/2:
// about 32 digits. Numer. Math. 18, 224 (1971) has the exact sum and product
// that it is built from. Only finite values of ordinary size occur here.
type double struct{ hi, lo float64 }

// exactSum returns a + b without rounding.
func exactSum(a, b float64) double {
	s := a + b
	t := s - a
	return double{s, (a - (s - t)) + (b - t)}
}

// tidySum is exactSum for |a| >= |b|.
func tidySum(a, b float64) double {
	s := a + b
	return double{s, b - (s - a)}
}

func (x double) add(y double) double {
	s := exactSum(x.hi, y.hi)
	return tidySum(s.hi, s.lo+(x.lo+y.lo))
}

func (x double) neg() double { return double{-x.hi, -x.lo} }

func (x double) mul(y double) double {
	p := x.hi * y.hi
	return tidySum(p, math.FMA(x.hi, y.hi, -p)+(x.hi*y.lo+x.lo*y.hi))
}

// times is mul for a plain factor.
func (x double) times(y float64) double {
	p := x.hi * y
	return tidySum(p, math.FMA(x.hi, y, -p)+x.lo*y)
}

// inverse returns 1/x: a plain quotient and one step of Newton's method, which
// leaves a relative error of the order of 2⁻¹⁰⁴.
func (x double) inverse() double {
	q := 1 / x.hi
	e := x.times(q).neg().add(double{1, 0})
	return double{q, 0}.add(e.times(q))
}

func (x double) sqrt() double {
	r := math.Sqrt(x.hi)
	// (r + e)² = x with e = (x - r²)/(2r).
	p := r * r
	e := x.add(double{-p, -math.FMA(r, r, -p)})
	return tidySum(r, e.hi/(2*r))
}

// complexDouble is a complex number of two doubles.
type complexDouble struct{ re, im double }

func widen(z complex128) complexDouble {
	return complexDouble{double{real(z), 0}, double{imag(z), 0}}
}

func (z complexDouble) narrow() complex128 { return complex(z.re.hi, z.im.hi) }

func (z complexDouble) add(w complexDouble) complexDouble {
	return complexDouble{z.re.add(w.re), z.im.add(w.im)}
}

func (z complexDouble) addReal(x float64) complexDouble {
	return complexDouble{z.re.add(double{x, 0}), z.im}
}

func (z complexDouble) neg() complexDouble { return complexDouble{z.re.neg(), z.im.neg()} }

// turn returns iz.
func (z complexDouble) turn() complexDouble { return complexDouble{z.im.neg(), z.re} }

func (z complexDouble) times(x float64) complexDouble {
	return complexDouble{z.re.times(x), z.im.times(x)}
}

func (z complexDouble) scale(x double) complexDouble {
	return complexDouble{z.re.mul(x), z.im.mul(x)}
}

func (z complexDouble) mul(w complexDouble) complexDouble {
	return complexDouble{
		z.re.mul(w.re).add(z.im.mul(w.im).neg()),
		z.re.mul(w.im).add(z.im.mul(w.re)),
	}
}

func (z complexDouble) quo(w complexDouble) complexDouble {
	inv := w.re.mul(w.re).add(w.im.mul(w.im)).inverse()
	return z.mul(complexDouble{w.re, w.im.neg()}).scale(inv)
}

// sqrt returns a root of z: the plain one and one step of Newton's method.
func (z complexDouble) sqrt(plain complex128) complexDouble {
	r := widen(plain)
	return r.add(z.quo(r)).times(0.5)
}
