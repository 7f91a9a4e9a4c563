package chart

import (
	"fmt"
	"math"
	"math/cmplx"
)

// At returns the charted function, term by term as the package comment has it. It
// is what the generator measures its files with, and the plain twin of the fast
// path in package kerr.
func (c *Chart) At(u, omega float64) (complex128, error) {
	i := 0
	for i < len(c.Panels)-1 && u > c.Panels[i].High {
		i++
	}
	p := &c.Panels[i]
	var t, x [MaxTerms]float64
	Basis((2*u-p.Low-p.High)/(p.High-p.Low), t[:])
	end := func(k int) float64 { return Sum(p.Bounds[k*BoundTerms:(k+1)*BoundTerms], t[:]) }
	if !(omega >= c.Low && omega <= c.High && math.Abs(omega) >= c.Gap) {
		return 0, fmt.Errorf("kerr: Mω = %g, want %g to %g, %g or more from 0", omega, c.Low, c.High, c.Gap)
	}
	k := 0
	for k < p.Pieces-1 && omega >= end(k+1) {
		k++
	}
	low, high := end(k), end(k+1)
	Basis((2*omega-low-high)/(high-low), x[:])
	var sum complex128
	for i, n := range Terms {
		row := p.Planes[i][2*n*k:]
		sum += complex(x[i]*Sum(row[:n], t[:]), x[i]*Sum(row[n:2*n], t[:]))
	}
	level := Sum(p.Level[k*LevelTerms:(k+1)*LevelTerms], t[:])
	turn := Sum(p.Turn[k*TurnTerms:(k+1)*TurnTerms], t[:])
	return sum * cmplx.Rect(math.Exp(level), turn), nil
}
