package kerr

import (
	"math"
	"math/cmplx"
	"testing"

	"knell/internal/random"
)

// TestGainTable compares the table of the superradiant band with the direct route,
// at both ends and between. The gain falls to 1e-30 at low spins and frequencies,
// and has to be right relative to itself.
func TestGainTable(t *testing.T) {
	rng := random.New(11, "gain table")
	for l := minMultipole; l <= maxMultipole; l++ {
		for m := 1; m <= l; m++ {
			table, err := gainTables[l][m]()
			if err != nil {
				t.Fatal(err)
			}
			var worst, worstPhase float64
			for i := range 200 {
				spin := math.Tanh(rng.Float64() * math.Atanh(MaxSpin))
				if i == 0 {
					spin = MaxSpin
				}
				parity := Parity(i % 2)
				b := newBand(l, m, spin)
				b.setGain(table)
				b.setPhase(table, parity)
				omega := b.turn * rng.Float64()
				if i%10 == 9 {
					omega = b.turn - 1e-6*b.kappa*b.turn*rng.Float64()
				}
				want, err := BarrierResponse(l, m, spin, omega, parity)
				if err != nil {
					t.Fatal(err)
				}
				p := b.turn - omega
				// Rounding of p itself.
				worst = max(worst, math.Abs(b.gain(p)/-want.Greybody-1)-4e-16/p)
				worstPhase = max(worstPhase, cmplx.Abs(cmplx.Exp(b.lnR(complex(omega, 0)))-want.Reflection))
			}
			limit := 1e-6
			if l == 2 {
				limit = 2e-7
			}
			if !(worst < limit && worstPhase < 1e-6) {
				t.Errorf("(%d,%d): |R|²-1 off by %.1e of itself, R by %.1e", l, m, worst, worstPhase)
			}
			t.Logf("(%d,%d): |R|²-1 off by at most %.1e of itself, R by %.1e", l, m, worst, worstPhase)
		}
	}
}

// TestBandCoordinates: p of t is the inverse of t of p, over the whole band.
func TestBandCoordinates(t *testing.T) {
	for _, spin := range []float64{1e-8, 0.1, 0.9, MaxSpin} {
		b := newBand(4, 4, spin)
		for _, x := range []float64{1e-9, 0.01, 0.3, 0.7, 1 - 1e-9} {
			p := b.turn * x
			if got := b.wave(b.place(p)); math.Abs(got/p-1) > 1e-13 {
				t.Errorf("spin %g: p = %g comes back as %g", spin, p, got)
			}
		}
		if b.wave(0) != 0 || math.Abs(b.wave(1)/b.turn-1) > 1e-13 {
			t.Errorf("spin %g: ends %g and %g, want 0 and %g", spin, b.wave(0), b.wave(1), b.turn)
		}
	}
}

func BenchmarkNewGainTable(b *testing.B) {
	for b.Loop() {
		if _, err := newGainTable(2, 2); err != nil {
			b.Fatal(err)
		}
	}
}
