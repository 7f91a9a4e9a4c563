package kerr

import (
	"fmt"
	"math"
)

// Functions of the spin are tabulated over u = artanh(spin), from 0 to
// panelRange, on panels that halve the range until a polynomial of
// panelNodes coefficients holds on each. Where two overtones nearly meet, a
// branch point lies close to real spins and the panels get small around it.
const (
	panelNodes   = 17
	deepestPanel = 20 // halvings
	panelCells   = 64
)

// panelRange is the whole range of u: artanh(MaxSpin) = 3.45338, rounded up so
// that no machine's artanh falls outside.
const panelRange = 3.4534

// panel is one piece of a range: index of 2^depth equal ones.
type panel struct{ index, depth int }

func (p panel) edges() (from, to float64) {
	width := math.Ldexp(panelRange, -p.depth)
	return float64(p.index) * width, float64(p.index+1) * width
}

// chebyshev holds Chebyshev coefficients of several functions on one panel, by
// function and degree.
type chebyshev [][panelNodes]float64

// samplePanel returns the values of several functions at rising u, by function
// and place, and moves the state along.
type samplePanel[S any] func(state *S, u []float64, values [][]float64) error

// adapt halves panels, at first the given ones, until on each the functions'
// Chebyshev coefficients satisfy small. It returns the panels in rising order with
// their coefficients. The first ones cover the range in rising order; state
// belongs to u = 0. Each panel's sampling gets a copy of the state at its lower
// edge and leaves it at the upper one.
func adapt[S any](state S, first []panel, functions int, sample samplePanel[S], small func(chebyshev) bool) ([]panel, []chebyshev, error) {
	var panels []panel
	var series []chebyshev
	u := make([]float64, panelNodes+1)
	values := make([][]float64, functions)
	for f := range values {
		values[f] = make([]float64, panelNodes+1)
	}
	var divide func(p panel, state S) (S, error)
	divide = func(p panel, state S) (S, error) {
		from, to := p.edges()
		for j := range panelNodes {
			u[j] = from + (to-from)*(1-panelCosine[2*j+1])/2
		}
		u[panelNodes] = to
		after := state
		if err := sample(&after, u, values); err != nil {
			return state, err
		}
		c := make(chebyshev, functions)
		for f := range c {
			c[f] = transform(values[f])
		}
		if small(c) {
			panels, series = append(panels, p), append(series, c)
			return after, nil
		}
		if p.depth == deepestPanel {
			return state, fmt.Errorf("kerr: no polynomial holds near spin %.6f", math.Tanh(from))
		}
		state, err := divide(panel{2 * p.index, p.depth + 1}, state)
		if err != nil {
			return state, err
		}
		return divide(panel{2*p.index + 1, p.depth + 1}, state)
	}
	for _, p := range first {
		var err error
		if state, err = divide(p, state); err != nil {
			return nil, nil, err
		}
	}
	return panels, series, nil
}

// panelCosine[i] is cos(πi/(2 panelNodes)).
var panelCosine = func() (c [4 * panelNodes]float64) {
	for i := range c {
		c[i] = math.Cos(math.Pi * float64(i) / (2 * panelNodes))
	}
	return c
}()

// transform returns the Chebyshev coefficients of a function given at
// x = -cos(π(j+½)/panelNodes).
func transform(values []float64) (c [panelNodes]float64) {
	for k := range c {
		for j := range panelNodes {
			// T_k(-x) = (-1)^k T_k(x)
			c[k] += values[panelNodes-1-j] * panelCosine[k*(2*j+1)%(4*panelNodes)]
		}
		c[k] *= 2.0 / panelNodes
	}
	c[0] /= 2
	return c
}

// powers turns Chebyshev coefficients into those of powers of x. Coefficients
// that fall by 3 or more per degree lose nothing by it.
func powers(c [panelNodes]float64) (p [panelNodes]float64) {
	var before, now [panelNodes]float64 // T_{k-1}, T_k
	now[0] = 1
	for k := range c {
		var next [panelNodes]float64
		for i := range now {
			p[i] += c[k] * now[i]
			next[i] = -before[i]
			if i > 0 {
				next[i] += 2 * now[i-1]
				if k == 0 {
					next[i] -= now[i-1]
				}
			}
		}
		before, now = now, next
	}
	return p
}

// panelIndex finds the panel of a u.
type panelIndex struct {
	start, scale []float64 // lower edge and 2/width, by panel
	cells        [panelCells]int32
	perCell      float64
}

func newPanelIndex(panels []panel) panelIndex {
	x := panelIndex{perCell: panelCells / panelRange}
	for _, p := range panels {
		from, to := p.edges()
		x.start, x.scale = append(x.start, from), append(x.scale, 2/(to-from))
	}
	at := 0
	for c := range x.cells {
		// A little below the cell, so that rounding of u*perCell does no harm.
		for at+1 < len(panels) && x.start[at+1] <= (float64(c)-1e-9)/x.perCell {
			at++
		}
		x.cells[c] = int32(at)
	}
	return x
}

// locate returns the panel of u and the place on it, from -1 to 1.
func (x *panelIndex) locate(u float64) (i int, at float64) {
	i = int(x.cells[min(int(u*x.perCell), panelCells-1)])
	for i+1 < len(x.start) && u >= x.start[i+1] {
		i++
	}
	return i, (u-x.start[i])*x.scale[i] - 1
}
