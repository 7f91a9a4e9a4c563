package kerr

import (
	_ "embed"
	"fmt"
	"math"
	"math/cmplx"
	"sort"
	"sync"
)

//go:generate go run ./internal/tabulate

//go:embed barrier-odd.bin
var oddFile []byte

//go:embed barrier-even.bin
var evenFile []byte

// The two tables are decoded when first asked for, once.
var (
	oddTable  = sync.OnceValues(func() (*table, error) { return decodeTable(oddFile, Odd) })
	evenTable = sync.OnceValues(func() (*table, error) { return decodeTable(evenFile, Even) })
)

// rotorRadius is the r* whose phase 2ωr* stays out of the local polynomials:
// what is left turns slowly over the whole range at every spin.
const rotorRadius = 5.0

// Barrier gives the reflection R of the barrier for l = m = 2 at one spin and
// any frequencies, from a table. It holds the scratch of one worker: use one
// Barrier per goroutine. Until the first SetSpin, R is 0 everywhere.
type Barrier struct {
	table     *table
	low, high float64
	spin      float64
	blend     [4][tablePoints]float64 // real part, imaginary part, phase, ω
	value     [nodes]complex128
	node      [nodes]float64    // ω, growing
	slope     [nodes]complex128 // dR/dω
	cell      [nodes][8]float64 // from node i on: coefficients in ω - node[i], real and imaginary by turns
}

// nodes is how many frequencies the cubics run through: the table's points and
// one between any two.
const nodes = 2*tablePoints - 1

// NewBarrier returns the Barrier of (l, m) and a parity. The first call of a
// parity decodes its table, which takes some milliseconds. An (l, m) without a
// table is an error.
func NewBarrier(l, m int, parity Parity) (*Barrier, error) {
	if err := parity.check(); err != nil {
		return nil, err
	}
	if l != 2 || m != 2 {
		return nil, fmt.Errorf("kerr: barrier (%d,%d), want (2,2)", l, m)
	}
	load := oddTable
	if parity == Even {
		load = evenTable
	}
	t, err := load()
	if err != nil {
		return nil, err
	}
	return &Barrier{table: t, low: math.Inf(1), high: math.Inf(-1)}, nil
}

// SetSpin prepares R at a spin from 0 to MaxSpin; outside it is an error that
// names the range and leaves the Barrier as it was. It blends eight rows of the
// table and puts cubics through the points; it allocates nothing.
func (b *Barrier) SetSpin(spin float64) error {
	if err := checkSpin(spin); err != nil {
		return err
	}
	u := math.Atanh(spin)
	x := u / tableStep
	first, at := locate(x+tableMargin, tableRows, tableOrder)
	var weights [tableOrder]float64
	stencil(at, weights[:])
	b.mix(first, &weights)
	b.place()
	b.spin = spin

	// The reach may bend between rows, so it is blended from two only.
	i := min(int(x), tableCells-1)
	f := x - float64(i)
	b.low = (1-f)*b.table.low[i] + f*b.table.low[i+1]
	b.high = (1-f)*b.table.high[i] + f*b.table.high[i+1]
	return nil
}

// mix sets blend to the weighted sum of eight rows.
func (b *Barrier) mix(first int, weights *[tableOrder]float64) {
	t := b.table
	blendRows(&b.blend[0], t.re[first:], weights)
	blendRows(&b.blend[1], t.im[first:], weights)
	blendRows(&b.blend[2], t.phase[first:], weights)
	blendRows(&b.blend[3], t.node[first:], weights)
}

func blendRows[F float32 | float64](out *[tablePoints]float64, rows [][tablePoints]F, w *[tableOrder]float64) {
	r0, r1, r2, r3, r4, r5, r6, r7 := &rows[0], &rows[1], &rows[2], &rows[3], &rows[4], &rows[5], &rows[6], &rows[7]
	w0, w1, w2, w3, w4, w5, w6, w7 := w[0], w[1], w[2], w[3], w[4], w[5], w[6], w[7]
	for j := range out {
		out[j] = ((w0*float64(r0[j]) + w1*float64(r1[j])) + (w2*float64(r2[j]) + w3*float64(r3[j]))) +
			((w4*float64(r4[j]) + w5*float64(r5[j])) + (w6*float64(r6[j]) + w7*float64(r7[j])))
	}
}

