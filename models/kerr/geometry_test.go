package kerr

import (
	"math"
	"testing"

	"knell/internal/constants"
)

// TestGeometryTable compares with closed forms evaluated at 120 digits; see
// testdata/geometry.csv.
func TestGeometryTable(t *testing.T) {
	lnPlanck := math.Log(constants.PlanckLength / (70 * constants.SolarMassMetres))
	for _, row := range readTable(t, "geometry.csv") {
		a := row["a"]
		for _, q := range []struct {
			name      string
			got, tol  float64
			reference float64
		}{
			{"r_plus", HorizonRadius(a), 4e-16, row["r_plus"]},
			{"Omega_H", HorizonFrequency(a), 4e-16, row["Omega_H"]},
			{"T_H", HawkingTemperature(a), 4e-16, row["T_H"]},
			{"kappa", SurfaceGravity(a), 4e-16, row["kappa"]},
			// arccos(-a) near a = 1 loses ε/√(1-a²): 7 ε at 0.99.
			{"r_lightring", LightRing(a), 2e-15, row["r_lightring_prograde"]},
			// r_lr - r+ = 0.027 at a = 0.99 costs a factor 40 in the logarithm.
			{"rstar_lightring", Tortoise(a, LightRing(a)), 2e-13, row["rstar_lightring"]},
			{"rstar_surface", SurfaceTortoise(a, lnPlanck), 2e-15, row["rstar_surface_axis"]},
			{"delay", EchoDelay(a, lnPlanck), 1e-14, row["delay_axis_M"]},
		} {
			if math.Abs(q.got-q.reference) > q.tol*math.Abs(q.reference) {
				t.Errorf("a=%g: %s = %.17g, want %.17g (off by %.1e)", a, q.name, q.got, q.reference, q.got/q.reference-1)
			}
		}
	}
}

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
