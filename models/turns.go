package models

import "math"

// turnSpan is how many values fillTurns takes from one sine and cosine before it
// takes them afresh. Rounding grows by about one unit in the last place a
// multiplication, a fourth as many, so phases stay within 64 * 2^-53 = 7e-15 of
// direct evaluation.
const turnSpan = 64

// fillTurns writes cosine and sine of offset + step*(first + j), j in range cos.
// Four rotors turn side by side, so that one's multiplications need not wait for
// the other's.
func fillTurns(offset, step, first float64, cos, sin []float64) {
	s1, c1 := math.Sincos(step)
	s2, c2 := 2*s1*c1, c1*c1-s1*s1
	s3, c3 := s2*c1+c2*s1, c2*c1-s2*s1
	s4, c4 := 2*s2*c2, c2*c2-s2*s2
	sin = sin[:len(cos)]
	for start := 0; start < len(cos); start += turnSpan {
		s, c := math.Sincos(offset + step*(first+float64(start)))
		end := min(start+turnSpan, len(cos))
		sa, ca := s*c1+c*s1, c*c1-s*s1
		sb, cb := s*c2+c*s2, c*c2-s*s2
		sd, cd := s*c3+c*s3, c*c3-s*s3
		j := start
		for ; j+4 <= end; j += 4 {
			u, v := cos[j:j+4:j+4], sin[j:j+4:j+4]
			u[0], u[1], u[2], u[3] = c, ca, cb, cd
			v[0], v[1], v[2], v[3] = s, sa, sb, sd
			c, s = c*c4-s*s4, c*s4+s*c4
			ca, sa = ca*c4-sa*s4, ca*s4+sa*c4
			cb, sb = cb*c4-sb*s4, cb*s4+sb*c4
			cd, sd = cd*c4-sd*s4, cd*s4+sd*c4
		}
		for ; j < end; j++ {
			cos[j], sin[j] = c, s
			c, s, ca, sa, cb, sb = ca, sa, cb, sb, cd, sd
		}
	}
}
