package kerr

import "math"

// maximum returns the place and the value of the largest f in [low, high], given
// f(middle) = top not below its values at the ends, by parabolas through the three
// best points, and by golden sections where those do not shrink the bracket
// (ISBN 0-13-022335-2 (1973), chapter 5). It stops when the place is known to tol.
func maximum(f func(float64) float64, low, middle, high, top, tol float64) (at, value float64) {
	const golden = 0.3819660112501051
	x, w, v := middle, middle, middle
	fx, fw, fv := top, top, top
	var step, last float64
	for range 60 {
		centre := (low + high) / 2
		if math.Abs(x-centre) <= 2*tol-(high-low)/2 {
			break
		}
		r, q := (x-w)*(fx-fv), (x-v)*(fx-fw)
		p := (x-v)*q - (x-w)*r
		q = 2 * (q - r)
		if q > 0 {
			p = -p
		}
		q = math.Abs(q)
		before := last
		last = step
		if math.Abs(p) < math.Abs(q*before/2) && p > q*(low-x) && p < q*(high-x) {
			step = p / q
			if u := x + step; u-low < 2*tol || high-u < 2*tol {
				step = math.Copysign(tol, centre-x)
			}
		} else {
			last = high - x
			if x >= centre {
				last = low - x
			}
			step = golden * last
		}
		u := x + step
		if math.Abs(step) < tol {
			u = x + math.Copysign(tol, step)
		}
		fu := f(u)
		if fu >= fx {
			if u >= x {
				low = x
			} else {
				high = x
			}
			v, w, x, fv, fw, fx = w, x, u, fw, fx, fu
			continue
		}
		if u < x {
			low = u
		} else {
			high = u
		}
		switch {
		case fu >= fw || w == x:
			v, w, fv, fw = w, u, fw, fu
		case fu >= fv || v == x || v == w:
			v, fv = u, fu
		}
	}
	return x, fx
}

// Points of the band are searched at p = κ sinh(s asinh(mΩ_H/κ)), s from 0 (ω = mΩ_H)
// to 1 (ω = 0): fine on the scale of κ, and cheap.
func (b *band) searched(s float64) float64 {
	if s == 1 {
		return b.turn
	}
	return b.kappa * math.Sinh(s*b.edge)
}

// gainOf is the gain at searched(s) = p.
func (b *band) gainOf(s, p float64) float64 { return b.gainAt(p, s*b.edge) }

// searchSteps is how many steps of s a search begins with. The barrier's own gain
// has one maximum, as wide as several of them.
const searchSteps = 24

// search returns the largest f and its s over the band, the ends included.
func search(f func(s float64) float64) (s, value float64) {
	value = f(0)
	best := 0
	for i := 1; i <= searchSteps; i++ {
		if v := f(float64(i) / searchSteps); v > value {
			best, value = i, v
		}
	}
	s = float64(best) / searchSteps
	return refine(f, max(s-1./searchSteps, 0), s, min(s+1./searchSteps, 1), value)
}

// refine returns the largest f in [low, high] and its place, given the largest of
// the values at both ends and at s, which may be one of them.
func refine(f func(float64) float64, low, s, high, value float64) (at, top float64) {
	const tol = 3e-5
	middle, top := s, value
	if s == low || s == high {
		middle = (low + high) / 2
		top = f(middle)
	}
	if at, top = maximum(f, low, middle, high, top, tol); top > value {
		return at, top
	}
	return s, value
}

// peak returns the logarithm of the largest gain and p there.
func (b *band) peak() (lnGain, p float64) {
	s, lnGain := search(func(s float64) float64 { return math.Log(b.gainOf(s, b.searched(s))) })
	return lnGain, b.searched(s)
}
