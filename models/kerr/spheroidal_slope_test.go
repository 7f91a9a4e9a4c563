package kerr

import (
	"math"
	"math/cmplx"
	"testing"

	"knell/internal/checktable"
	"knell/internal/random"

	"gonum.org/v1/gonum/integrate/quad"
)

// oblatenesses are the γ of the tests: of modes, real ones of the barrier, and up
// to the largest.
var oblatenesses = []complex128{0, 1e-6, 0.37 - 0.06i, 0.93 - 0.03i, 0.2 - 1.7i, -1.6, 1.7, 0.5 - 1.9i, 2.5, 2.4 - 1.2i, 3.9i, -4}

// TestPhysicsSpheroidal puts the functions into their differential equation with
// derivatives taken term by term, and into relations that hold for every γ.
func TestPhysicsSpheroidal(t *testing.T) {
	table := checktable.New(t, "spheroidal harmonics of spin weight -2, l up to 8, complex |γ| up to 4")
	const s = spinWeight
	equation, reflection, conjugation, fraction := -1.0, -1.0, -1.0, -1.0
	get := func(l, m int, gamma complex128, theta float64) SpheroidalValue {
		v, err := SpheroidalDerivatives(l, m, gamma, theta)
		if err != nil {
			t.Fatalf("(%d,%d) γ=%g: %v", l, m, gamma, err)
		}
		return v
	}
	for l := minMultipole; l <= maxSpherical; l++ {
		for m := -l; m <= l; m++ {
			for _, gamma := range oblatenesses {
				for _, theta := range []float64{0.4, 1.3, 2.2} {
					v := get(l, m, gamma, theta)
					cos, sin := math.Cos(theta), math.Sin(theta)
					cot, fm := cos/sin, float64(m)
					potential := gamma*gamma*complex(cos*cos, 0) - complex(fm*fm/(sin*sin)+2*fm*s*cot/sin+s*s*cot*cot-s, 0) -
						2*s*gamma*complex(cos, 0) + v.Separation
					terms := cmplx.Abs(v.D2Theta) + cmplx.Abs(v.DTheta) + cmplx.Abs(potential*v.S)
					equation = max(equation, cmplx.Abs(v.D2Theta+complex(cot, 0)*v.DTheta+potential*v.S)/(1+terms))
					// θ → π - θ is m, γ → -m, -γ, and the sphere's sign is (-1)^l.
					mirror := get(l, -m, -gamma, math.Pi-theta)
					sign := complex(1-2*float64(l%2), 0)
					reflection = max(reflection, cmplx.Abs(mirror.S-sign*v.S), cmplx.Abs(mirror.DTheta+sign*v.DTheta)/(1+float64(l)),
						cmplx.Abs(mirror.Separation-v.Separation)/(1+cmplx.Abs(v.Separation)))
					other := get(l, m, cmplx.Conj(gamma), theta)
					conjugation = max(conjugation, cmplx.Abs(other.S-cmplx.Conj(v.S)), cmplx.Abs(other.Separation-cmplx.Conj(v.Separation))/(1+cmplx.Abs(v.Separation)))
					if plain, err := Spheroidal(l, m, gamma, theta); err != nil || cmplx.Abs(plain-v.S) > 1e-14 {
						t.Errorf("(%d,%d) γ=%g: Spheroidal gives %.15g (%v), with derivatives %.15g", l, m, gamma, plain, err, v.S)
					}
				}
				h, err := newHarmonic(l, m, gamma)
				if err != nil {
					t.Fatal(err)
				}
				if math.Abs(imag(gamma)) > 2 {
					continue // the fraction loses digits there; nothing here goes so far
				}
				if a, ok := solveAngular(l, m, gamma, h.separation); ok {
					fraction = max(fraction, cmplx.Abs(a-h.separation)/(1+cmplx.Abs(a)))
				} else {
					t.Errorf("(%d,%d) γ=%g: the fraction's separation constant did not settle", l, m, gamma)
				}
			}
		}
	}
	table.Worst("residual of the differential equation, of its terms", equation, 1e-12, "ApJ 185, 635 (1973)")
	table.Worst("S_lm(π-θ; γ) - (-1)^l S_l-m(θ; -γ), its slope, A", reflection, 1e-12, "symmetry of the equation")
	table.Worst("S(θ; γ*) - S(θ; γ)*, A", conjugation, 1e-12, "symmetry of the equation")
	table.Worst("A as an eigenvalue less A of the continued fraction, of 1+|A|, |Im γ| < 2", fraction, 1e-12, "Proc. R. Soc. A 402, 285, eqs. 20-21")
}

