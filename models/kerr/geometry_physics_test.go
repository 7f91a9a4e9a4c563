package kerr

import (
	"fmt"
	"math"
	"testing"

	"knell/internal/checktable"
	"knell/internal/constants"
)

// TestPhysicsGeometry compares with closed forms evaluated at 120 digits; see
// testdata/geometry.csv, whose spins are decimal: their rounding to float64 is
// amplified by up to 1/(1-a²) = 50 in what depends on √(1-a²).
func TestPhysicsGeometry(t *testing.T) {
	table := checktable.New(t, "horizon, light ring and echo delay against closed forms at 120 digits")
	lnPlanck := math.Log(constants.PlanckLength / (70 * constants.SolarMassMetres))
	const source = "testdata/geometry.csv"
	for _, row := range readTable(t, "geometry.csv") {
		a := row["a"]
		axis, equator := SurfaceGap(a, lnPlanck, Axis), SurfaceGap(a, lnPlanck, Equator)
		for _, q := range []struct {
			name     string
			got, tol float64
			column   string
		}{
			{"r+", HorizonRadius(a), 4e-16, "r_plus"},
			{"Ω_H", HorizonFrequency(a), 4e-16, "Omega_H"},
			{"T_H", HawkingTemperature(a), 2e-15, "T_H"},
			{"κ", SurfaceGravity(a), 2e-15, "kappa"},
			{"light ring", LightRing(a), 2e-15, "r_lightring_prograde"},
			{"r* of the light ring", TortoiseLog(a, math.Log(lightRingGap(a))), 2e-14, "rstar_lightring"},
			{"r0 - r+, axis", math.Exp(axis), 1e-13, "x_surface_axis"},
			{"r* of the surface, axis", SurfaceTortoise(a, lnPlanck), 2e-15, "rstar_surface_axis"},
			{"r* of the surface, equator", TortoiseLog(a, equator), 2e-15, "rstar_surface_eq"},
			{"echo delay, axis", EchoDelay(a, lnPlanck), 2e-15, "delay_axis_M"},
			{"echo delay, equator", EchoDelayLog(a, equator), 2e-15, "delay_eq_M"},
			{"echo delay, r0/r+ - 1", EchoDelayExcess(a, math.Log(row["x_surface_axis"]/row["r_plus"])), 2e-15, "delay_axis_M"},
		} {
			table.Relative(fmt.Sprintf("%s, spin %g", q.name, a), q.got, row[q.column], q.tol, source)
		}
	}
}

// TestPhysicsDistance: exact proper distances, the tortoise coordinate and its
// inverse, up to the last spin below 1.
func TestPhysicsDistance(t *testing.T) {
	table := checktable.New(t, "proper distance and tortoise coordinate against quadrature at 70 digits")
	axis, equator, tortoise, inverse := -1.0, -1.0, -1.0, -1.0
	for _, row := range readTable(t, "distance.csv") {
		a, y := row["a"], row["ln_gap"]
		if math.Abs(y) > 50 {
			continue // TestDistanceTable compares the logarithms
		}
		off := func(got, want float64) float64 { return math.Abs(got/want - 1) }
		axis = max(axis, off(math.Exp(ProperDistance(a, y, Axis)), math.Exp(row["ln_distance_axis"])))
		equator = max(equator, off(math.Exp(ProperDistance(a, y, Equator)), math.Exp(row["ln_distance_equator"])))
		tortoise = max(tortoise, math.Abs(TortoiseLog(a, y)-row["rstar"])/tortoiseTerms(a, y))
		inverse = max(inverse, math.Abs(InverseTortoise(a, row["rstar"])-y)/max(1, math.Abs(y)))
	}
	const source = "testdata/distance.csv"
	table.Worst("proper distance along the axis, relative", axis, 5e-14, source)
	table.Worst("proper distance along the equator, relative", equator, 5e-14, source)
	table.Worst("r*, relative to its largest term", tortoise, 2e-15, source)
	table.Worst("ln(r - r+) from r*, relative", inverse, 4e-15, source)
}

// TestPhysicsEchoDelays compares with delays in seconds, and with their leading
// form.
func TestPhysicsEchoDelays(t *testing.T) {
	table := checktable.New(t, "echo delay of a surface one Planck length outside the horizon, barrier at the prograde light ring")
	for _, q := range []struct{ mass, spin, seconds float64 }{
		{67.8, 0.68, 0.2910}, {60, 0.69, 0.2591}, {22.3, 0.74, 0.0994},
	} {
		ln := math.Log(constants.PlanckLength / (q.mass * constants.SolarMassMetres))
		delay := EchoDelay(q.spin, ln)
		equator := EchoDelayLog(q.spin, SurfaceGap(q.spin, ln, Equator))
		name := fmt.Sprintf("%g solar masses, spin %g", q.mass, q.spin)
		table.Absolute("delay in s, distance along the equator, "+name, equator*q.mass*constants.SolarMassSeconds, q.seconds, 5.1e-5, "computed independently, printed digits")
		// The logarithm of some 1e40 leads by a factor of about 90.
		table.Absolute("axis less equator, s, "+name, (delay-equator)*q.mass*constants.SolarMassSeconds, 0.0002, 0.00015, "computed independently, one digit")
		table.Relative("delay in M, "+name, delay, 4*(1+1/math.Sqrt(1-q.spin*q.spin))*-ln, 0.02, "arXiv:1612.00266, leading logarithm 8 M ln M at no spin")
	}
}
