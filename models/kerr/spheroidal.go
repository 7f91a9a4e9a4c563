package kerr

import (
	"fmt"
	"math"
	"math/cmplx"
)

// MaxOblateness is the largest |aω| of Spheroidal. The modes of this package
// stay below 2 and the barrier below 1.7.
const MaxOblateness = 4.0

// maxSpherical is the largest l of the functions of the sphere that Spheroidal
// can start from. Quasi-normal modes stop earlier; the barrier does not.
const maxSpherical = 8

// basisSize is how many functions of the sphere represent one spheroidal
// function. Coefficients fall faster than (|c|/2)^k/k!: for |c| <= 4 and twelve
// functions above the largest l the last ones are below 1e-9 in the amplitude
// and their squares below rounding; the range in use (|c| < 2) leaves 1e-17.
const basisSize = 24

// Spheroidal returns the spin-weighted spheroidal harmonic -2S_lm(θ; γ) with
// γ = aω complex, without its factor exp(imφ), normalised to
// ∫ |S|² 2π sinθ dθ = 1. At γ = 0 it is the spherical -2Y_lm(θ, 0) with the sign
// of -2Y_22 = √(5/64π) (1+cosθ)² (arXiv:0709.0093); away from it the phase is
// such that the overlap with that function stays real and positive.
//
// l runs from 2 to 8, |m| <= l, |γ| <= MaxOblateness, θ from 0 to π in radians.
// Cost about 20 µs. SpheroidalDerivatives has derivatives, too.
func Spheroidal(l, m int, gamma complex128, theta float64) (complex128, error) {
	if !(theta >= 0 && theta <= math.Pi) {
		return 0, fmt.Errorf("kerr: theta = %g rad, want 0 to π", theta)
	}
	h, err := newHarmonic(l, m, gamma)
	if err != nil {
		return 0, err
	}
	return h.at(theta), nil
}

// harmonic is one spheroidal function as a sum over functions of the sphere of
// l = lmin, lmin+1, ...
type harmonic struct {
	l, m, lmin   int
	c            complex128            // aω that the coefficients belong to
	coefficients [basisSize]complex128 // unit Hermitian norm, that of l real and positive
	separation   complex128            // A
}

// harmonicStep is the largest step in c in which an eigenvector is followed.
const harmonicStep = 0.25

// newHarmonic follows the function from the sphere along a straight line in c.
func newHarmonic(l, m int, c complex128) (*harmonic, error) {
	h, err := sphericalHarmonic(l, m)
	if err != nil {
		return nil, err
	}
	if err := h.follow(c); err != nil {
		return nil, err
	}
	return h, nil
}

func sphericalHarmonic(l, m int) (*harmonic, error) {
	if l < minMultipole || l > maxSpherical {
		return nil, fmt.Errorf("kerr: l = %d, want %d to %d", l, minMultipole, maxSpherical)
	}
	if absInt(m) > l {
		return nil, fmt.Errorf("kerr: m = %d, want %d to %d", m, -l, l)
	}
	h := &harmonic{l: l, m: m, lmin: max(absInt(m), -spinWeight), separation: complex(float64(l*(l+1)-2), 0)}
	h.coefficients[l-h.lmin] = 1
	return h, nil
}

// follow moves the function to another c in steps that keep the eigenvector
// recognisable.
func (h *harmonic) follow(c complex128) error {
	if !(cmplx.Abs(c) <= MaxOblateness) {
		return fmt.Errorf("kerr: aω = %.4g, want |aω| up to %g", c, MaxOblateness)
	}
	from := h.c
	steps := 1 + int(cmplx.Abs(c-from)/harmonicStep)
	for i := 1; i <= steps; i++ {
		next := from + (c-from)*complex(float64(i)/float64(steps), 0)
		if err := h.refine(next); err != nil {
			return err
		}
	}
	return nil
}

// refine finds the eigenvector at c nearest to the present one, by Rayleigh
// quotient iteration. The matrix is complex symmetric, so the quotient is the
// bilinear xᵀMx/xᵀx, and convergence cubic.
func (h *harmonic) refine(c complex128) error {
	mx := newAngularMatrix(h.lmin, h.m, c)
	x := h.coefficients
	mu := mx.quotient(&x)
	settled := false
	for range 12 {
		y, ok := mx.solve(mu, &x)
		if !ok {
			settled = true // the shift is an eigenvalue to the last bit
			break
		}
		x = y
		next := mx.quotient(&x)
		change := cmplx.Abs(next - mu)
		mu = next
		if change <= 1e-14*(1+cmplx.Abs(mu)) {
			settled = true
			break
		}
	}
	var overlap complex128
	for i := range x {
		overlap += cmplx.Conj(h.coefficients[i]) * x[i]
	}
	if !settled || cmplx.Abs(overlap) < 0.8 {
		return fmt.Errorf("kerr: spheroidal function (%d,%d) lost at aω = %.4g", h.l, h.m, c)
	}
	own := x[h.l-h.lmin]
	phase := cmplx.Conj(own) / complex(cmplx.Abs(own), 0)
	for i := range x {
		h.coefficients[i] = x[i] * phase
	}
	h.c, h.separation = c, mu
	return nil
}

// at returns the function at polar angle theta: the sum over functions of the
// sphere, which climb in l by
//
//	cosθ Y_l = C_{l+1} Y_{l+1} + D_l Y_l + C_l Y_{l-1}
func (h *harmonic) at(theta float64) complex128 {
	cos := math.Cos(theta)
	previous, y := 0.0, lowestSpherical(h.m, theta)
	var sum complex128
	for i := range basisSize {
		l := h.lmin + i
		sum += h.coefficients[i] * complex(y, 0)
		previous, y = y, ((cos-cosineDiagonal(l, h.m))*y-cosineOff(l, h.m)*previous)/cosineOff(l+1, h.m)
	}
	return sum
}

