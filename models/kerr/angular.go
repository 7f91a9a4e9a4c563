package kerr

// The angular equation for spin weight s = -2, c = aω (ApJ 185, 635 (1973)):
//
//	(1/sinθ)(sinθ S')' + [c²cos²θ - m²/sin²θ - 2cs cosθ - 2ms cosθ/sin²θ
//	                      - s²cot²θ + s + A] S = 0,   A → l(l+1) - s(s+1) as c → 0.

// spinWeight is the spin weight of every field of this package unless it says
// otherwise.
const spinWeight = -2

// quo returns a/b for finite b ≠ 0. The language's complex division also sorts
// out infinities, which costs more than the rest of a fraction's step.
func quo(a, b complex128) complex128 {
	br, bi := real(b), imag(b)
	inv := 1 / (br*br + bi*bi)
	return complex((real(a)*br+imag(a)*bi)*inv, (imag(a)*br-real(a)*bi)*inv)
}

// angularTerms is how many terms beyond the inversion index the angular
// fraction carries. Its partial numerators fall as 4c/n, so for |c| <= 4 the
// remainder is below 1e-25.
const angularTerms = 60

// angularFraction returns the angular continued fraction inverted at index
// l - max(|m|,|s|), as a function of the separation constant; it vanishes at an
// eigenvalue. Source: Proc. R. Soc. A 402, 285 (1985), eqs. 20-21.
//
// The series behind it has the factor exp(c cosθ) and powers of 1 + cosθ, and
// loses up to eight digits to it where Re c is large and positive; turned around,
// θ → π - θ with m and c → -m and -c, it does not.
func angularFraction(l, m int, c, separation complex128) complex128 {
	if real(c) > 0 {
		m, c = -m, -c
	}
	const s = float64(spinWeight)
	k1, k2 := absInt(m-spinWeight), absInt(m+spinWeight)
	h1, h2 := float64(k1)/2, float64(k2)/2
	beta0 := -2*c*complex(2*h1+s+1, 0) + complex((h1+h2)*(h1+h2+1), 0) - c*c - complex(s*(s+1), 0) - separation
	alpha := func(n int) complex128 { return complex(-2*float64(n+1)*float64(n+1+k1), 0) }
	beta := func(n int) complex128 {
		x := float64(n)
		return complex(x*(x-1)+2*x*(h1+h2+1), 0) - complex(4*x, 0)*c + beta0
	}
	gamma := func(n int) complex128 { return 2 * c * complex(float64(n)+h1+h2+s, 0) }
	invert := l - max(absInt(m), absInt(spinWeight))
	var up, down complex128
	for n := 1; n <= invert; n++ {
		up = quo(alpha(n-1)*gamma(n), beta(n-1)-up)
	}
	for n := invert + angularTerms; n > invert; n-- {
		down = quo(alpha(n-1)*gamma(n), beta(n)-down)
	}
	return beta(invert) - up - down
}

// solveAngular refines a separation constant by the secant method on
// angularFraction. The guess must be nearer to the wanted eigenvalue than to
// any other. ok is false if it did not settle.
func solveAngular(l, m int, c, guess complex128) (separation complex128, ok bool) {
	return secant(func(a complex128) complex128 { return angularFraction(l, m, c, a) }, guess, 1e-6, 1e-14)
}

func absInt(n int) int {
	if n < 0 {
		return -n
	}
	return n
}
