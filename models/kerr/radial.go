package kerr

import (
	"math"
	"math/cmplx"
)

// recurrence holds the coefficients of the radial three-term recurrence
//
//	α_n a_{n+1} + β_n a_n + γ_n a_{n-1} = 0
//	α_n = n² + (c0+1)n + c0,  β_n = -2n² + (c1+2)n + c3,  γ_n = n² + (c2-3)n + c4 - c2 + 2
//
// of Proc. R. Soc. A 402, 285 (1985), eqs. 25-26, rewritten from 2M = 1 to M = 1.
type recurrence struct{ c0, c1, c2, c3, c4 complex128 }

// radialRecurrence returns the coefficients for azimuthal index m at frequency
// omega and separation constant.
func radialRecurrence(m int, spin float64, omega, separation complex128) recurrence {
	const s = complex(spinWeight, 0)
	b := complex(rootOfDeficit(spin), 0)
	am := complex(spin*float64(m), 0)
	a2 := complex(spin*spin, 0)
	iw := complex(-imag(omega), real(omega))
	p := (omega - am/2) / b // k/(2κ) plus a multiple of ω
	ip := complex(-imag(p), real(p))
	return recurrence{
		c0: 1 - s - 2*iw - 2*ip,
		c1: -4 + 4*iw*(2+b) + 4*ip,
		c2: s + 3 - 6*iw - 2*ip,
		c3: omega*omega*(16+8*b-a2) - 2*am*omega - s - 1 + 2*(2+b)*iw - separation + (8*omega+2i)*p,
		c4: s + 1 - 8*omega*omega - 2*(2*s+3)*iw - (8*omega+2i)*p,
	}
}

func (c *recurrence) alpha(n float64) complex128 {
	x := complex(n, 0)
	return x*x + (c.c0+1)*x + c.c0
}

func (c *recurrence) beta(n float64) complex128 {
	x := complex(n, 0)
	return -2*x*x + (c.c1+2)*x + c.c3
}

func (c *recurrence) gamma(n float64) complex128 {
	x := complex(n, 0)
	return x*x + (c.c2-3)*x + c.c4 - c.c2 + 2
}

// fraction returns the continued fraction inverted at the given index and
// truncated at depth, where the remainder series stands in for the rest. It
// vanishes at a quasi-normal frequency, whatever the inversion; the inversion
// that equals the overtone is the well-conditioned one.
func (c *recurrence) fraction(invert, depth int) complex128 {
	r := c.remainder(depth)
	// Plain float64 parts: this loop is nine tenths of the package's time.
	c0r, c0i := real(c.c0), imag(c.c0)
	b1r, b1i := real(c.c1)+2, imag(c.c1)
	b0r, b0i := real(c.c3), imag(c.c3)
	g1r, g1i := real(c.c2)-3, imag(c.c2)
	g0 := c.c4 - c.c2 + 2
	g0r, g0i := real(g0), imag(g0)
	rr, ri := real(r), imag(r)
	for n := depth; n > invert; n-- {
		x := float64(n)
		ar, ai := x*x+(c0r+1)*x+c0r, c0i*x+c0i
		dr := -2*x*x + b1r*x + b0r + ar*rr - ai*ri
		di := b1i*x + b0i + ar*ri + ai*rr
		gr, gi := x*x+g1r*x+g0r, g1i*x+g0i
		inv := -1 / (dr*dr + di*di)
		rr, ri = (gr*dr+gi*di)*inv, (gi*dr-gr*di)*inv
	}
	var up complex128
	for n := 1; n <= invert; n++ {
		up = quo(c.alpha(float64(n-1))*c.gamma(float64(n)), c.beta(float64(n-1))-up)
	}
	x := float64(invert)
	return c.beta(x) + c.alpha(x)*complex(rr, ri) - up
}

// remainderOrder is how many powers of n^(-1/2) the remainder carries.
const remainderOrder = 12

// remainder returns the ratio a_{n+1}/a_n of the minimal solution at n = depth
// from its series in z = n^(-1/2),
//
//	ρ(z) = 1 + C1 z + C2 z² + ...,   C1 = -√(-2iω·2b'), Re C1 < 0,
//
// PRD 47, 5253 (1993) carried to more terms: C_k is solved, order by order, from
// α̂ρ(z)ρ(z') + β̂ρ(z') + γ̂ = 0 with z' = z/√(1-z²) the argument at n-1 and hats
// for coefficients over n². C_k enters at order k+1 with the factor 2 C1.
func (c *recurrence) remainder(depth int) complex128 {
	const order = remainderOrder
	a := [3]complex128{1, c.c0 + 1, c.c0}
	b := [3]complex128{-2, c.c1 + 2, c.c3}
	g := [3]complex128{1, c.c2 - 3, c.c4 - c.c2 + 2}
	c1 := cmplx.Sqrt(-(a[1] + b[1] + g[1]))
	if real(c1) > 0 {
		c1 = -c1
	}
	var rho, prev [order + 2]complex128 // ρ(z) and ρ(z') in powers of z
	add := func(k int, v complex128) {
		rho[k] += v
		// z'^k = z^k (1-z²)^(-k/2)
		binom := 1.0
		for j := 0; k+2*j < len(prev); j++ {
			prev[k+2*j] += v * complex(binom, 0)
			binom *= (float64(k)/2 + float64(j)) / float64(j+1)
		}
	}
	product := func(p int) complex128 {
		var sum complex128
		for i := 0; i <= p; i++ {
			sum += rho[i] * prev[p-i]
		}
		return sum
	}
	add(0, 1)
	add(1, c1)
	for k := 2; k <= order; k++ {
		p := k + 1
		res := product(p) + b[0]*prev[p]
		for j := 1; j <= 2 && p-2*j >= 0; j++ {
			res += a[j]*product(p-2*j) + b[j]*prev[p-2*j]
			if p == 2*j {
				res += g[j]
			}
		}
		add(k, -res/(2*c1))
	}
	z := complex(1/math.Sqrt(float64(depth)), 0)
	var sum complex128
	for k := order; k >= 0; k-- {
		sum = sum*z + rho[k]
	}
	return sum
}

// secant finds a zero of f near x; its second point is step away. It settles
// when a step is below tol relative to the root, or when steps already below
// 1e4 tol stop shrinking, which is the rounding of f. ok is false after 40 steps
// without either.
func secant(f func(complex128) complex128, x complex128, step, tol float64) (root complex128, ok bool) {
	x0, f0 := x, f(x)
	x1 := x + complex(step, step/2)
	f1 := f(x1)
	last := math.Inf(1)
	for range 40 {
		if f1 == 0 {
			return x1, true
		}
		if f1 == f0 {
			return x1, last <= 1e4*tol*cmplx.Abs(x1)
		}
		dx := -quo(f1*(x1-x0), f1-f0)
		x0, f0 = x1, f1
		x1 += dx
		size, scale := cmplx.Abs(dx), cmplx.Abs(x1)
		switch {
		case math.IsNaN(scale) || math.IsInf(scale, 0):
			return x1, false
		case size <= tol*scale, size <= 1e4*tol*scale && size >= last/2:
			return x1, true
		}
		last = size
		f1 = f(x1)
	}
	return x1, false
}
