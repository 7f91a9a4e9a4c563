package kerr

import (
	"math"
	"math/big"
	"math/rand/v2"
	"testing"
)

// exactWave is 2r+ω - am in 300-bit arithmetic.
func exactWave(spin, omega float64, m int) float64 {
	exact := func(x float64) *big.Float { return new(big.Float).SetPrec(300).SetFloat64(x) }
	root := exact(spin)
	root.Sqrt(root.Sub(exact(1), root.Mul(root, root)))
	sum := root.Mul(root.Add(root, exact(1)), exact(2*omega))
	turn := exact(spin)
	sum.Sub(sum, turn.Mul(turn, exact(float64(m))))
	wave, _ := sum.Float64()
	return wave
}

// TestHorizonWave compares with 300-bit arithmetic, mostly a hair beside the edge
// of the superradiant band.
func TestHorizonWave(t *testing.T) {
	rng := rand.New(rand.NewPCG(5, 6))
	for i := range 3000 {
		m := rng.IntN(17) - 8
		spin := min(MaxSpin, 1-math.Pow(10, -3*rng.Float64()))
		omega := 2 * rng.Float64()
		if m > 0 && i%4 != 0 {
			omega = float64(m) * HorizonFrequency(spin) * (1 + math.Pow(10, -15*rng.Float64()))
		}
		w := exactWave(spin, omega, m)
		got := horizonWave(spin, omega, m)
		// A few roundings of the low parts, 1e-17 at most of the terms, and of the sum.
		if tol := 1e-15*math.Abs(w) + 1e-30; !(math.Abs(got-w) <= tol) {
			t.Fatalf("a=%g ω=%g m=%d: 2r+k = %.17g, want %.17g", spin, omega, m, got, w)
		}
	}
}

// TestGreybodyBesideTheEdge follows 1 - |R|² through its zero at the edge of the
// superradiant band: it is k times a smooth function.
func TestGreybodyBesideTheEdge(t *testing.T) {
	for _, spin := range []float64{0.1, 0.7, 0.95, MaxSpin} {
		for m := 1; m <= 2; m++ {
			ratio := func(part float64) float64 {
				omega := float64(m) * HorizonFrequency(spin) * (1 + part)
				r, err := BarrierResponse(2, m, spin, omega, Odd)
				if err != nil {
					t.Fatal(err)
				}
				return r.Greybody / exactWave(spin, omega, m)
			}
			want := ratio(1e-8)
			for _, part := range []float64{-1e-8, 1e-10, -1e-11, 1e-12} {
				// The function changes by some hundred times its argument.
				if off := ratio(part)/want - 1; math.Abs(off) > 5e-6 {
					t.Errorf("m=%d a=%g: (1-|R|²)/k at %g of ω beside the edge off by %.1e", m, spin, part, off)
				}
			}
		}
	}
}
