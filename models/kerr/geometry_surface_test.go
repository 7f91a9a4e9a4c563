package kerr

import (
	"math"
	"testing"

	"knell/internal/random"
)

// The wanted values of TestDistanceTable were computed independently at 70
// digits; see testdata/distance.csv. Relative errors of a distance are absolute
// ones of its logarithm, which itself is known to ε times its size.
func TestDistanceTable(t *testing.T) {
	for _, row := range readTable(t, "distance.csv") {
		a, y := row["a"], row["ln_gap"]
		for _, q := range []struct {
			path Path
			want float64
		}{{Axis, row["ln_distance_axis"]}, {Equator, row["ln_distance_equator"]}} {
			// Both go through p, from which the gap follows by an exponential.
			p := 2 * math.Asinh(math.Exp(y/2)/math.Sqrt(2*rootOfDeficit(a)))
			tol := 1e-15 * max(2, math.Abs(y), p)
			if got := ProperDistance(a, y, q.path); math.Abs(got-q.want) > tol {
				t.Errorf("a=%g ln gap=%g path %d: ln d = %.17g, want %.17g (off by %.1e)", a, y, q.path, got, q.want, got-q.want)
			}
			// dln(gap)/dln(d) is at most 2.
			if got := SurfaceGap(a, q.want, q.path); math.Abs(got-y) > 2*tol {
				t.Errorf("a=%g ln d=%g path %d: ln gap = %.17g, want %.17g (off by %.1e)", a, q.want, q.path, got, y, got-y)
			}
		}
		if got := TortoiseLog(a, y); math.Abs(got-row["rstar"]) > 8e-16*tortoiseTerms(a, y) {
			t.Errorf("a=%g ln gap=%g: r* = %.17g, want %.17g (off by %.1e)", a, y, got, row["rstar"], got/row["rstar"]-1)
		}
	}
}

// tortoiseTerms is the size of the largest terms of TortoiseLog.
func tortoiseTerms(a, y float64) float64 {
	d := 2 * rootOfDeficit(a)
	return HorizonRadius(a) + math.Exp(y) + 2*math.Abs(math.Log((math.Exp(y)+d)/2)) +
		2*HorizonRadius(a)/d*math.Log1p(d*math.Exp(-y))
}

// TestDistanceLimits: no spin along the axis has the closed form of the equator,
// √(g(g+2)) + 2 asinh √(g/2); the leading form joins the integral; far away the
// distance grows as r.
func TestDistanceLimits(t *testing.T) {
	for _, g := range []float64{1e-30, 1e-14, 1e-3, 1, 40} {
		want := math.Sqrt(g*(g+2)) + 2*math.Asinh(math.Sqrt(g/2))
		for _, path := range []Path{Axis, Equator} {
			if got := math.Exp(ProperDistance(0, math.Log(g), path)); math.Abs(got/want-1) > 3e-14 {
				t.Errorf("gap %g path %d: distance %.16g, want %.16g", g, path, got, want)
			}
		}
	}
	for _, a := range []float64{0, 0.6, 0.998} {
		for _, path := range []Path{Axis, Equator} {
			scale := math.Log(2*HorizonRadius(a)) / 2
			if path == Equator {
				scale = math.Log(HorizonRadius(a))
			}
			edge := lnLeadingReach + scale
			below, above := SurfaceGap(a, edge-1e-9, path), SurfaceGap(a, edge+1e-9, path)
			if math.Abs(above-below-4e-9) > 1e-13 {
				t.Errorf("a=%g path %d: the gap jumps by %.3g at the leading form's end", a, path, above-below-4e-9)
			}
			if got := SurfaceGap(a, math.Log(1e9), path); math.Abs(got-math.Log(1e9)) > 1e-7 {
				t.Errorf("a=%g path %d: ln gap %.12g at distance 1e9, want about ln 1e9", a, path, got)
			}
		}
	}
}

// TestSurfacesAgree: one surface, given by distance, by logarithm and as a
// fraction of the horizon's radius, has one delay; and the delay is zero for a
// surface on the light ring.
func TestSurfacesAgree(t *testing.T) {
	rng := random.New(1, "surfaces")
	for range 2000 {
		a := MaxSpin * math.Sqrt(rng.Float64())
		excess := -200 + 205*rng.Float64()
		gap := ExcessGap(a, excess)
		want := EchoDelayExcess(a, excess)
		if math.IsNaN(want) || math.IsInf(want, 0) {
			t.Fatalf("a=%g ln(r0/r+ - 1)=%g: delay %g", a, excess, want)
		}
		tol := 1e-13 * (1 + tortoiseTerms(a, gap) + tortoiseTerms(a, math.Log(lightRingGap(a))))
		if got := EchoDelay(a, ProperDistance(a, gap, Axis)); math.Abs(got-want) > tol {
			t.Errorf("a=%g ln(r0/r+ - 1)=%g: delay %.15g by distance, want %.15g", a, excess, got, want)
		}
		if got := SurfaceGap(a, ProperDistance(a, gap, Equator), Equator); math.Abs(got-gap) > 1e-14*(1+math.Abs(gap)) {
			t.Errorf("a=%g: gap %g comes back as %g along the equator", a, gap, got)
		}
	}
	for _, a := range []float64{0, 0.7, 0.998} {
		if got := EchoDelayExcess(a, math.Log(LightRing(a)/HorizonRadius(a)-1)); math.Abs(got) > 1e-11 {
			t.Errorf("a=%g: delay %g for a surface on the light ring, want 0", a, got)
		}
	}
}

// TestGeometryAllocates: these stand in a sampler's loop.
func TestGeometryAllocates(t *testing.T) {
	if n := testing.AllocsPerRun(100, func() {
		EchoDelay(0.7, -100)
		EchoDelay(0.7, 0.1)
		SurfaceGap(0.7, 0.1, Equator)
		InverseTortoise(0.7, -100)
	}); n != 0 {
		t.Errorf("geometry allocates %g times, want 0", n)
	}
}

var sink float64

func BenchmarkEchoDelay(b *testing.B) {
	for _, q := range []struct {
		name string
		ln   float64
	}{{"planck", -90}, {"far", 0}} {
		b.Run(q.name, func(b *testing.B) {
			b.ReportAllocs()
			for b.Loop() {
				sink = EchoDelay(0.7, q.ln)
			}
		})
	}
}

func BenchmarkSurfaceTortoise(b *testing.B) {
	b.ReportAllocs()
	for b.Loop() {
		sink = SurfaceTortoise(0.7, -90)
	}
}

func BenchmarkHorizonFrequency(b *testing.B) {
	for b.Loop() {
		sink = HorizonFrequency(0.7)
	}
}

func BenchmarkHawkingTemperature(b *testing.B) {
	for b.Loop() {
		sink = HawkingTemperature(0.7)
	}
}

func BenchmarkLightRing(b *testing.B) {
	for b.Loop() {
		sink = LightRing(0.7)
	}
}

// TestUnknownPath: another path is a broken contract, not a value.
func TestUnknownPath(t *testing.T) {
	for name, call := range map[string]func(){
		"SurfaceGap":     func() { SurfaceGap(0.5, -90, 2) },
		"ProperDistance": func() { ProperDistance(0.5, -90, -1) },
	} {
		t.Run(name, func(t *testing.T) {
			defer func() {
				if recover() == nil {
					t.Error("no panic")
				}
			}()
			call()
		})
	}
}