// TestPhysicsSpheroidalProducts integrates products: functions of equal m and real
// γ are orthonormal; of complex γ their bilinear product vanishes, and each has
// norm 1.
func TestPhysicsSpheroidalProducts(t *testing.T) {
	table := checktable.New(t, "integrals of spheroidal harmonics over the sphere, by Gauss-Legendre quadrature")
	const points = 80
	nodes, weights := make([]float64, points), make([]float64, points)
	quad.Legendre{}.FixedLocations(nodes, weights, -1, 1)
	normOff, realOff, bilinearOff := -1.0, -1.0, -1.0
	for m := -4; m <= 4; m++ {
		for _, gamma := range oblatenesses {
			var values [][]complex128
			for l := max(2, absInt(m)); l <= maxSpherical; l++ {
				h, err := newHarmonic(l, m, gamma)
				if err != nil {
					t.Fatal(err)
				}
				v := make([]complex128, points)
				for i, x := range nodes {
					v[i] = h.at(math.Acos(x)) * complex(math.Sqrt(2*math.Pi*weights[i]), 0)
				}
				values = append(values, v)
			}
			for i, v := range values {
				for j, w := range values[:i+1] {
					var hermitian, bilinear complex128
					for k := range v {
						hermitian += cmplx.Conj(v[k]) * w[k]
						bilinear += v[k] * w[k]
					}
					switch {
					case i == j:
						normOff = max(normOff, cmplx.Abs(hermitian-1))
					case imag(gamma) == 0:
						realOff = max(realOff, cmplx.Abs(hermitian))
					default:
						bilinearOff = max(bilinearOff, cmplx.Abs(bilinear))
					}
				}
			}
		}
	}
	const source = "orthonormality"
	table.Worst("∫|S|² - 1", normOff, 1e-12, source)
	table.Worst("∫S* S' of different l, real γ", realOff, 1e-12, source)
	table.Worst("∫S S' of different l, complex γ", bilinearOff, 1e-12, source)
}

// TestPhysicsSmallOblateness compares A with its series in γ (PRD 73, 024013,
// eqs. 2.14 to 2.16, from memory):
//
//	A = l(l+1) - s(s+1) - 2ms²/(l(l+1)) γ + [h(l+1) - h(l) - 1] γ² + ...,
//	h(l) = 2 (l²-s²) (l²-m²) (l²-s²) / (l³ (2l-1)(2l+1))
func TestPhysicsSmallOblateness(t *testing.T) {
	table := checktable.New(t, "separation constant against its series in γ")
	const s2 = spinWeight * spinWeight
	const source = "PRD 73, 024013, from memory"
	worst1, worst2, slope := -1.0, -1.0, -1.0
	for l := minMultipole; l <= maxSpherical; l++ {
		for m := -l; m <= l; m++ {
			fl, fm := float64(l), float64(m)
			f1 := -2 * fm * s2 / (fl * (fl + 1))
			h := func(l float64) float64 {
				return 2 * (l*l - s2) * (l*l - s2) * (l*l - fm*fm) / (l * l * l * (2*l - 1) * (2*l + 1))
			}
			f2 := h(fl+1) - h(fl) - 1
			at := func(gamma float64) SpheroidalValue {
				v, err := SpheroidalDerivatives(l, m, complex(gamma, 0), 1)
				if err != nil {
					t.Fatal(err)
				}
				return v
			}
			const g = 1e-3
			up, down, zero := at(g), at(-g), at(0)
			// Even and odd parts: the next terms are of relative order γ².
			even := real(up.Separation+down.Separation-2*zero.Separation) / (2 * g * g)
			odd := real(up.Separation-down.Separation) / (2 * g)
			worst1 = max(worst1, math.Abs(odd-f1))
			worst2 = max(worst2, math.Abs(even-f2))
			slope = max(slope, math.Abs(real(zero.DSeparation)-f1))
		}
	}
	table.Worst("coefficient of γ", worst1, 1e-5, source)
	table.Worst("coefficient of γ²", worst2, 1e-5, source)
	table.Worst("dA/dγ at γ = 0", slope, 1e-13, source)
}

