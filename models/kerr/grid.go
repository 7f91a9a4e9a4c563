package kerr

import "math"

// The table of R is laid out so that what is stored varies slowly:
//
//   - spin at equal steps of u = artanh(a);
//   - frequency at equal steps of y = asinh(k/κ) + 6 k, k = ω - mΩ_H: fine on the
//     scale of the Hawking temperature around k = 0, where R turns, and keeping
//     k/κ, on which the near zone depends, nearly fixed as the spin goes up;
//   - without the phase 2(φ - δ) of a wave turned back at x = 3√(1 + kh²), with φ
//     and δ as in upgoing.go: inside the barrier's foot when the wave is slow
//     there, further out when it is fast.
//
// Rows of negative u follow from R(-u, ω) = conj R(u, -ω).
const (
	tableCells  = 96 // steps of u from 0 to artanh(MaxSpin)
	tableMargin = 3  // rows beyond either end, for centred stencils
	tableRows   = tableCells + 1 + 2*tableMargin
	tablePoints = 576  // frequencies of a row
	tableLimit  = 1.70 // last |ω|; |R| < 1e-8 there at every spin
	tableEven   = 6.0
	tableOrder  = 8 // rows that one spin is blended from
	tableM      = 2 // l = m = 2
)

// tableStep is the step of u.
var tableStep = math.Atanh(MaxSpin) / tableCells

// row is one spin of the grid.
type row struct {
	spin       float64 // tanh u
	turn       float64 // mΩ_H
	kappa      float64
	low, width float64 // y of the first point, step of y
}

func newRow(u float64) row {
	spin := math.Tanh(u)
	r := row{spin: spin, turn: tableM * HorizonFrequency(spin), kappa: SurfaceGravity(spin)}
	r.low = r.y(-tableLimit)
	r.width = (r.y(tableLimit) - r.low) / (tablePoints - 1)
	return r
}

// y is the coordinate that has equal steps; its rate of change far from k = 0
// is tableEven per unit of ω.
func (r row) y(omega float64) float64 {
	k := omega - r.turn
	return math.Asinh(k/r.kappa) + tableEven*k
}

// frequencies returns ω of the row's points. Each is solved by Newton's method
// from the one before: y grows with ω and is nearly straight over a step.
func (r row) frequencies() (omega [tablePoints]float64) {
	w := -tableLimit
	for j := range omega {
		for range 30 {
			k := w - r.turn
			change := (r.low + float64(j)*r.width - r.y(w)) / (1/math.Hypot(k, r.kappa) + tableEven)
			w += change
			if math.Abs(change) < 1e-15 {
				break
			}
		}
		omega[j] = w
	}
	return omega
}

// phase returns the phase 2(φ - δ) that the table leaves out at frequency
// omega of the row of u >= 0.
func (r row) phase(omega float64) float64 {
	b := background{m: tableM, a: r.spin, w: omega, rp: HorizonRadius(r.spin), rm: InnerHorizonRadius(r.spin), d: 2 * rootOfDeficit(r.spin)}
	kh := 2 * b.rp * (omega - r.turn) / b.d
	return 2 * (b.phase(3*math.Sqrt(1+kh*kh)) - b.horizonPhase())
}
