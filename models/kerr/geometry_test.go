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

// TestGeometryOutside: no spin outside [0, 1), and no place that is not a number,
// gives one.
func TestGeometryOutside(t *testing.T) {
	for _, spin := range []float64{-0.1, 1, 1.5, math.Inf(1), math.NaN()} {
		for i, got := range []float64{
			HorizonRadius(spin), InnerHorizonRadius(spin), HorizonFrequency(spin), SurfaceGravity(spin), HawkingTemperature(spin),
			LightRing(spin), RetrogradeLightRing(spin), Tortoise(spin, 3), TortoiseLog(spin, -100), InverseTortoise(spin, -100), InverseTortoise(spin, 30),
			SurfaceGap(spin, -100, Axis), SurfaceGap(spin, 0.1, Axis), SurfaceGap(spin, 0.1, Equator),
			ProperDistance(spin, -100, Axis), ProperDistance(spin, 0.1, Axis), ProperDistance(spin, 0.1, Equator),
			SurfaceTortoise(spin, -100), EchoDelay(spin, -100), EchoDelayLog(spin, -100), EchoDelayExcess(spin, -100), ExcessGap(spin, -100),
		} {
			if !math.IsNaN(got) {
				t.Errorf("the %d-th at spin %g: %g, want NaN", i, spin, got)
			}
		}
	}
	for _, path := range []Path{Axis, Equator} {
		if got := ProperDistance(0.5, math.NaN(), path); !math.IsNaN(got) {
			t.Errorf("path %d: distance %g of no place, want NaN", path, got)
		}
		if got := ProperDistance(0.5, 1e4, path); !math.IsInf(got, 1) {
			t.Errorf("path %d: distance %g at exp(1e4), want one that overflows", path, got)
		}
	}
}
