package models

import "math"

// rotorSpan is how many steps a rotor takes by multiplication before it takes
// sine and cosine afresh. Rounding grows by about one unit in the last place a
// step, so phases stay within 64 * 2^-53 = 7e-15 of direct evaluation.
const rotorSpan = 64

// rotor yields cosine and sine of step*(first + j) for j = 0, 1, 2, ...
type rotor struct {
	step, index    float64
	cos, sin       float64
	stepCos, stepS float64
	left           int
}

func newRotor(step, first float64) rotor {
	s, c := math.Sincos(step)
	return rotor{step: step, index: first, stepCos: c, stepS: s}
}

// next returns cosine and sine at the present index and moves on.
func (r *rotor) next() (cos, sin float64) {
	if r.left == 0 {
		r.sin, r.cos = math.Sincos(r.step * r.index)
		r.left = rotorSpan
	}
	cos, sin = r.cos, r.sin
	r.cos, r.sin = cos*r.stepCos-sin*r.stepS, cos*r.stepS+sin*r.stepCos
	r.index++
	r.left--
	return cos, sin
}
