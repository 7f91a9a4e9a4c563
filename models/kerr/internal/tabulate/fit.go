package main

import (
	"math"
	"math/cmplx"

	"knell/models/kerr"
	"knell/models/kerr/internal/chart"
)

// The nodes of a fit: two more than terms either way, to see what is cut off.
const (
	nodesX = chart.Degree + 3
	nodesT = chart.MaxTerms + 2
)

// fitTolerance bounds the terms that a piece leaves out, relative to the
// smallest value on it.
const fitTolerance = 2e-10

// fitter fits one panel.
type fitter struct {
	kind        chart.Kind
	l, m        int
	low, high   float64
	nodes, wave []float64 // nodes in t and in x
	spins       []float64
	follow      *follower
	evaluations int
	zeros       int     // pieces with a zero of the function
	zeroSize    float64 // largest value on them
}

// piece is a fitted piece.
type piece struct {
	low, high   []float64 // BoundTerms
	turn, level []float64
	c           [][]complex128 // [i][j]
	off         float64        // what is left out, relative
	largest     float64
}

func newFitter(kind chart.Kind, l, m int, low, high float64, fixed []float64) (*fitter, error) {
	f := &fitter{kind: kind, l: l, m: m, low: low, high: high, nodes: chebyshevNodes(nodesT), wave: chebyshevNodes(nodesX)}
	u, half := (low+high)/2, (high-low)/2
	for _, t := range f.nodes {
		f.spins = append(f.spins, spinAt(u+half*t))
	}
	var err error
	f.follow, err = newFollower(l, m, u, half, f.nodes, fixed)
	return f, err
}

// value is the function charted.
func (f *fitter) value(spin, omega float64) (complex128, error) {
	f.evaluations++
	r, err := kerr.BarrierResponse(f.l, f.m, spin, omega, kerr.Odd)
	if f.kind == chart.Reflection {
		return r.Reflection, err
	}
	return r.Transmission / complex(omega-float64(f.m)*kerr.HorizonFrequency(spin), 0), err
}

// reference is the rough phase that a piece's own is counted from, so that it
// can be followed from one spin to the next: that of a wave turned back near the
// horizon, at (r - r+)/(r+ - r-) = 3√(1 + kh²), kh = 2 r+ k/(r+ - r-).
func (f *fitter) reference(spin, omega float64) float64 {
	if f.kind != chart.Reflection {
		return 0
	}
	rp, d := kerr.HorizonRadius(spin), kerr.HorizonRadius(spin)-kerr.InnerHorizonRadius(spin)
	m := float64(f.m)
	kh := (2*rp*omega - m*spin) / d
	x := 3 * math.Sqrt(1+kh*kh)
	phase := omega*kerr.Tortoise(spin, rp+d*x) - m*spin/d*math.Log(x/(1+x))
	return 2 * (phase - m*kerr.HorizonFrequency(spin)*(rp+2*math.Log(d/2)))
}

// end is a piece's end that is at w in the panel's middle: its polynomial,
// rounded, and its value at the nodes.
func (f *fitter) end(w float64) (c, at []float64) {
	c = chebyshevReal(f.follow.place(w))[:chart.BoundTerms]
	for i := range c {
		c[i] = chart.Round(c[i], chart.BoundScale)
	}
	return c, f.evaluate(c)
}

func (f *fitter) evaluate(c []float64) (at []float64) {
	basis := make([]float64, len(c))
	for _, t := range f.nodes {
		chart.Basis(t, basis)
		at = append(at, chart.Sum(c, basis))
	}
	return at
}

// row evaluates the function at the nodes in x, at the i-th node in t.
func (f *fitter) row(i int, low, high float64) ([]complex128, error) {
	v := make([]complex128, nodesX)
	for j, x := range f.wave {
		var err error
		if v[j], err = f.value(f.spins[i], (low+high)/2+(high-low)/2*x); err != nil {
			return nil, err
		}
	}
	return v, nil
}

// fit fits the piece between two ends. With zero set the piece may have a zero of
// the function in it: then its turn is that of reference, its level that of the
// largest value, and what it leaves out is relative to that.
func (f *fitter) fit(low, high float64, zero bool) (*piece, error) {
	p := new(piece)
	var a, b []float64
	p.low, a = f.end(low)
	p.high, b = f.end(high)
	rows := make([][]complex128, nodesT)
	phase, size := make([]float64, nodesT), make([]float64, nodesT)
	for i := range rows {
		v, err := f.row(i, a[i], b[i])
		if err != nil {
			return nil, err
		}
		rows[i] = v
		p.largest = max(p.largest, largest(v))
		centre := (v[nodesX/2-1] + v[nodesX/2]) / 2
		reference := f.reference(f.spins[i], (a[i]+b[i])/2)
		rest := cmplx.Phase(centre * cmplx.Rect(1, -reference))
		if i > 0 {
			before := phase[i-1] - f.reference(f.spins[i-1], (a[i-1]+b[i-1])/2)
			rest += 2 * math.Pi * math.Round((before-rest)/(2*math.Pi))
		}
		phase[i], size[i] = reference+rest, math.Log(cmplx.Abs(centre))
		if zero {
			phase[i], size[i] = reference, math.Log(largest(v))
		}
	}
	p.turn, p.level = chebyshevReal(phase)[:chart.TurnTerms], chebyshevReal(size)[:chart.LevelTerms]
	for i := range p.turn {
		p.turn[i] = chart.Round(p.turn[i], chart.TurnScale)
	}
	for i := range p.level {
		p.level[i] = chart.Round(p.level[i], chart.LevelScale)
	}
	if zero {
		clear(p.level[2:])
	}
	turn, level := f.evaluate(p.turn), f.evaluate(p.level)
	least := math.Inf(1)
	for i, v := range rows {
		for j := range v {
			v[j] *= cmplx.Rect(math.Exp(-level[i]), -turn[i])
		}
		if zero {
			least = min(least, largest(v))
		} else {
			least = min(least, smallest(v))
		}
		rows[i] = chebyshev(v)
	}
	for j := range nodesX {
		column := make([]complex128, nodesT)
		for i := range column {
			column[i] = rows[i][j]
		}
		c := chebyshev(column)
		keep := 0
		if j <= chart.Degree {
			keep = chart.Terms[j]
			p.c = append(p.c, c[:keep])
		}
		for _, z := range c[keep:] {
			p.off += cmplx.Abs(z)
		}
	}
	p.off /= least
	return p, nil
}

func smallest(v []complex128) float64 {
	least := math.Inf(1)
	for _, z := range v {
		least = min(least, cmplx.Abs(z))
	}
	return least
}

func largest(v []complex128) float64 {
	most := 0.0
	for _, z := range v {
		most = max(most, cmplx.Abs(z))
	}
	return most
}
