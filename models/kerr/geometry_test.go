package kerr

import (
	"math"
	"testing"
)

// TestLightRings checks the defining equation r^(3/2) - 3 r^(1/2) ± 2a = 0.
func TestLightRings(t *testing.T) {
	for _, a := range []float64{0, 0.1, 0.5, 0.9, 0.998} {
		for sign, r := range map[float64]float64{1: LightRing(a), -1: RetrogradeLightRing(a)} {
			if res := math.Pow(r, 1.5) - 3*math.Sqrt(r) + sign*2*a; math.Abs(res) > 1e-14 {
				t.Errorf("a=%g: ring at %g leaves %g, want 0", a, r, res)
			}
		}
	}
}

// TestTortoiseLog holds the logarithmic form against the plain one where both
// have digits, and the derivative dr*/dr = (r²+a²)/Δ against both.
func TestTortoiseLog(t *testing.T) {
	for _, a := range []float64{0, 0.7, 0.998} {
		rp := HorizonRadius(a)
		for _, gap := range []float64{1e-3, 0.5, 30} {
			got, want := TortoiseLog(a, math.Log(gap)), Tortoise(a, rp+gap)
			// r - r+ is known to ε r+/gap, times r+/√(1-a²).
			if tol := 1e-15 * 100 / gap * 20; math.Abs(got-want) > tol {
				t.Errorf("a=%g gap=%g: %g and %g differ", a, gap, got, want)
			}
			const h = 1e-5
			slope := (TortoiseLog(a, math.Log(gap)+h) - TortoiseLog(a, math.Log(gap)-h)) / (2 * h * gap)
			r := rp + gap
			if want := (r*r + a*a) / (r*r - 2*r + a*a); math.Abs(slope/want-1) > 1e-7 {
				t.Errorf("a=%g gap=%g: dr*/dr = %g, want %g", a, gap, slope, want)
			}
		}
	}
}
