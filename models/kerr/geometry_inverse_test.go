package kerr

import (
	"math"
	"testing"

	"knell/internal/random"
)

// TestInverseTortoiseTable: the radii of testdata/distance.csv come back from
// their tortoise coordinates, which were computed at 70 digits.
func TestInverseTortoiseTable(t *testing.T) {
	for _, row := range readTable(t, "distance.csv") {
		a, want, rStar := row["a"], row["ln_gap"], row["rstar"]
		if got := InverseTortoise(a, rStar); math.Abs(got-want) > inverseTolerance(a, want) {
			t.Errorf("a=%g r*=%.16g: ln gap = %.16g, want %.16g (off by %.1e)", a, rStar, got, want, got-want)
		}
	}
}

// inverseTolerance is eight roundings of TortoiseLog's terms, as they reach
// lnGap through dlnGap/dr* = (g + D)/(r² + a²), and four of lnGap.
func inverseTolerance(a, y float64) float64 {
	const epsilon = 0x1p-53
	g, d := math.Exp(y), 2*rootOfDeficit(a)
	r := HorizonRadius(a) + g
	return 4*epsilon*max(1, math.Abs(y)) + 8*epsilon*tortoiseTerms(a, y)*(g+d)/(r*r+a*a)
}

// TestInverseTortoise takes random and extreme tortoise coordinates there and
// back, and counts on monotony.
func TestInverseTortoise(t *testing.T) {
	rng := random.New(1, "inverse tortoise")
	spins := []float64{0, 1e-9, 0.3, 0.7, 0.95, 0.998, 0.999999, 1 - 1e-10, 1 - 0x1p-53}
	for range 200 {
		spins = append(spins, rng.Float64())
	}
	for _, a := range spins {
		coordinates := []float64{-1e6, -1e4, -300, -1, 0, 1e-300, 1, 3.9999, 4.0001, 30, 1e4, 1e6}
		for range 100 {
			coordinates = append(coordinates, math.Sinh(32*(rng.Float64()-0.5)))
		}
		for _, rStar := range coordinates {
			y := InverseTortoise(a, rStar)
			back := TortoiseLog(a, y)
			g, d := math.Exp(y), 2*rootOfDeficit(a)
			r := HorizonRadius(a) + g
			slope := (r*r + a*a) / (g + d)
			if tol := slope * inverseTolerance(a, y); !(math.Abs(back-rStar) <= tol) {
				t.Errorf("a=%.17g r*=%.17g: ln gap = %.17g, back at %.17g (off by %.1e, want %.1e)", a, rStar, y, back, back-rStar, tol)
			}
		}
	}
	for _, a := range spins[:8] {
		before := math.Inf(-1)
		for rStar := -50.0; rStar < 50; rStar += 0.37 {
			y := InverseTortoise(a, rStar)
			if !(y > before) {
				t.Errorf("a=%g: lnGap falls from %g to %g at r*=%g", a, before, y, rStar)
			}
			before = y
		}
	}
}

func BenchmarkInverseTortoise(b *testing.B) {
	for _, q := range []struct {
		name  string
		rStar float64
	}{{"horizon", -400}, {"middle", -2}, {"far", 50}} {
		b.Run(q.name, func(b *testing.B) {
			b.ReportAllocs()
			for b.Loop() {
				sink = InverseTortoise(0.7, q.rStar)
			}
		})
	}
}
