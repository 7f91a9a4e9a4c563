package kerr

import (
	"math"
	"math/big"
	"math/rand/v2"
	"testing"
)

// TestHorizonWave compares with 300-bit arithmetic, mostly a hair beside the edge
// of the superradiant band.
func TestHorizonWave(t *testing.T) {
	rng := rand.New(rand.NewPCG(5, 6))
	exact := func(x float64) *big.Float { return new(big.Float).SetPrec(300).SetFloat64(x) }
	for i := range 3000 {
		m := rng.IntN(17) - 8
		spin := min(MaxSpin, 1-math.Pow(10, -3*rng.Float64()))
		omega := 2 * rng.Float64()
		if m > 0 && i%4 != 0 {
			omega = float64(m) * HorizonFrequency(spin) * (1 + math.Pow(10, -15*rng.Float64()))
		}
		root := exact(spin)
		root.Sqrt(root.Sub(exact(1), root.Mul(root, root)))
		want := root.Mul(root.Add(root, exact(1)), exact(2*omega))
		turn := exact(spin)
		want.Sub(want, turn.Mul(turn, exact(float64(m))))
		w, _ := want.Float64()
		got := horizonWave(spin, omega, m)
		// A few roundings of the low parts, 1e-17 at most of the terms, and of the sum.
		if tol := 1e-15*math.Abs(w) + 1e-30; !(math.Abs(got-w) <= tol) {
			t.Fatalf("a=%g ω=%g m=%d: 2r+k = %.17g, want %.17g", spin, omega, m, got, w)
		}
	}
}