// TestSpheroidalSlopes compares derivatives with differences of the function.
func TestSpheroidalSlopes(t *testing.T) {
	rng := random.New(1, "spheroidal slopes")
	for range 300 {
		l := minMultipole + rng.IntN(maxSpherical-1)
		m := rng.IntN(2*l+1) - l
		gamma := cmplx.Rect(3.5*rng.Float64(), 2*math.Pi*rng.Float64())
		theta := 0.1 + (math.Pi-0.2)*rng.Float64()
		direction := cmplx.Rect(1, 2*math.Pi*rng.Float64())
		at := func(dGamma complex128, dTheta float64) SpheroidalValue {
			v, err := SpheroidalDerivatives(l, m, gamma+dGamma, theta+dTheta)
			if err != nil {
				t.Fatal(err)
			}
			return v
		}
		v := at(0, 0)
		// Fourth-order differences with step 2e-3: 1e-9 of the scale, which grows
		// as the fifth derivative, l⁵ in θ.
		const d = 2e-3
		difference := func(f func(k float64) complex128) complex128 {
			return (8*(f(1)-f(-1)) - f(2) + f(-2)) / (12 * d)
		}
		along := func(k float64) complex128 { return complex(k*d, 0) * direction }
		for _, q := range []struct {
			name      string
			got, want complex128
			tol       float64
		}{
			{"dS/dθ", v.DTheta, difference(func(k float64) complex128 { return at(0, k*d).S }), 1e-11 * math.Pow(float64(l), 5)},
			{"d²S/dθ²", v.D2Theta, difference(func(k float64) complex128 { return at(0, k*d).DTheta }), 1e-11 * math.Pow(float64(l), 6)},
			{"dA/dγ", v.DSeparation * direction, difference(func(k float64) complex128 { return at(along(k), 0).Separation }), 1e-9},
			{"dS/dγ along a direction", v.Along(direction), difference(func(k float64) complex128 { return at(along(k), 0).S }), 1e-9},
		} {
			if off := cmplx.Abs(q.got - q.want); off > q.tol {
				t.Errorf("(%d,%d) γ=%.3g θ=%.3f: %s = %.12g, differences give %.12g", l, m, gamma, theta, q.name, q.got, q.want)
			}
		}
	}
	// Real γ: the analytic derivative is that along the axis.
	v, err := SpheroidalDerivatives(3, 2, 1.3, 0.8)
	if err != nil {
		t.Fatal(err)
	}
	if off := cmplx.Abs(v.Along(1) - v.DGamma); off > 1e-14 {
		t.Errorf("real γ: derivatives differ by %.1e", off)
	}
	for _, err := range []error{
		fourth(SpheroidalDerivatives(1, 0, 0, 1)), fourth(SpheroidalDerivatives(2, 2, 5, 1)), fourth(SpheroidalDerivatives(2, 2, 0, 4)),
	} {
		if err == nil {
			t.Error("no error for an argument out of range")
		}
	}
}

func fourth(_ SpheroidalValue, err error) error { return err }

// TestSpheroidalPoles: at the poles everything is finite, and only m = 2 (north)
// and m = -2 (south) have a value.
func TestSpheroidalPoles(t *testing.T) {
	for l := minMultipole; l <= maxSpherical; l++ {
		for m := -l; m <= l; m++ {
			for pole, theta := range map[int]float64{2: 0, -2: math.Pi} {
				v, err := SpheroidalDerivatives(l, m, 0.9-0.4i, theta)
				if err != nil {
					t.Fatal(err)
				}
				for _, z := range []complex128{v.S, v.DTheta, v.D2Theta, v.DGamma} {
					if cmplx.IsNaN(z) || cmplx.IsInf(z) {
						t.Errorf("(%d,%d) θ=%g: %+v", l, m, theta, v)
					}
				}
				if (cmplx.Abs(v.S) > 1e-10) != (m == pole) {
					t.Errorf("(%d,%d) θ=%g: S = %.3g", l, m, theta, v.S)
				}
			}
		}
	}
}

func BenchmarkSpheroidal(b *testing.B) {
	for b.Loop() {
		if _, err := Spheroidal(2, 2, 0.37-0.06i, 1); err != nil {
			b.Fatal(err)
		}
	}
}

func BenchmarkSpheroidalDerivatives(b *testing.B) {
	for b.Loop() {
		if _, err := SpheroidalDerivatives(2, 2, 0.37-0.06i, 1); err != nil {
			b.Fatal(err)
		}
	}
}
