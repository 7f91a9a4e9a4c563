package kerr

import (
	"math"
	"math/cmplx"
	"testing"

	"knell/internal/checktable"
)

// schwarzschild is the barrier at spin 0 as a real potential v of
// d²X/dr*² = -(ω² - v) X, with v/(1-2/r) = Σ series[k] r^-k far away.
type schwarzschild struct {
	v      func(r float64) float64
	series []float64
}

// reggeWheeler is the potential of odd parity (Phys. Rev. 108, 1063 (1957)).
func reggeWheeler(l int) schwarzschild {
	big := float64(l * (l + 1))
	return schwarzschild{
		v:      func(r float64) float64 { return (1 - 2/r) * (big/(r*r) - 6/(r*r*r)) },
		series: []float64{0, 0, big, -6},
	}
}

// zerilli is the potential of even parity (Phys. Rev. Lett. 24, 737 (1970)).
func zerilli(l int) schwarzschild {
	n := float64((l-1)*(l+2)) / 2
	series := make([]float64, 60)
	top := [4]float64{n * n * (n + 1), 3 * n * n, 9 * n, 9}
	for k := 2; k < len(series); k++ {
		for i, c := range top { // 1/(1+3/(nr))² = Σ (j+1)(-3/n)^j r^-j
			if j := k - 2 - i; j >= 0 {
				series[k] += 2 / (n * n) * c * float64(j+1) * math.Pow(-3/n, float64(j))
			}
		}
	}
	return schwarzschild{
		v: func(r float64) float64 {
			return 2 * (1 - 2/r) * (top[0]*r*r*r + top[1]*r*r + top[2]*r + top[3]) / (r * r * r * (n*r + 3) * (n*r + 3))
		},
		series: series,
	}
}

// far returns exp(σiωr*) (1 + ...) at a gap z, σ = ±1: with X = exp(σiωr*) Σ a_n r^-n,
//
//	2σiωn a_n = n(n-1) a_{n-1} - 2n(n-2) a_{n-2} - Σ series[k] a_{n+1-k}
func (s schwarzschild) far(sigma, omega, z float64) wave {
	r := 2 + z
	iw := complex(0, sigma*omega)
	terms := []complex128{1} // a_n r^-n
	sum, slope := complex128(1), complex128(0)
	for n := 1; n < 120; n++ {
		v := complex(float64(n*(n-1))/r, 0) * terms[n-1]
		if n > 1 {
			v -= complex(2*float64(n*(n-2))/(r*r), 0) * terms[n-2]
		}
		for k := 2; k < len(s.series) && k <= n+1; k++ {
			v -= complex(s.series[k]*math.Pow(r, float64(1-k)), 0) * terms[n+1-k]
		}
		term := v / (2 * iw * complex(float64(n), 0))
		terms = append(terms, term)
		sum += term
		slope -= complex(float64(n)/r, 0) * term
		if cmplx.Abs(term)+cmplx.Abs(terms[n-1]) < 1e-17 {
			break
		}
	}
	front := cmplx.Exp(iw * complex(Tortoise(0, r), 0))
	return wave{front * sum, front * (iw*sum + complex(1-2/r, 0)*slope), complex(math.Log(z), 0)}
}

// scatter integrates both ways between r* = -75, where the potential is below
// rounding, and far away.
func (s schwarzschild) scatter(l int, omega float64) (reflection, transmission, farReflection, through complex128) {
	potential := func(r float64) complex128 { return complex(omega*omega-s.v(r), 0) }
	far := (22+float64(l*(l+1))/4)/omega + 15
	const near = -38.0 // ln(r - 2)
	distance := Tortoise(0, 2+far) - TortoiseLog(0, near)
	plane := func(sigma, rstar float64) wave {
		x := cmplx.Exp(complex(0, sigma*omega*rstar))
		return wave{x, complex(0, sigma*omega) * x, 0}
	}

	y := integrate(0, potential, s.far(1, omega, far), -distance)
	end := TortoiseLog(0, real(y.lnGap))
	out, in := split(y, plane(1, end), plane(-1, end))
	reflection, transmission = in/out, 1/out

	start := plane(-1, TortoiseLog(0, near))
	start.lnGap = near
	y = integrate(0, potential, start, distance)
	gap := math.Exp(real(y.lnGap))
	incident, back := split(y, s.far(-1, omega, gap), s.far(1, omega, gap))
	return reflection, transmission, back / incident, 1 / incident
}

// TestPhysicsRealPotentials holds the response at spin 0, phases included, to the
// two potentials: odd to Regge-Wheeler, even to Zerilli, from either side.
func TestPhysicsRealPotentials(t *testing.T) {
	table := checktable.New(t, "barrier at spin 0 against its real potentials, l = 2 to 4, Mω 0.001 to 2, phases included")
	for _, tc := range []struct {
		name      string
		parity    Parity
		potential func(l int) schwarzschild
	}{{"Regge-Wheeler", Odd, reggeWheeler}, {"Zerilli", Even, zerilli}} {
		worst := [4]float64{-1, -1, -1, -1}
		for l := 2; l <= 4; l++ {
			for _, omega := range []float64{0.001, 0.01, 0.1, 0.3, 0.38, 0.5, 0.6, 0.8, 1.1, 1.5, 2} {
				got, err := BarrierResponse(l, 1-l, 0, omega, tc.parity)
				if err != nil {
					t.Fatal(err)
				}
				far, through := got.FromInfinity()
				r, tr, wantFar, wantThrough := tc.potential(l).scatter(l, omega)
				for i, off := range []float64{cmplx.Abs(got.Reflection - r), offBy(got.Transmission, tr), cmplx.Abs(far - wantFar), offBy(through, wantThrough)} {
					worst[i] = max(worst[i], off)
				}
			}
		}
		for i, name := range []string{"R, absolute", "T, relative", "R∞, absolute", "T∞, relative"} {
			// The integration's own error: 2e-15 a step over some hundred steps.
			table.Worst(name, worst[i], 1e-11, tc.name+" potential, integrated here")
		}
	}
}
