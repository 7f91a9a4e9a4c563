// Package chart holds a complex function of spin and frequency as local
// polynomials, and the file it is kept in. internal/tabulate fits charts; package
// kerr reads them.
//
// Spin enters as u = artanh(a), cut into panels. Over a panel, frequency is cut
// into pieces whose ends move with u as the features of the function do, so that
// what a piece sees hardly changes. With t and x from -1 to 1 across panel and
// piece, the function on a piece is
//
//	exp(level(t) + i turn(t)) Σ_i Σ_j c_ij T_i(x) T_j(t),   j < Terms[i],
//
// T the Chebyshev polynomials; level and turn are short polynomials that follow
// size and phase of the middle of the piece, so that the sum stays near 1 and
// every error is relative.
package chart

import "math"

// Degree is the degree in x of every piece.
const Degree = 9

// Terms is how many terms in t the coefficient of T_i(x) has: what varies
// quickly in both is small. All are even, for the reader's loops.
var Terms = [Degree + 1]int{20, 18, 16, 14, 12, 10, 8, 8, 6, 4}

// MaxTerms is the largest of Terms; the short polynomials have fewer.
const (
	MaxTerms   = 20
	BoundTerms = 6 // ω of a piece's end
	TurnTerms  = 8 // phase
	LevelTerms = 6 // logarithm of the size
)

// Kind says what is charted.
type Kind uint8

// Reflection charts R of odd parity; Transmission charts T/k.
const (
	Reflection Kind = iota
	Transmission
)

// Chart is a decoded file.
type Chart struct {
	Kind      Kind
	L, M      int
	Low, High float64 // the frequencies covered are Low to High,
	Gap       float64 // but for |ω| < Gap, if it is not 0
	Panels    []Panel
}

// Panel is a stretch of u from Low to High.
type Panel struct {
	Low, High   float64
	Pieces      int
	First, Last int       // outside pieces First to Last-1 the function stays below the level of interest
	Bounds      []float64 // BoundTerms coefficients of each of the Pieces+1 ends
	Turn        []float64 // TurnTerms coefficients for each piece
	Level       []float64 // LevelTerms
	// Planes[i] holds, for each piece, Terms[i] coefficients of the real part,
	// then as many of the imaginary part.
	Planes [Degree + 1][]float64
}

// NewPanel returns a panel with room for a number of pieces.
func NewPanel(low, high float64, pieces int) Panel {
	p := Panel{Low: low, High: high, Pieces: pieces, Last: pieces,
		Bounds: make([]float64, (pieces+1)*BoundTerms), Turn: make([]float64, pieces*TurnTerms), Level: make([]float64, pieces*LevelTerms)}
	for i, n := range Terms {
		p.Planes[i] = make([]float64, pieces*2*n)
	}
	return p
}

// The numbers of a file are whole multiples of the inverse of these. Rounding of
// ends, turns and levels costs nothing: the sum is fitted after it. That of the
// coefficients adds some 1e-10 to the relative error.
const (
	BoundScale = 1e9
	TurnScale  = 1 << 12
	LevelScale = 1 << 12
	Scale      = 1 << 37
)

// Round returns the multiple of 1/scale nearest to v.
func Round(v, scale float64) float64 { return math.RoundToEven(v*scale) / scale }

// Basis sets w[j] to T_j(t).
func Basis(t float64, w []float64) {
	a, b := 1.0, t
	for j := range w {
		w[j] = a
		a, b = b, 2*t*b-a
	}
}

// Sum returns Σ_j c[j] w[j].
func Sum(c, w []float64) float64 {
	s := 0.0
	for j, v := range c {
		s += v * w[j]
	}
	return s
}
