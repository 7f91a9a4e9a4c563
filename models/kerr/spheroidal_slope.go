package kerr

import (
	"fmt"
	"math"
	"math/cmplx"
)

// SpheroidalValue is a spheroidal harmonic at one angle, with its derivatives.
type SpheroidalValue struct {
	S               complex128 // -2S_lm(θ; γ), see Spheroidal
	DTheta, D2Theta complex128 // dS/dθ and d²S/dθ², θ in rad
	DGamma          complex128 // dS/dγ with ∫S² sinθ dθ held fixed, see SpheroidalDerivatives
	Separation      complex128 // A
	DSeparation     complex128 // dA/dγ

	norm, phase complex128 // <S, dS/dγ>, and dγ-rate of the logarithm of the overlap with the sphere
}

// SpheroidalDerivatives returns the function of Spheroidal with its derivatives
// by θ and γ, the separation constant A and dA/dγ. Ranges and errors as for
// Spheroidal; cost about 30 µs.
//
// A is analytic in γ (away from branch points, which this package's range
// avoids):
//
//	dA/dγ = ∫ S² (2s cosθ - 2γ cos²θ) sinθ dθ / ∫ S² sinθ dθ,   s = -2.
//
// S as normalised, by |S|² and a real overlap with the sphere's function, is not
// analytic, so it has a derivative only along a direction of the γ plane: that is
// Along. The field DGamma is the derivative of the analytic function that is S at
// this γ and whose ∫S² sinθ dθ does not depend on γ. For real γ and real steps
// the two are the same.
func SpheroidalDerivatives(l, m int, gamma complex128, theta float64) (SpheroidalValue, error) {
	if !(theta >= 0 && theta <= math.Pi) {
		return SpheroidalValue{}, fmt.Errorf("kerr: theta = %g rad, want 0 to π", theta)
	}
	h, err := newHarmonic(l, m, gamma)
	if err != nil {
		return SpheroidalValue{}, err
	}
	slope, rate, err := h.slope()
	if err != nil {
		return SpheroidalValue{}, err
	}
	v := SpheroidalValue{Separation: h.separation, DSeparation: rate}
	own := h.l - h.lmin
	v.phase = quo(slope[own], h.coefficients[own])
	cos, sin := math.Cos(theta), math.Sin(theta)
	y := lowestSphericalDerivatives(m, theta)
	var before [3]float64
	for i := range basisSize {
		l := h.lmin + i
		x := h.coefficients[i]
		v.S += x * complex(y[0], 0)
		v.DTheta += x * complex(y[1], 0)
		v.D2Theta += x * complex(y[2], 0)
		v.DGamma += slope[i] * complex(y[0], 0)
		v.norm += cmplx.Conj(x) * slope[i]
		// The climb of harmonic.at and its derivatives.
		d, o, up := cos-cosineDiagonal(l, m), cosineOff(l, m), cosineOff(l+1, m)
		before, y = y, [3]float64{
			(d*y[0] - o*before[0]) / up,
			(d*y[1] - sin*y[0] - o*before[1]) / up,
			(d*y[2] - 2*sin*y[1] - cos*y[0] - o*before[2]) / up,
		}
	}
	return v, nil
}

// Along returns dS/dt of the normalised function for γ → γ + t direction.
func (v SpheroidalValue) Along(direction complex128) complex128 {
	return v.DGamma*direction - v.S*complex(real(v.norm*direction), imag(v.phase*direction))
}

// slope returns the derivatives by c of the coefficients, at fixed bilinear norm
// xᵀx, and of the separation constant. They solve the bordered system
//
//	(M - A) x' + μ x = -(M' - A') x,   xᵀx' = 0,   A' = xᵀM'x / xᵀx  (which makes μ = 0).
func (h *harmonic) slope() (slope [basisSize]complex128, rate complex128, err error) {
	mx, mxRate := newAngularMatrix(h.lmin, h.m, h.c), newAngularMatrixRate(h.lmin, h.m, h.c)
	x := &h.coefficients
	rate = mxRate.quotient(x)
	var system [basisSize + 1][basisSize + 2]complex128
	last := basisSize
	for i := range basisSize {
		system[i][i] = mx[0][i] - h.separation
		system[i][last+1] -= (mxRate[0][i] - rate) * x[i]
		for k := 1; k <= 2 && i+k < basisSize; k++ {
			j := i + k
			system[i][j], system[j][i] = mx[k][i], mx[k][i]
			system[i][last+1] -= mxRate[k][i] * x[j]
			system[j][last+1] -= mxRate[k][i] * x[i]
		}
		system[i][last], system[last][i] = x[i], x[i]
	}
	for col := range system {
		pivot := col
		for r := col + 1; r < len(system); r++ {
			if size1(system[r][col]) > size1(system[pivot][col]) {
				pivot = r
			}
		}
		system[col], system[pivot] = system[pivot], system[col]
		if system[col][col] == 0 {
			return slope, 0, fmt.Errorf("kerr: spheroidal function (%d,%d) has no derivative at aω = %.4g", h.l, h.m, h.c)
		}
		for r := col + 1; r < len(system); r++ {
			f := quo(system[r][col], system[col][col])
			for j := col + 1; f != 0 && j < len(system[r]); j++ {
				system[r][j] -= f * system[col][j]
			}
		}
	}
	var solution [basisSize + 1]complex128
	for i := last; i >= 0; i-- {
		v := system[i][last+1]
		for j := i + 1; j <= last; j++ {
			v -= system[i][j] * solution[j]
		}
		solution[i] = quo(v, system[i][i])
	}
	copy(slope[:], solution[:basisSize])
	return slope, rate, nil
}

// newAngularMatrixRate is the derivative of newAngularMatrix by c.
func newAngularMatrixRate(lmin, m int, c complex128) *angularMatrix {
	const s = spinWeight
	var a angularMatrix
	for i := range basisSize {
		l := lmin + i
		o, o1, o2 := cosineOff(l, m), cosineOff(l+1, m), cosineOff(l+2, m)
		d, d1 := cosineDiagonal(l, m), cosineDiagonal(l+1, m)
		a[0][i] = -2*c*complex(o*o+d*d+o1*o1, 0) + 2*s*complex(d, 0)
		a[1][i] = -2*c*complex(o1*(d+d1), 0) + 2*s*complex(o1, 0)
		a[2][i] = -2 * c * complex(o1*o2, 0)
	}
	return &a
}

// lowestSphericalDerivatives returns lowestSpherical with its first and second
// derivative by θ. It is a multiple of cos^p(θ/2) sin^q(θ/2).
func lowestSphericalDerivatives(m int, theta float64) [3]float64 {
	const s = -spinWeight
	l := max(absInt(m), s)
	k := max(0, m-s)
	p, q := float64(2*l+m-s-2*k), float64(2*k+s-m)
	const middle = math.Pi / 2
	factor := lowestSpherical(m, middle) * math.Pow(2, (p+q)/2)
	c, sn := max(0, math.Cos(theta/2)), math.Sin(theta/2)
	term := func(weight, p, q float64) float64 {
		if weight == 0 {
			return 0 // its power may be negative
		}
		return factor * weight * math.Pow(c, p) * math.Pow(sn, q)
	}
	return [3]float64{
		term(1, p, q),
		(term(q, p+1, q-1) - term(p, p-1, q+1)) / 2,
		(term(p*(p-1), p-2, q+2) - term(p*(q+1)+q*(p+1), p, q) + term(q*(q-1), p+2, q-2)) / 4,
	}
}
