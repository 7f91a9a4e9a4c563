package models

import "math"

// turnSpan is how many steps fillTurns takes by multiplication before it takes
// sine and cosine afresh. Rounding grows by about one unit in the last place a
// step, so phases stay within 64 * 2^-53 = 7e-15 of direct evaluation.
const turnSpan = 64

// fillTurns writes cosine and sine of offset + step*(first + j), j in range cos.
func fillTurns(offset, step, first float64, cos, sin []float64) {
	stepSin, stepCos := math.Sincos(step)
	sin = sin[:len(cos)]
	for start := 0; start < len(cos); start += turnSpan {
		s, c := math.Sincos(offset + step*(first+float64(start)))
		end := min(start+turnSpan, len(cos))
		for j := start; j < end; j++ {
			cos[j], sin[j] = c, s
			c, s = c*stepCos-s*stepSin, c*stepSin+s*stepCos
		}
	}
}