// place restores the phase, puts a node between any two points by eight-point
// interpolation, and sets cell: cubics with the nodes' values and with slopes
// from fourth-order differences.
func (b *Barrier) place() {
	for j := range tablePoints {
		sin, cos := math.Sincos(b.blend[2][j])
		re, im := b.blend[0][j], b.blend[1][j]
		b.value[2*j] = complex(re*cos-im*sin, re*sin+im*cos)
		b.node[2*j] = b.blend[3][j]
	}
	// The weights at the middle of eight points, and of two where eight do not
	// fit: there R is below reachLevel.
	const c0, c1, c2, c3 = 1225. / 2048, -245. / 2048, 49. / 2048, -5. / 2048
	const last = nodes - 1
	for i := 1; i < last; i += 2 {
		v, n := &b.value, &b.node
		if i < 7 || i > last-7 {
			v[i] = (v[i-1] + v[i+1]) / 2
			n[i] = (n[i-1] + n[i+1]) / 2
			continue
		}
		re := c0*(real(v[i-1])+real(v[i+1])) + c1*(real(v[i-3])+real(v[i+3])) + c2*(real(v[i-5])+real(v[i+5])) + c3*(real(v[i-7])+real(v[i+7]))
		im := c0*(imag(v[i-1])+imag(v[i+1])) + c1*(imag(v[i-3])+imag(v[i+3])) + c2*(imag(v[i-5])+imag(v[i+5])) + c3*(imag(v[i-7])+imag(v[i+7]))
		v[i] = complex(re, im)
		n[i] = c0*(n[i-1]+n[i+1]) + c1*(n[i-3]+n[i+3]) + c2*(n[i-5]+n[i+5]) + c3*(n[i-7]+n[i+7])
	}
	for i := 2; i <= last-2; i++ {
		v, n := &b.value, &b.node
		inv := 1 / (8*(n[i+1]-n[i-1]) - (n[i+2] - n[i-2]))
		b.slope[i] = complex((8*(real(v[i+1])-real(v[i-1]))-(real(v[i+2])-real(v[i-2])))*inv,
			(8*(imag(v[i+1])-imag(v[i-1]))-(imag(v[i+2])-imag(v[i-2])))*inv)
	}
	b.slope[0], b.slope[1], b.slope[last-1], b.slope[last] = 0, 0, 0, 0
	for i := range last {
		inv := 1 / (b.node[i+1] - b.node[i])
		v, s, s1 := b.value[i], b.slope[i], b.slope[i+1]
		cr, ci := (real(b.value[i+1])-real(v))*inv, (imag(b.value[i+1])-imag(v))*inv
		b.cell[i] = [8]float64{
			real(v), imag(v), real(s), imag(s),
			(3*cr - 2*real(s) - real(s1)) * inv, (3*ci - 2*imag(s) - imag(s1)) * inv,
			(real(s) + real(s1) - 2*cr) * inv * inv, (imag(s) + imag(s1) - 2*ci) * inv * inv,
		}
	}
}

// Reach returns the Mω outside which |R| < 1e-8 at the present spin and
// Reflection sets R to 0.
func (b *Barrier) Reach() (low, high float64) { return b.low, b.high }

// Range returns the Mω that the table covers.
func (b *Barrier) Range() (low, high float64) { return -tableLimit, tableLimit }

// check returns an error that names the range unless omega0 and last lie in it.
func (b *Barrier) check(omega0, last float64) error {
	for _, omega := range [...]float64{omega0, last} {
		if !(math.Abs(omega) <= tableLimit*(1+1e-12)) {
			return fmt.Errorf("kerr: Mω = %g, want %g to %g", omega, -tableLimit, tableLimit)
		}
	}
	return nil
}

