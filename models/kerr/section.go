package kerr

import (
	"math"
	"sort"

	"knell/models/kerr/internal/chart"
)

// cellTerms is how many coefficients a polynomial in x has.
const cellTerms = chart.Degree + 1

// cell is a piece of a chart at one spin: the polynomials of real and imaginary
// part in x = (ω - middle) scale, which runs from -1 to 1.
type cell struct {
	re, im        [cellTerms]float64
	middle, scale float64
}

// section is a chart at one spin. Cells are prepared when a frequency first
// falls into them, so that a spin costs no more than what is asked of it.
type section struct {
	table   *table
	panel   *chart.Panel
	basis   [chart.MaxTerms]float64
	bounds  []float64 // ω of the cells' ends
	cells   []cell
	from    int // cells from to to-1 are prepared
	to      int
	reflect bool // hold the conjugate: the function is wanted for -m
}

// newSection has room for the largest panel.
func newSection(t *table, reflect bool) *section {
	most := 0
	for i := range t.panels {
		most = max(most, t.panels[i].Pieces)
	}
	s := &section{table: t, reflect: reflect, bounds: make([]float64, most+1), cells: make([]cell, most)}
	s.set(0)
	return s
}

// set moves the section to u = artanh(spin).
func (s *section) set(u float64) {
	i := 0
	for i < len(s.table.panels)-1 && u > s.table.panels[i].High {
		i++
	}
	p := &s.table.panels[i]
	s.panel = p
	chart.Basis((2*u-p.Low-p.High)/(p.High-p.Low), s.basis[:])
	s.bounds = s.bounds[:p.Pieces+1]
	w := (*[chart.BoundTerms]float64)(s.basis[:])
	for k := range s.bounds {
		c := (*[chart.BoundTerms]float64)(p.Bounds[k*chart.BoundTerms:])
		s.bounds[k] = (c[0] + c[1]*w[1] + c[2]*w[2]) + (c[3]*w[3] + c[4]*w[4] + c[5]*w[5])
	}
	// The outermost ends stay where they are, to the last bit; those of the gap
	// give way to frequencies that are in it by rounding only.
	s.bounds[0], s.bounds[p.Pieces] = s.table.low, s.table.high
	if gap := s.table.gap * (1 - 2*slack); gap > 0 {
		i := sort.SearchFloat64s(s.bounds, 0)
		s.bounds[i-1], s.bounds[i] = -gap, gap
	}
	s.from, s.to = 0, 0
}

// at returns the cell that omega lies in, prepared. It is searched for from a
// cell nearby on.
func (s *section) at(omega float64, near int) int {
	i := near
	last := len(s.bounds) - 2
	for i < last && omega >= s.bounds[i+1] {
		i++
	}
	for i > 0 && omega < s.bounds[i] {
		i--
	}
	if i < s.from || i >= s.to {
		s.prepare(i)
	}
	return i
}

// find is at without a cell to start from.
func (s *section) find(omega float64) int {
	low, high := 0, len(s.bounds)-1
	for high-low > 1 {
		if mid := (low + high) / 2; omega >= s.bounds[mid] {
			low = mid
		} else {
			high = mid
		}
	}
	return s.at(omega, low)
}

// prepare extends the prepared cells to the i-th.
func (s *section) prepare(i int) {
	switch {
	case s.from == s.to:
		s.fill(i, i+1)
		s.from, s.to = i, i+1
	case i < s.from:
		s.fill(i, s.from)
		s.from = i
	default:
		s.fill(s.to, i+1)
		s.to = i + 1
	}
}

// fill sums the terms in t of some cells and restores size and phase.
func (s *section) fill(from, to int) {
	for k := from; k < to; k++ {
		s.cells[k].middle = (s.bounds[k] + s.bounds[k+1]) / 2
		s.cells[k].scale = 2 / (s.bounds[k+1] - s.bounds[k])
	}
	for i, n := range chart.Terms {
		w := s.basis[:n]
		rows := s.panel.Planes[i][from*2*n : to*2*n]
		for k := from; k < to; k++ {
			c := &s.cells[k]
			a, b := rows[:len(w)], rows[len(w):2*len(w)]
			rows = rows[2*len(w):]
			c.re[i], c.im[i] = dot2(w, a, b)
		}
	}
	for k := from; k < to; k++ {
		c := &s.cells[k]
		turn := chart.Sum(s.panel.Turn[k*chart.TurnTerms:(k+1)*chart.TurnTerms], s.basis[:])
		level := chart.Sum(s.panel.Level[k*chart.LevelTerms:(k+1)*chart.LevelTerms], s.basis[:])
		sin, cos := math.Sincos(turn)
		size := math.Exp(level)
		sin, cos = sin*size, cos*size
		up := 1.0
		if s.reflect {
			up = -1
		}
		for i := range c.re {
			re, im := c.re[i], c.im[i]
			c.re[i], c.im[i] = re*cos-im*sin, up*(re*sin+im*cos)
		}
	}
}

// dot2 returns Σ w a and Σ w b; lengths are equal and even.
func dot2(w, a, b []float64) (x, y float64) {
	a, b = a[:len(w)], b[:len(w)]
	var x1, y1 float64
	for j := 0; j < len(w)-1; j += 2 {
		x += w[j] * a[j]
		y += w[j] * b[j]
		x1 += w[j+1] * a[j+1]
		y1 += w[j+1] * b[j+1]
	}
	return x + x1, y + y1
}
