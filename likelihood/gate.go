package likelihood

import (
	"fmt"
	"math"

	"gonum.org/v1/gonum/blas"
	"gonum.org/v1/gonum/blas/blas64"
	"gonum.org/v1/gonum/dsp/fourier"
	"gonum.org/v1/gonum/lapack/lapack64"
)

// gate is the factorised P_GG of one site.
type gate struct {
	n      int               // samples in the gate, at the segment's start
	factor blas64.Triangular // lower L with L L' = P_GG; unset when n is 0
	logDet float64           // ln det P_GG
	// inverse is L^-1, row by row, n of them of stride n. It costs as much as L
	// to apply, but its rows are plain dot products, which are vectorised.
	inverse []float64
}

// newGate factorises P_GG for the precision (1/eigenvalue of the circulant
// covariance) at the N/2+1 frequencies of an N-sample segment. Cost O(n^3).
func newGate(precision []float64, samples, n int) (*gate, error) {
	g := &gate{n: n}
	if n == 0 {
		return g, nil
	}
	coefficients := make([]complex128, len(precision))
	for k, p := range precision {
		coefficients[k] = complex(p/float64(samples), 0)
	}
	row := fourier.NewFFT(samples).Sequence(nil, coefficients)
	a := blas64.Symmetric{N: n, Stride: n, Uplo: blas.Lower, Data: make([]float64, n*n)}
	for i := range n {
		for j := 0; j <= i; j++ {
			a.Data[i*n+j] = row[i-j]
		}
	}
	t, ok := lapack64.Potrf(a)
	if !ok {
		return nil, fmt.Errorf("likelihood: the gate's %d x %d precision matrix is not positive definite in double precision; its noise density spans too large a range", n, n)
	}
	g.factor = t
	inverse := blas64.General{Rows: n, Cols: n, Stride: n, Data: make([]float64, n*n)}
	for i := range n {
		inverse.Data[i*n+i] = 1
	}
	blas64.Trsm(blas.Left, blas.NoTrans, 1, t, inverse)
	g.inverse = inverse.Data
	for i := range n {
		g.logDet += 2 * math.Log(t.Data[i*n+i])
	}
	return g, nil
}

// square returns x' P_GG^-1 x = |L^-1 x|^2 for x of length n.
func (g *gate) square(x []float64) float64 {
	sum := 0.0
	for i := range g.n {
		row := g.inverse[i*g.n : i*g.n+i+1]
		y := blas64.Dot(blas64.Vector{N: i + 1, Inc: 1, Data: row}, blas64.Vector{N: i + 1, Inc: 1, Data: x[:i+1]})
		sum += y * y
	}
	return sum
}

// solve overwrites x with P_GG^-1 x.
func (g *gate) solve(x []float64) {
	if g.n == 0 {
		return
	}
	v := blas64.Vector{N: g.n, Inc: 1, Data: x}
	blas64.Trsv(blas.NoTrans, g.factor, v)
	blas64.Trsv(blas.Trans, g.factor, v)
}

// scale makes square take samples that come multiplied by w: square(w x) is then
// what square(x) was.
func (g *gate) scale(w []float64) {
	for i := range g.n {
		for j := range i + 1 {
			g.inverse[i*g.n+j] /= w[j]
		}
	}
}
