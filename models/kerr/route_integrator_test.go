package kerr

import (
	"math"
	"math/cmplx"
	"testing"
)

// The second route to the barrier shares nothing with the first but geometry.go:
// it integrates the Teukolsky equation in its form without a first derivative
// (and, at spin 0, those of Regge-Wheeler and Zerilli) over the tortoise
// coordinate on the real axis with a general-purpose integrator, takes s = +2
// for waves from the horizon and s = -2 for waves from far away, and finds the
// separation constant as an eigenvalue of a dense matrix of Jacobi polynomials.

// wave is a function X of r*, its slope, and ln(r - r+), which is carried along
// because r*(r) has no closed inverse.
type wave struct{ x, slope, lnGap complex128 }

func (a wave) plus(h complex128, b wave) wave {
	return wave{a.x + h*b.x, a.slope + h*b.slope, a.lnGap + h*b.lnGap}
}

// integrate carries d²X/dr*² = -V(r) X from y over a distance in r* by Gragg's midpoint
// rule with Richardson extrapolation (Numer. Math. 8, 1 (1966)), in steps that
// adapt to a relative error of 2e-15 each.
func integrate(spin float64, potential func(r float64) complex128, y wave, distance float64) wave {
	rp, rm, a2 := HorizonRadius(spin), InnerHorizonRadius(spin), spin*spin
	slope := func(y wave) wave {
		z := math.Exp(real(y.lnGap))
		r := rp + z
		return wave{y.slope, -potential(r) * y.x, complex((r-rm)/(r*r+a2), 0)}
	}
	origin := TortoiseLog(spin, real(y.lnGap))
	const levels = 9
	step := math.Copysign(min(0.1, math.Abs(distance)), distance)
	for done := 0.0; done != distance; {
		if math.Abs(distance-done) < 1.01*math.Abs(step) {
			step = distance - done
		}
		first := slope(y)
		var table [levels]wave
		accepted := false
		for k := range levels {
			n := 2 * (k + 1)
			h := complex(step/float64(n), 0)
			before, now := y, y.plus(h, first)
			for i := 1; i < n; i++ {
				before, now = now, before.plus(2*h, slope(now))
			}
			table[k] = now.plus(1, before).plus(h, slope(now))
			table[k] = wave{table[k].x / 2, table[k].slope / 2, table[k].lnGap / 2}
			for j := k - 1; j >= 0; j-- {
				ratio := float64(n) / float64(2*(j+1))
				weight := complex(1/(ratio*ratio-1), 0)
				table[j] = table[j+1].plus(weight, table[j+1].plus(-1, table[j]))
			}
			// table[1] is the extrapolation without the coarsest level.
			if k < 5 {
				continue
			}
			best, other := table[0], table[1]
			length := 1 / math.Abs(step)
			size := cmplx.Abs(best.x) + cmplx.Abs(best.slope)/(length+cmplx.Abs(cmplx.Sqrt(potential(rp+math.Exp(real(best.lnGap))))))
			off := cmplx.Abs(best.x-other.x)/size + cmplx.Abs(best.slope-other.slope)/(size*length) + cmplx.Abs(best.lnGap-other.lnGap)/(1+cmplx.Abs(best.lnGap))
			if off < 2e-15 {
				y, accepted = best, true
				done += step
				// The gap has an exact relation to r*, which stops its drift.
				rate := real(slope(y).lnGap)
				y.lnGap += complex(rate*(origin+done-TortoiseLog(spin, real(y.lnGap))), 0)
				if k < levels-1 {
					step *= 1.5
				}
				break
			}
		}
		if !accepted {
			step /= 2
		}
	}
	return y
}

// TestIntegrator holds the integrator to a plane wave in curved coordinates: with
// V = ω² the answer is exp(iωr*) and the gap is that of TortoiseLog.
func TestIntegrator(t *testing.T) {
	const omega, spin = 0.8, 0.6
	start, end := math.Log(20.0), -3.0
	distance := TortoiseLog(spin, end) - TortoiseLog(spin, start)
	got := integrate(spin, func(float64) complex128 { return omega * omega }, wave{1, 1i * omega, complex(start, 0)}, distance)
	want := cmplx.Exp(complex(0, omega*distance))
	// Some forty steps of 1e-15 each.
	if off := cmplx.Abs(got.x - want); off > 1e-13 {
		t.Errorf("X off by %.1e", off)
	}
	if off := math.Abs(real(got.lnGap) - end); off > 1e-12 {
		t.Errorf("ln(r - r+) off by %.1e", off)
	}
}
