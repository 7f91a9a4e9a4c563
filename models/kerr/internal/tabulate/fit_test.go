package main

import (
	"math"
	"math/cmplx"
	"testing"

	"knell/models/kerr"
	"knell/models/kerr/internal/chart"
)

func TestChebyshev(t *testing.T) {
	// x³ = (3 T_1 + T_3)/4
	var v []float64
	for _, x := range chebyshevNodes(7) {
		v = append(v, x*x*x)
	}
	for k, c := range chebyshevReal(v) {
		want := map[int]float64{1: 0.75, 3: 0.25}[k]
		if math.Abs(c-want) > 1e-15 {
			t.Errorf("coefficient %d = %g, want %g", k, c, want)
		}
	}
}

// TestPanel fits a stretch of both kinds and holds what comes out of the file to
// the direct calculation, between the nodes.
func TestPanel(t *testing.T) {
	for _, kind := range []chart.Kind{chart.Reflection, chart.Transmission} {
		const low, high = 0.3, 0.6
		ends := []float64{low, high}
		f, err := newFitter(kind, 2, 2, 0, 0.3, ends)
		if err != nil {
			t.Fatal(err)
		}
		p, err := f.panel(ends, 0)
		if err != nil {
			t.Fatal(err)
		}
		file, err := chart.Encode(&chart.Chart{Kind: kind, L: 2, M: 2, Low: low, High: high, Panels: []chart.Panel{*p}})
		if err != nil {
			t.Fatal(err)
		}
		c, err := chart.Decode(file)
		if err != nil {
			t.Fatal(err)
		}
		for _, u := range []float64{0, 0.123, 0.3} {
			for omega := low; omega < high; omega += 0.0271 {
				got, err := c.At(u, omega)
				if err != nil {
					t.Fatal(err)
				}
				want, err := f.value(math.Tanh(u), omega)
				if err != nil {
					t.Fatal(err)
				}
				// What a piece leaves out, and rounding of a hundred terms.
				if off := cmplx.Abs(got/want - 1); off > 2*fitTolerance {
					t.Errorf("kind %d u=%g ω=%g: %v, want %v, off by %.1e", kind, u, omega, got, want, off)
				}
			}
		}
		if p.Pieces > 12 {
			t.Errorf("kind %d: %d pieces", kind, p.Pieces)
		}
	}
}

// TestZero fits where R of l = m = 3 has a zero close to the real axis, which
// only the fallback can do.
func TestZero(t *testing.T) {
	ends := []float64{1.6, 1.65}
	f, err := newFitter(chart.Reflection, 3, 3, math.Atanh(0.997), math.Atanh(kerr.MaxSpin), []float64{-2, 2})
	if err != nil {
		t.Fatal(err)
	}
	if _, err := f.panel(ends, 0); err != nil {
		t.Fatal(err)
	}
	if f.zeros == 0 || f.zeroSize > 1e-8 {
		t.Errorf("%d pieces with a zero, values up to %g, want some, below 1e-8", f.zeros, f.zeroSize)
	}
}
