package kerr

import (
	"math"
	"sync"
)

// A surface of reflectivity Rs and the barrier enclose a cavity. Inside the
// superradiant band 0 < ω < mΩ_H the barrier returns more than it got, |R| > 1, and
// where |Rs R| > 1 each echo is louder than the one before it: the ergoregion
// instability. A cavity is stable if |Rs R| < 1 at every frequency. That is
// sufficient. It is not necessary, since a cavity has discrete modes and the
// loudest frequency may lie between two of them: FastestGrowth looks at the modes.

// SuperradiantGain returns the largest amplification |R|² - 1 of the (l, m) wave
// over all frequencies, and the Mω at which it is reached, by direct integration
// (BarrierResponse). It is 0, at ω = 0, for m = 0 and for spin 0. For m < 0 the band,
// and with it ω, is negative, and the gain that of -m.
//
// l runs from 2 to 4, |m| <= l, spin from 0 to MaxSpin. The gain is good to 1e-9 of
// itself, ω to 1e-8; below spin 1e-5, where it is below 1e-33, it follows the
// law of slow waves. Cost below 1 ms.
func SuperradiantGain(l, m int, spin float64) (gain, omega float64, err error) {
	if err := checkWave(l, m); err != nil {
		return 0, 0, err
	}
	if err := checkSpin(spin); err != nil {
		return 0, 0, err
	}
	if m == 0 || spin == 0 {
		return 0, 0, nil
	}
	if m < 0 {
		gain, omega, err = SuperradiantGain(l, -m, spin)
		return gain, -omega, err
	}
	b := newBand(l, m, spin)
	if spin < lowestGainSpin {
		gain, omega = b.lowestOrderPeak()
		return gain, omega, nil
	}
	// ln(|R|²-1) as a function of t of gain.go has one maximum. Close to either end
	// it falls without bound.
	lnGain := func(t float64) float64 {
		res, e := BarrierResponse(l, m, spin, b.turn-b.wave(t), Odd)
		if e != nil {
			err = e
		}
		return math.Log(-res.Greybody)
	}
	const coarse = 16
	best, top := 0, math.Inf(-1)
	for i := 1; i < coarse; i++ {
		if v := lnGain(float64(i) / coarse); v > top {
			best, top = i, v
		}
	}
	t, top := maximum(lnGain, float64(best-1)/coarse, float64(best)/coarse, float64(best+1)/coarse, top, 1e-5)
	// Two centred differences place the top better than values do, which are flat
	// there: h⁴ and rounding/h both stay below 1e-9.
	const h = 5e-4
	d1, d2 := lnGain(t-h), lnGain(t+h)
	e1, e2 := lnGain(t-2*h), lnGain(t+2*h)
	slope := (8*(d2-d1) - (e2 - e1)) / (12 * h)
	bend := (16*(d2+d1) - (e2 + e1) - 30*top) / (12 * h * h)
	t -= slope / bend
	if err != nil {
		return 0, 0, err
	}
	top = lnGain(t)
	return math.Exp(top), b.turn - b.wave(t), err
}

// lowestGainSpin is where the law of slow waves takes over.
const lowestGainSpin = 1e-5

// lowestOrderGain is the law of slow waves,
//
//	|R|² - 1 = 4Q [(l-2)!(l+2)!/((2l)!(2l+1)!!)]² Π_{j=1..l}(1 + 4Q²/j²) [ω(r+ - r-)]^(2l+1),
//
// Q = p/(2κ), p = mΩ_H - ω (Sov. Phys. JETP 37, 28 (1973)), times the first
// correction, 1 + 2πω, of a wave in a 1/r potential.
func (b *band) lowestOrderGain(p float64) float64 {
	factor := 1.0 // (l-2)!(l+2)!/((2l)!(2l+1)!!)
	for j := 1; j <= 2*b.l; j++ {
		x := float64(j)
		if j <= b.l-2 {
			factor *= x
		}
		if j <= b.l+2 {
			factor *= x
		}
		factor /= x
	}
	for j := 3; j <= 2*b.l+1; j += 2 {
		factor /= float64(j)
	}
	q := p / (2 * b.kappa)
	omega := b.turn - p
	gain := 4 * q * factor * factor * power(2*rootOfDeficit(b.spin)*omega, 2*b.l+1) * (1 + 2*math.Pi*omega)
	for j := 1; j <= b.l; j++ {
		x := 2 * q / float64(j)
		gain *= 1 + x*x
	}
	return gain
}