// Transmission is Reflection for the transmission T.
func (b *Barrier) Transmission(omega0, domega float64, re, im []float64) error {
	if len(re) != len(im) {
		panic(fmt.Sprintf("kerr: Transmission: len(re) = %d, len(im) = %d, want equal", len(re), len(im)))
	}
	for j := range re {
		omega := omega0 + float64(j)*domega
		if err := b.check(omega, omega); err != nil {
			return err
		}
		r, err := BarrierResponse(2, 2, b.spin, omega, Odd)
		if err != nil {
			return err
		}
		re[j], im[j] = real(r.Transmission), imag(r.Transmission)
	}
	return nil
}

// ReflectionAt returns R and dR/dω at a complex frequency near the real axis.
func (b *Barrier) ReflectionAt(omega complex128) (r, slope complex128, err error) {
	if err := b.check(real(omega), real(omega)); err != nil {
		return 0, 0, err
	}
	if !(real(omega) >= b.low && real(omega) <= b.high) {
		return 0, 0, nil
	}
	i := min(max(sort.SearchFloat64s(b.node[:], real(omega))-1, 0), nodes-2)
	c := &b.cell[i]
	x := omega - complex(b.node[i], 0)
	c0, c1, c2, c3 := complex(c[0], c[1]), complex(c[2], c[3]), complex(c[4], c[5]), complex(c[6], c[7])
	turn := cmplx.Exp(complex(0, 2*rotorRadius) * omega)
	r = turn * (c0 + x*(c1+x*(c2+x*c3)))
	return r, turn*(c1+x*(2*c2+3*x*c3)) + complex(0, 2*rotorRadius)*r, nil
}

// Reflection sets re[j] + i im[j] to R at Mω = omega0 + j domega, for every j of
// re; domega may be negative or 0. R refers to BarrierResponse's definition; the
// table's error is below 2e-7. It allocates nothing. Slices of different
// length panic; a frequency outside Range is an error that names it.
func (b *Barrier) Reflection(omega0, domega float64, re, im []float64) error {
	if len(re) != len(im) {
		panic(fmt.Sprintf("kerr: Reflection: len(re) = %d, len(im) = %d, want equal", len(re), len(im)))
	}
	n := len(re)
	if n == 0 {
		return nil
	}
	if err := b.check(omega0, omega0+float64(n-1)*domega); err != nil {
		return err
	}
	// Walk towards growing ω: at is the index of the j-th point of the walk.
	start, step, at, stride := omega0, domega, 0, 1
	if domega < 0 {
		start, step, at, stride = omega0+float64(n-1)*domega, -domega, n-1, -1
	}
	j := 0
	for ; j < n && !(start+float64(j)*step >= b.low); j++ {
		re[at], im[at] = 0, 0
		at += stride
	}
	if j < n && start+float64(j)*step <= b.high {
		omega := start + float64(j)*step
		i := sort.SearchFloat64s(b.node[:], omega)
		i = max(i-1, 0)
		next := b.node[i+1]
		turnIm, turnRe := math.Sincos(2 * rotorRadius * omega)
		stepIm, stepRe := math.Sincos(2 * rotorRadius * step)
		for ; j < n; j++ {
			omega = start + float64(j)*step
			if omega > b.high {
				break
			}
			for omega >= next {
				i++
				next = b.node[i+1]
			}
			c := &b.cell[i]
			x := omega - b.node[i]
			pr := c[0] + x*(c[2]+x*(c[4]+x*c[6]))
			pi := c[1] + x*(c[3]+x*(c[5]+x*c[7]))
			re[at] = pr*turnRe - pi*turnIm
			im[at] = pr*turnIm + pi*turnRe
			at += stride
			turnRe, turnIm = turnRe*stepRe-turnIm*stepIm, turnRe*stepIm+turnIm*stepRe
		}
	}
	for ; j < n; j++ {
		re[at], im[at] = 0, 0
		at += stride
	}
	return nil
}
