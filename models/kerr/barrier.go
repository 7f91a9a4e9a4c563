package kerr

import (
	"fmt"
	"math"
)

// Barrier gives the barrier's reflection R and transmission T of one (l, m) at
// one spin and any frequencies, from tables, as BarrierResponse defines them. It
// holds the scratch of one worker: use one Barrier per goroutine. A new Barrier
// is at spin 0.
type Barrier struct {
	l, m         int
	spin         float64
	reflection   *section
	transmission *section // nil until asked for
}

// NewBarrier returns the Barrier of (l, m) and a parity, l from 2 to 4,
// |m| <= l. The first call for an (l, |m|) and a parity decodes its table, which
// takes some 10 ms; the table is shared.
func NewBarrier(l, m int, parity Parity) (*Barrier, error) {
	if err := parity.check(); err != nil {
		return nil, err
	}
	if l < minMultipole || l > tableMaxL {
		return nil, fmt.Errorf("kerr: barrier of l = %d, want %d to %d", l, minMultipole, tableMaxL)
	}
	if absInt(m) > l {
		return nil, fmt.Errorf("kerr: barrier of l = %d, m = %d, want m from %d to %d", l, m, -l, l)
	}
	kind := oddReflection
	if parity == Even {
		kind = evenReflection
	}
	t, err := loadTable(kind, l, absInt(m))
	if err != nil {
		return nil, err
	}
	return &Barrier{l: l, m: m, reflection: newSection(t, m < 0)}, nil
}

// SetSpin prepares the Barrier for a spin from 0 to MaxSpin; outside it is an
// error that names the range and leaves the Barrier as it was. It allocates
// nothing. Most of the work is left to the first call that asks for a frequency,
// and is done once for each of some 60 stretches of frequency.
func (b *Barrier) SetSpin(spin float64) error {
	if err := checkSpin(spin); err != nil {
		return err
	}
	b.spin = spin
	u := math.Atanh(spin)
	b.reflection.set(u)
	if b.transmission != nil {
		b.transmission.set(u)
	}
	return nil
}

// Range returns the Mω from low to high that the tables cover.
func (b *Barrier) Range() (low, high float64) {
	return b.mirrored(b.reflection.table.low, b.reflection.table.high)
}

// Reach returns the Mω outside which |R| < 1e-8 at the present spin. An end of
// Range comes back where |R| is not below that yet.
func (b *Barrier) Reach() (low, high float64) {
	s := b.reflection
	return b.mirrored(s.bounds[s.panel.First], s.bounds[s.panel.Last])
}

// mirrored turns a range of a table into that for the sign of m.
func (b *Barrier) mirrored(low, high float64) (float64, float64) {
	if b.m < 0 {
		return -high, -low
	}
	return low, high
}

// slack is how far, relative to its end, a frequency may lie outside a table: the
// rounding of an end computed as omega0 + n domega.
const slack = 1e-12

func (b *Barrier) check(omega float64) error {
	if low, high := b.Range(); !(omega >= low*(1+slack) && omega <= high*(1+slack)) {
		return fmt.Errorf("kerr: barrier at Mω = %g, want %g to %g", omega, low, high)
	}
	return nil
}

// checkAll is check for omega0 + j domega, j < n.
func (b *Barrier) checkAll(omega0, domega float64, n int) error {
	if err := b.check(omega0); err != nil {
		return err
	}
	return b.check(omega0 + float64(n-1)*domega)
}

// Reflection sets re[j] + i im[j] to R at Mω = omega0 + j domega, for every j of
// re; domega may be negative or 0. The table's error is below 1e-9 of |R|, however
// small that is; for l = m = 3 at spins from 0.95 on, where R all but vanishes
// near Mω = 1.6, below 1e-9 of the |R| around, some 1e-9. It allocates nothing and
// costs 3 ns a point. Slices of different length panic. A frequency outside Range
// is an error that names it and leaves re and im as they were.
func (b *Barrier) Reflection(omega0, domega float64, re, im []float64) error {
	if len(re) != len(im) {
		panic(fmt.Sprintf("kerr: Reflection: len(re) = %d, len(im) = %d, want equal", len(re), len(im)))
	}
	if len(re) == 0 {
		return nil
	}
	if err := b.checkAll(omega0, domega, len(re)); err != nil {
		return err
	}
	if b.m < 0 {
		omega0, domega = -omega0, -domega
	}
	b.reflection.walk(omega0, domega, re, im)
	return nil
}

// Transmission is Reflection for T. Its table leaves |Mω| < 0.001 out, where T
// goes to 0: that is an error too. The first call decodes the table.
func (b *Barrier) Transmission(omega0, domega float64, re, im []float64) error {
	if len(re) != len(im) {
		panic(fmt.Sprintf("kerr: Transmission: len(re) = %d, len(im) = %d, want equal", len(re), len(im)))
	}
	if len(re) == 0 {
		return nil
	}
	if err := b.checkAll(omega0, domega, len(re)); err != nil {
		return err
	}
	if b.transmission == nil {
		t, err := loadTable(transmission, b.l, absInt(b.m))
		if err != nil {
			return err
		}
		b.transmission = newSection(t, b.m < 0)
		b.transmission.set(math.Atanh(b.spin))
	}
	s := b.transmission
	// The frequencies around 0, if any.
	zero := math.Floor(-omega0 / domega)
	for _, j := range [...]float64{0, zero, zero + 1, float64(len(re) - 1)} {
		if j < 0 || j > float64(len(re)-1) || math.IsNaN(j) {
			continue
		}
		if omega := omega0 + j*domega; math.Abs(omega) < s.table.gap*(1-slack) {
			low, high := b.Range()
			return fmt.Errorf("kerr: transmission at Mω = %g, want %g to %g or %g to %g", omega, low, -s.table.gap, s.table.gap, high)
		}
	}
	if b.m < 0 {
		omega0, domega = -omega0, -domega
	}
	s.walk(omega0, domega, re, im)
	// The table holds T/k. The first k is exact, the others as exact as their ω.
	first := horizonWave(b.spin, omega0, absInt(b.m)) / (2 * HorizonRadius(b.spin))
	for j := range re {
		k := first + float64(j)*domega
		re[j] *= k
		im[j] *= k
	}
	return nil
}