// lowestOrderPeak is where p ω^(2l+1) is largest: the product over j is 1 to the
// square of the spin.
func (b *band) lowestOrderPeak() (gain, omega float64) {
	p := b.turn / float64(2*b.l+2)
	return b.lowestOrderGain(p), b.turn - p
}

// MaxStableReflectivity returns the largest constant reflectivity of a surface, as
// amplitude, that leaves the (l, m) wave stable at a spin: 1/max |R|. A constant
// reflectivity below it is stable, whatever the surface's place and phase; above it
// there are frequencies at which echoes grow. It is 1 for m = 0 and at spin 0, and
// the same for m and -m.
//
// l runs from 2 to 4, |m| <= l, spin from 0 to MaxSpin; outside, the error names the
// range. The error is below 1e-8, and far from 1 that of 1 - value is below 1e-6 of
// itself. The first call for an (l, |m|) computes a table from BarrierResponse, 30 ms;
// later ones cost below 0.1 µs and allocate nothing. Safe for concurrent use.
func MaxStableReflectivity(l, m int, spin float64) (float64, error) {
	if err := checkWave(l, m); err != nil {
		return 0, err
	}
	if err := checkSpin(spin); err != nil {
		return 0, err
	}
	if m == 0 || spin == 0 {
		return 1, nil
	}
	peaks, err := peakTables[l][absInt(m)]()
	if err != nil {
		return 0, err
	}
	return 1 / math.Sqrt(1+power(spin, 2*l+2)*peaks.at(math.Atanh(spin))), nil
}

// peakTable holds the largest gain over a^(2l+2) at equal steps of u, with one point
// beyond either end for cubics.
type peakTable [peakCells + 3]float64

const peakCells = 1024

var peakTables = func() (tables [maxMultipole + 1][maxMultipole + 1]func() (*peakTable, error)) {
	for l := minMultipole; l <= maxMultipole; l++ {
		for m := 1; m <= l; m++ {
			tables[l][m] = sync.OnceValues(func() (*peakTable, error) { return newPeakTable(l, m) })
		}
	}
	return tables
}()

// newPeakTable takes the largest gain of the band's table at each step of u. At u <= 0
// and beyond gainRange, where the table of the band has no say, a parabola and a
// cubic go on.
func newPeakTable(l, m int) (*peakTable, error) {
	g, err := gainTables[l][m]()
	if err != nil {
		return nil, err
	}
	var p peakTable
	for i := 1; i <= peakCells; i++ {
		b := newBand(l, m, math.Tanh(gainRange*float64(i)/peakCells))
		b.setGain(g)
		top, _ := b.peak()
		p[i+1] = math.Exp(top - float64(2*l+2)*math.Log(b.spin))
	}
	p[1] = 3*p[2] - 3*p[3] + p[4]
	p[0] = 3*p[1] - 3*p[2] + p[3]
	p[peakCells+2] = 4*p[peakCells+1] - 6*p[peakCells] + 4*p[peakCells-1] - p[peakCells-2]
	return &p, nil
}

// at runs a cubic through the four points around u.
func (p *peakTable) at(u float64) float64 {
	x := u * (peakCells / gainRange)
	i := min(int(x), peakCells-1)
	f := x - float64(i)
	a, b, c, d := p[i], p[i+1], p[i+2], p[i+3]
	return b + f*((c-a/3-b/2-d/6)+f*((a+c)/2-b+f*((d-a)/6+(b-c)/2)))
}
