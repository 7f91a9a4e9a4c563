package kerr

import (
	"math"
	"math/big"
	"testing"

	"knell/internal/random"
)

// TestDouble compares with big.Float at 200 bits.
func TestDouble(t *testing.T) {
	wide := func(x double) *big.Float {
		r := new(big.Float).SetPrec(200).SetFloat64(x.hi)
		return r.Add(r, new(big.Float).SetFloat64(x.lo))
	}
	rng := random.New(1, "double")
	draw := func() double {
		return tidySum((rng.Float64()-0.5)*math.Exp(10*rng.Float64()-5), 1e-17*(rng.Float64()-0.5))
	}
	for range 1000 {
		x, y := draw(), draw()
		fresh := func() *big.Float { return new(big.Float).SetPrec(200) }
		positive := x.mul(x)
		for _, q := range []struct {
			name string
			got  double
			want *big.Float
		}{
			{"sum", x.add(y), fresh().Add(wide(x), wide(y))},
			{"product", x.mul(y), fresh().Mul(wide(x), wide(y))},
			{"times", x.times(y.hi), fresh().Mul(wide(x), new(big.Float).SetFloat64(y.hi))},
			{"inverse", y.inverse(), fresh().Quo(new(big.Float).SetInt64(1), wide(y))},
			{"root", positive.sqrt(), fresh().Sqrt(wide(positive))},
		} {
			diff, _ := fresh().Sub(wide(q.got), q.want).Float64()
			size, _ := q.want.Float64()
			if q.name == "sum" { // the low parts may cancel to the size of the terms
				size = math.Abs(x.hi) + math.Abs(y.hi)
			}
			// Eight units of 2⁻¹⁰⁴ = 5e-32 cover every operation's bound.
			if math.Abs(diff) > 4e-31*math.Abs(size) {
				t.Fatalf("%s of %v and %v is off by %.1e of %.3g", q.name, x, y, diff, size)
			}
		}
	}
}

// TestWideRecurrence: the fraction in 32 digits is the one in 16, to the
// rounding of the latter, at frequencies that are no modes.
func TestWideRecurrence(t *testing.T) {
	for _, spin := range []float64{0, 0.6, 0.95} {
		for _, m := range []int{-2, 0, 3} {
			const omega, separation = 0.5 - 0.31i, 4.1 + 0.3i
			plain := radialRecurrence(m, spin, omega, separation)
			wide := wideRadialRecurrence(m, spin, omega, separation)
			for _, invert := range []int{0, 3} {
				got, want := wide.fraction(invert, 600), plain.fraction(invert, 600)
				if d := got - want; math.Hypot(real(d), imag(d)) > 1e-11*math.Hypot(real(want), imag(want)) {
					t.Errorf("a=%g m=%d inverted at %d: %.15g, want %.15g", spin, m, invert, got, want)
				}
			}
		}
	}
}