// lowestSpherical returns -2Y_lm(θ, 0) for l = max(|m|, 2), where the sum of
// arXiv:0709.0093 has a single term.
func lowestSpherical(m int, theta float64) float64 {
	const s = -spinWeight
	l := max(absInt(m), s)
	k := max(0, m-s)
	lg := func(n int) float64 { v, _ := math.Lgamma(float64(n + 1)); return v }
	ln := (lg(l+m)+lg(l-m)+lg(l+s)+lg(l-s))/2 - lg(l+m-k) - lg(l-s-k) - lg(k) - lg(k+s-m)
	value := math.Sqrt(float64(2*l+1)/(4*math.Pi)) * math.Exp(ln)
	// max guards cos(π/2), which rounds to 6e-17 of either sign.
	value *= math.Pow(max(0, math.Cos(theta/2)), float64(2*l+m-s-2*k)) * math.Pow(math.Sin(theta/2), float64(2*k+s-m))
	if k%2 == 1 {
		return -value
	}
	return value
}

// cosineDiagonal and cosineOff are the matrix elements of cosθ between
// functions of the sphere: <l|cosθ|l> and <l-1|cosθ|l>.
func cosineDiagonal(l, m int) float64 { return -float64(m*spinWeight) / float64(l*(l+1)) }

func cosineOff(l, m int) float64 {
	const s = spinWeight
	return math.Sqrt(float64((l*l-m*m)*(l*l-s*s))/float64((2*l-1)*(2*l+1))) / float64(l)
}

// angularMatrix is the operator whose eigenvalues are the separation constants,
// l(l+1) - s(s+1) - c²cos²θ + 2cs cosθ, as the diagonal and two upper diagonals
// of a symmetric matrix over functions of the sphere.
type angularMatrix [3][basisSize]complex128

func newAngularMatrix(lmin, m int, c complex128) *angularMatrix {
	const s = spinWeight
	var a angularMatrix
	for i := range basisSize {
		l := lmin + i
		o, o1, o2 := cosineOff(l, m), cosineOff(l+1, m), cosineOff(l+2, m)
		d, d1 := cosineDiagonal(l, m), cosineDiagonal(l+1, m)
		a[0][i] = complex(float64(l*(l+1)-s*(s+1)), 0) - c*c*complex(o*o+d*d+o1*o1, 0) + 2*s*c*complex(d, 0)
		a[1][i] = -c*c*complex(o1*(d+d1), 0) + 2*s*c*complex(o1, 0)
		a[2][i] = -c * c * complex(o1*o2, 0)
	}
	return &a
}

// quotient returns xᵀMx/xᵀx.
func (a *angularMatrix) quotient(x *[basisSize]complex128) complex128 {
	var top, bottom complex128
	for i := range x {
		row := a[0][i] * x[i]
		if i+1 < basisSize {
			row += 2 * a[1][i] * x[i+1]
		}
		if i+2 < basisSize {
			row += 2 * a[2][i] * x[i+2]
		}
		top += x[i] * row
		bottom += x[i] * x[i]
	}
	return quo(top, bottom)
}

// solve returns the solution of (M - shift) y = x, scaled to unit Hermitian
// norm, by elimination with row exchanges inside the band. ok is false if the
// matrix is singular to the last bit.
func (a *angularMatrix) solve(shift complex128, x *[basisSize]complex128) (y [basisSize]complex128, ok bool) {
	const width = 7 // two below, two above, two more from exchanges, diagonal
	var band [basisSize][width]complex128
	for i := range basisSize {
		band[i][2] = a[0][i] - shift
		for k := 1; k <= 2; k++ {
			if i >= k {
				band[i][2-k] = a[k][i-k]
			}
			if i+k < basisSize {
				band[i][2+k] = a[k][i]
			}
		}
	}
	y = *x
	// band[i][j] is column i+j-2.
	for col := range basisSize {
		last := min(col+2, basisSize-1)
		pivot, size := col, size1(band[col][2])
		for r := col + 1; r <= last; r++ {
			if s := size1(band[r][2+col-r]); s > size {
				pivot, size = r, s
			}
		}
		if size == 0 {
			return y, false
		}
		if pivot != col {
			for j := col; j <= min(col+4, basisSize-1); j++ {
				p, q := &band[col][j-col+2], &band[pivot][j-pivot+2]
				*p, *q = *q, *p
			}
			y[col], y[pivot] = y[pivot], y[col]
		}
		for r := col + 1; r <= last; r++ {
			f := quo(band[r][2+col-r], band[col][2])
			if f == 0 {
				continue
			}
			for j := col + 1; j <= min(col+4, basisSize-1); j++ {
				band[r][j-r+2] -= f * band[col][j-col+2]
			}
			y[r] -= f * y[col]
		}
	}
	norm := 0.0
	for i := basisSize - 1; i >= 0; i-- {
		v := y[i]
		for j := i + 1; j <= min(i+4, basisSize-1); j++ {
			v -= band[i][j-i+2] * y[j]
		}
		y[i] = quo(v, band[i][2])
		norm += real(y[i])*real(y[i]) + imag(y[i])*imag(y[i])
	}
	if math.IsInf(norm, 0) || math.IsNaN(norm) {
		return *x, false
	}
	scale := complex(1/math.Sqrt(norm), 0)
	for i := range y {
		y[i] *= scale
	}
	return y, true
}

func size1(z complex128) float64 { return math.Abs(real(z)) + math.Abs(imag(z)) }
