package kerr

import (
	"math"
	"math/cmplx"
	"testing"

	"knell/internal/random"
)

func newBarrier(t testing.TB, l, m int, parity Parity) *Barrier {
	t.Helper()
	b, err := NewBarrier(l, m, parity)
	if err != nil {
		t.Fatal(err)
	}
	return b
}

func tableFile(t testing.TB, kind tableKind, l, m int) []byte {
	t.Helper()
	file, err := barrierFiles.ReadFile(tableName(kind, l, m))
	if err != nil {
		t.Fatal(err)
	}
	return file
}

// one returns R or T at one frequency.
func one(t *testing.T, f func(omega0, domega float64, re, im []float64) error, omega float64) complex128 {
	t.Helper()
	var re, im [1]float64
	if err := f(omega, 0, re[:], im[:]); err != nil {
		t.Fatal(err)
	}
	return complex(re[0], im[0])
}

// tableTolerance is what is promised of the tables, relative.
const tableTolerance = 1e-9

// TestBarrierAgainstDirect compares every table with the integration it was made
// from: random spins and both ends, random frequencies, both ends of the range,
// the turn at k = 0, and next to 0.
func TestBarrierAgainstDirect(t *testing.T) {
	rng := random.New(7, "barrier test")
	var worstR, worstT float64
	for l := 2; l <= 4; l++ {
		for m := -l; m <= l; m++ {
			odd, even := newBarrier(t, l, m, Odd), newBarrier(t, l, m, Even)
			low, high := odd.Range()
			for i := range 6 {
				spin := math.Tanh(rng.Float64() * math.Atanh(MaxSpin))
				switch i {
				case 0:
					spin = 0
				case 1:
					spin = MaxSpin
				}
				if err := odd.SetSpin(spin); err != nil {
					t.Fatal(err)
				}
				if err := even.SetSpin(spin); err != nil {
					t.Fatal(err)
				}
				turn, scale := float64(m)*HorizonFrequency(spin), SurfaceGravity(spin)
				for _, omega := range []float64{low, high, -2, 2, 0, 0.001, -0.001, 0.0013, -0.01, 1e-5,
					low + (high-low)*rng.Float64(), rng.Float64() - 0.5,
					turn + 4*scale*(2*rng.Float64()-1), turn + 0.1*scale, turn + 1e-6} {
					for parity, barrier := range map[Parity]*Barrier{Odd: odd, Even: even} {
						want, err := BarrierResponse(l, m, spin, omega, parity)
						if err != nil {
							t.Fatal(err)
						}
						off := cmplx.Abs(one(t, barrier.Reflection, omega)/want.Reflection - 1)
						worstR = max(worstR, off)
						if !(off <= tableTolerance) {
							t.Errorf("(%d,%d) %v a=%.6f ω=%.6f: R off by %.1e of %.1e", l, m, parity, spin, omega, off, cmplx.Abs(want.Reflection))
						}
						if math.Abs(omega) < 0.001 {
							continue
						}
						off = cmplx.Abs(one(t, barrier.Transmission, omega)/want.Transmission - 1)
						worstT = max(worstT, off)
						if !(off <= tableTolerance) {
							t.Errorf("(%d,%d) %v a=%.6f ω=%.6f: T off by %.1e of %.1e", l, m, parity, spin, omega, off, cmplx.Abs(want.Transmission))
						}
					}
				}
			}
		}
	}
	t.Logf("largest relative difference: R %.1e, T %.1e", worstR, worstT)
}
