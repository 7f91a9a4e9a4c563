package main

import (
	"fmt"
	"math"
	"math/cmplx"

	"knell/models/kerr/internal/chart"
)

// leastWidth is the width of a piece at which fitting gives up.
const leastWidth = 2e-4

// faint is the size below which a user may take R as 0: pieces at either end of
// a chart that stay below it are marked.
const faint = 1e-8

// narrow estimates, from three spins, what a piece leaves out in x alone.
func (f *fitter) narrow(low, high float64) (float64, error) {
	_, a := f.end(low)
	_, b := f.end(high)
	worst := 0.0
	for _, i := range []int{0, nodesT / 2, nodesT - 1} {
		v, err := f.row(i, a[i], b[i])
		if err != nil {
			return 0, err
		}
		least := smallest(v)
		c := chebyshev(v)
		worst = max(worst, (cmplx.Abs(c[nodesX-2])+cmplx.Abs(c[nodesX-1]))/least)
	}
	return worst, nil
}

// next fits the widest piece from low on that holds the tolerance, at most up to
// limit, starting from a guess of the width.
func (f *fitter) next(low, limit, guess float64) (p *piece, high float64, err error) {
	// Where the terms in t decide, the last piece knows better than narrow.
	width, most := guess, 1.4*guess
	for range 6 {
		width = min(width, most, limit-low)
		off, err := f.narrow(low, low+width)
		if err != nil {
			return nil, 0, err
		}
		// Aim below the tolerance: the terms in t need some of it.
		factor := math.Pow(0.4*fitTolerance/off, 1./order)
		if factor > 0.93 && (factor < 1.15 || width == limit-low || width == most) {
			break
		}
		width *= min(max(factor, 0.3), 2)
	}
	if p, high, err = f.shrink(low, limit, width, false); p != nil || err != nil {
		return p, high, err
	}
	if p, high, err = f.shrink(low, limit, guess, true); p == nil && err == nil {
		err = fmt.Errorf("(%d,%d) spin %.4f to %.4f: no piece from Mω = %.6f on holds %g", f.l, f.m, spinAt(f.low), spinAt(f.high), low, fitTolerance)
	}
	return p, high, err
}

// order is the power of a piece's width that what it leaves out goes by.
const order = chart.Degree + 1

// shrink fits ever narrower pieces until one holds the tolerance; none if all
// down to leastWidth fail.
func (f *fitter) shrink(low, limit, width float64, zero bool) (p *piece, high float64, err error) {
	for width > leastWidth {
		width = min(width, limit-low)
		// No sliver at the end.
		if rest := limit - low - width; rest > 0 && rest < 0.3*width {
			width = (limit - low) / 2
		}
		high = low + width
		if high > limit-1e-9 {
			high = limit
		}
		if p, err = f.fit(low, high, zero); err != nil {
			return nil, 0, err
		}
		if p.off <= fitTolerance {
			if zero {
				f.zeros++
				f.zeroSize = max(f.zeroSize, p.largest)
			}
			return p, high, nil
		}
		width *= min(0.9, max(0.5, math.Pow(fitTolerance/p.off, 1./order)))
	}
	return nil, 0, nil
}

// panel fits the panel from end to end; a stretch between -gap and gap is left
// out.
func (f *fitter) panel(ends []float64, gap float64) (*chart.Panel, error) {
	var pieces []*piece
	for k := 1; k < len(ends); k++ {
		low, limit := ends[k-1], ends[k]
		if gap > 0 && low == -gap {
			// A piece of zeros.
			p := new(piece)
			p.low, _ = f.end(low)
			p.high, _ = f.end(limit)
			pieces = append(pieces, p)
			continue
		}
		width := 0.2
		if low == gap && gap > 0 {
			width = gap
		}
		for low < limit {
			p, high, err := f.next(low, limit, width)
			if err != nil {
				return nil, err
			}
			pieces = append(pieces, p)
			low, width = high, 1.1*(high-low)
		}
	}
	out := chart.NewPanel(f.low, f.high, len(pieces))
	for out.First < len(pieces) && pieces[out.First].largest < faint {
		out.First++
	}
	for out.Last > out.First && pieces[out.Last-1].largest < faint {
		out.Last--
	}
	for k, p := range pieces {
		copy(out.Bounds[k*chart.BoundTerms:], p.low)
		copy(out.Bounds[(k+1)*chart.BoundTerms:], p.high)
		copy(out.Turn[k*chart.TurnTerms:], p.turn)
		copy(out.Level[k*chart.LevelTerms:], p.level)
		for i, c := range p.c {
			n := chart.Terms[i]
			at := out.Planes[i][k*2*n:]
			for j, z := range c {
				at[j], at[n+j] = real(z), imag(z)
			}
		}
	}
	return &out, nil
}
