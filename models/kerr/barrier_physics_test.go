package kerr

import (
	"fmt"
	"math"
	"math/cmplx"
	"testing"

	"knell/internal/checktable"
	"knell/internal/random"
)

// TestPhysicsBarrierTables compares the tables with amplitudes computed at 60
// digits, at both signs of the frequency; see testdata/response.csv, and
// testdata/faint.csv for |R| down to 1e-11.
func TestPhysicsBarrierTables(t *testing.T) {
	table := checktable.New(t, "tables of the barrier against amplitudes at 60 digits, relative")
	for _, file := range []struct {
		name            string
		odd, even, flux string // columns without re_ and im_
		least           int    // rows that must be found
	}{
		{"response.csv", "R_BH_odd", "R_BH_even", "T_BH", 130},
		{"faint.csv", "R_odd", "", "T", 150},
	} {
		type worst struct {
			odd, even, transmission, faintest float64
		}
		var found [tableMaxL + 1]worst
		rows := 0
		for _, row := range readTable(t, file.name) {
			l, m, spin, omega := int(row["l"]), int(row["m"]), row["a"], row["omega"]
			if l > tableMaxL || omega > 2 {
				continue
			}
			rows++
			w := &found[l]
			for _, sign := range []float64{1, -1} {
				// Negative frequencies: the row with conjugate and -m.
				check := func(parity Parity, transmitted bool, column string, largest *float64) {
					b := newBarrier(t, l, int(sign)*m, parity)
					if err := b.SetSpin(spin); err != nil {
						t.Fatal(err)
					}
					ask := b.Reflection
					if transmitted {
						ask = b.Transmission
					}
					want := complex(row["re_"+column], sign*row["im_"+column])
					off := cmplx.Abs(one(t, ask, sign*omega)/want - 1)
					*largest = max(*largest, off)
					if !(off <= tableTolerance) {
						t.Errorf("%s (%d,%d) a=%g ω=%g: %s off by %.1e of %.1e", file.name, l, int(sign)*m, spin, sign*omega, column, off, cmplx.Abs(want))
					}
				}
				check(Odd, false, file.odd, &w.odd)
				if file.even != "" {
					check(Even, false, file.even, &w.even)
				}
				check(Odd, true, file.flux, &w.transmission)
			}
			if size := math.Hypot(row["re_"+file.odd], row["im_"+file.odd]); w.faintest == 0 || size < w.faintest {
				w.faintest = size
			}
		}
		if rows < file.least {
			t.Errorf("%s: %d rows, want %d at least", file.name, rows, file.least)
		}
		for l, w := range found {
			if w.faintest == 0 {
				continue
			}
			table.Worst(fmt.Sprintf("R odd, l = %d, |R| from %.0e", l, w.faintest), w.odd, tableTolerance, "testdata/"+file.name)
			if file.even != "" {
				table.Worst(fmt.Sprintf("R even, l = %d", l), w.even, tableTolerance, "testdata/"+file.name)
			}
			table.Worst(fmt.Sprintf("T, l = %d", l), w.transmission, tableTolerance, "testdata/"+file.name)
		}
	}
}

// TestPhysicsTabulatedFlux: |R|² + (ω/k)|T|² = 1 of what a sampler gets. R and T
// come from tables of their own, each right to tableTolerance.
func TestPhysicsTabulatedFlux(t *testing.T) {
	rng := random.New(11, "tabulated flux")
	table := checktable.New(t, "flux of the tabulated response, |R|² + (ω/k)|T|² - 1 over the larger term")
	for l := 2; l <= tableMaxL; l++ {
		worst := 0.0
		for m := -l; m <= l; m++ {
			b := newBarrier(t, l, m, Odd)
			for range 12 {
				spin := math.Tanh(rng.Float64() * math.Atanh(MaxSpin))
				if err := b.SetSpin(spin); err != nil {
					t.Fatal(err)
				}
				for range 40 {
					omega := math.Copysign(0.001+1.998*rng.Float64(), rng.Float64()-0.5)
					r, tr := cmplx.Abs(one(t, b.Reflection, omega)), cmplx.Abs(one(t, b.Transmission, omega))
					out := omega / (omega - float64(m)*HorizonFrequency(spin)) * tr * tr
					worst = max(worst, math.Abs(r*r+out-1)/max(r*r, 1))
				}
			}
		}
		table.Worst(fmt.Sprintf("l = %d", l), worst, 4*tableTolerance, "conservation of energy, ApJ 193, 443 (1974)")
	}
}
