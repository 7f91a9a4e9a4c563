package kerr

import (
	"fmt"
	"math/cmplx"
)

// The recurrence of radial.go turns ill-conditioned for overtones that decay
// much faster than the horizon's surface gravity κ: at MaxSpin and n = 7, where
// |Im ω|/κ passes 60, roundings of float64 scatter the root by 2e-9, whatever
// the inversion. In 32 digits nothing of that is left, and since a float64 root
// is near already, a single secant step suffices.

// wideRecurrence is recurrence in 32 digits, with β_n and γ_n written as
// polynomials: β_n = -2n² + b1 n + b0, γ_n = n² + g1 n + g0.
type wideRecurrence struct{ c0, b1, b0, g1, g0 complexDouble }

// wideRadialRecurrence is radialRecurrence in 32 digits; spin, omega and
// separation are taken as exact.
func wideRadialRecurrence(m int, spin float64, omega, separation complex128) wideRecurrence {
	const s = spinWeight
	b := exactSum(1, -spin).mul(exactSum(1, spin)).sqrt()
	am := double{spin, 0}.times(float64(m))
	a2 := double{spin, 0}.times(spin)
	w := widen(omega)
	iw := w.turn()
	p := complexDouble{w.re.add(am.times(-0.5)), w.im}.scale(b.inverse())
	ip := p.turn()
	b2 := b.add(double{2, 0})
	w8i2 := complexDouble{w.re.times(8), w.im.times(8).add(double{2, 0})} // 8ω + 2i
	mixed := w8i2.mul(p)
	w2 := w.mul(w)
	iwb2 := iw.scale(b2)

	c0 := iw.add(ip).times(-2).addReal(1 - s)
	c1 := iwb2.add(ip).times(4).addReal(-4)
	c2 := iw.times(-6).add(ip.times(-2)).addReal(s + 3)
	c3 := w2.scale(b.times(8).add(double{16, 0}).add(a2.neg())).
		add(w.scale(am).times(-2)).addReal(-s - 1).add(iwb2.times(2)).
		add(widen(separation).neg()).add(mixed)
	c4 := w2.times(-8).add(iw.times(-2 * (2*s + 3))).addReal(s + 1).add(mixed.neg())
	return wideRecurrence{
		c0: c0, b1: c1.addReal(2), b0: c3,
		g1: c2.addReal(-3), g0: c4.add(c2.neg()).addReal(2),
	}
}

func (c *wideRecurrence) alpha(x float64) complexDouble {
	return c.c0.times(x + 1).addReal(x * (x + 1)) // n² + (c0+1)n + c0
}

func (c *wideRecurrence) beta(x float64) complexDouble {
	return c.b1.times(x).add(c.b0).addReal(-2 * x * x)
}

func (c *wideRecurrence) gamma(x float64) complexDouble {
	return c.g1.times(x).add(c.g0).addReal(x * x)
}

// fraction is recurrence.fraction in 32 digits.
func (c *wideRecurrence) fraction(invert, depth int) complex128 {
	r := c.remainder(depth)
	for n := depth; n > invert; n-- {
		x := float64(n)
		r = c.gamma(x).quo(c.beta(x).add(c.alpha(x).mul(r))).neg()
	}
	up := complexDouble{}
	for n := 1; n <= invert; n++ {
		x := float64(n)
		up = c.alpha(x - 1).mul(c.gamma(x)).quo(c.beta(x - 1).add(up.neg()))
	}
	x := float64(invert)
	return c.beta(x).add(c.alpha(x).mul(r)).add(up.neg()).narrow()
}

// wideRemainderOrder is how many powers of n^(-1/2) the remainder carries here.
const wideRemainderOrder = 20

// remainder is recurrence.remainder in 32 digits.
func (c *wideRecurrence) remainder(depth int) complexDouble {
	const order = wideRemainderOrder
	a := [3]complexDouble{widen(1), c.c0.addReal(1), c.c0}
	b := [3]complexDouble{widen(-2), c.b1, c.b0}
	g := [3]complexDouble{widen(1), c.g1, c.g0}
	square := a[1].add(b[1]).add(g[1]).neg()
	root := cmplx.Sqrt(square.narrow())
	if real(root) > 0 {
		root = -root
	}
	c1 := square.sqrt(root)
	var rho, prev [order + 2]complexDouble
	add := func(k int, v complexDouble) {
		rho[k] = rho[k].add(v)
		binom := double{1, 0}
		for j := 0; k+2*j < len(prev); j++ {
			prev[k+2*j] = prev[k+2*j].add(v.scale(binom))
			binom = binom.times(float64(k)/2 + float64(j)).mul(double{float64(j + 1), 0}.inverse())
		}
	}
	product := func(p int) complexDouble {
		var sum complexDouble
		for i := 0; i <= p; i++ {
			sum = sum.add(rho[i].mul(prev[p-i]))
		}
		return sum
	}
	add(0, widen(1))
	add(1, c1)
	for k := 2; k <= order; k++ {
		p := k + 1
		res := product(p).add(b[0].mul(prev[p]))
		for j := 1; j <= 2 && p-2*j >= 0; j++ {
			res = res.add(a[j].mul(product(p - 2*j))).add(b[j].mul(prev[p-2*j]))
			if p == 2*j {
				res = res.add(g[j])
			}
		}
		add(k, res.neg().quo(c1.times(2)))
	}
	z := double{float64(depth), 0}.inverse().sqrt()
	var sum complexDouble
	for k := order; k >= 0; k-- {
		sum = sum.scale(z).add(rho[k])
	}
	return sum
}

// modeTolerance is the largest move of a root, relative to it, under a fraction
// cut twice as deep.
const modeTolerance = 1e-12

// polishMode takes a root that solveMode found to the rounding of float64 itself
// and checks it with a fraction cut twice as deep.
func polishMode(l, m, n int, spin float64, omega, separation complex128) (w, a complex128, err error) {
	depth := radialDepth(spin)
	lost := func(why string, size float64) error {
		return fmt.Errorf("kerr: mode (%d,%d,%d) at spin %g: %s %.1e, want below %g", l, m, n, spin, why, size, modeTolerance)
	}
	f := func(w complex128, depth int) (complex128, error) {
		var ok bool
		if a, ok = solveAngular(l, m, complex(spin, 0)*w, separation); !ok {
			return 0, fmt.Errorf("kerr: mode (%d,%d,%d) at spin %g: no separation constant at ω = %.6g", l, m, n, spin, w)
		}
		c := wideRadialRecurrence(m, spin, w, a)
		return c.fraction(n, depth), nil
	}
	// Root and second point are some 1e-9 and 1e-7 off: the secant's error is
	// of the order of their product.
	const step = 1e-7
	x0, x1 := omega, omega+complex(step, step/2)
	f0, err := f(x0, depth)
	if err != nil {
		return 0, 0, err
	}
	f1, err := f(x1, depth)
	if err != nil {
		return 0, 0, err
	}
	slope := quo(f1-f0, x1-x0)
	w = x0 - quo(f0, slope)
	if move := cmplx.Abs(w - omega); !(move < step) {
		return 0, 0, lost("root moved by", move)
	}
	deep, err := f(w, 2*depth)
	if err != nil {
		return 0, 0, err
	}
	if move := cmplx.Abs(quo(deep, slope)) / cmplx.Abs(w); !(move < modeTolerance) {
		return 0, 0, lost("continued fraction uncertain by", move)
	}
	return w, a, nil
}
