package models

import (
	"math"
	"math/bits"
)

// fillSums fills the group's echo sums at both signs of the frequency and returns
// how many bins, from the first on, they differ from one in.
func (c *Cavity) fillSums(g *group, p place) (int, error) {
	if err := g.setSpin(p.spin); err != nil {
		return 0, err
	}
	low, high := g.reach()
	ahead, behind := c.binsBelow(high/p.step), c.binsBelow(-low/p.step)
	if c.excitation == fromSource {
		// What comes straight from the source is there at any frequency.
		ahead, behind = c.grid.Count, c.grid.Count
	}
	reach := max(ahead, behind)
	for _, side := range []struct {
		step   float64
		re, im []float64
	}{{p.step, c.eRe[:ahead], c.eIm[:ahead]}, {-p.step, c.tRe[:behind], c.tIm[:behind]}} {
		if err := c.fillRoundTrip(g, p, side.step, 0, side.re, side.im); err != nil {
			return 0, err
		}
		if c.excitation == fromSource {
			c.finishSource(g, p, side.step, side.re, side.im)
		} else {
			sumPowers(uint(p.echoes())+1, side.re, side.im)
		}
	}
	fillOnes(c.eRe[ahead:reach], c.eIm[ahead:reach])
	fillOnes(c.tRe[behind:reach], c.tIm[behind:reach])
	return reach, nil
}

// binsBelow is how many bins of the grid lie below a multiple of its step.
func (c *Cavity) binsBelow(multiple float64) int {
	last := float64(c.grid.First + c.grid.Count)
	return max(0, int(math.Ceil(math.Min(math.Max(multiple, 0), last)))-c.grid.First)
}

func fillOnes(re, im []float64) {
	for j := range re {
		re[j], im[j] = 1, 0
	}
}

// fillRoundTrip writes q at omega_j = step (First + from + j), step of either
// sign; 0 where the barrier does not reflect.
func (c *Cavity) fillRoundTrip(g *group, p place, step float64, from int, re, im []float64) error {
	low, high := g.reach()
	limit := high / step
	if step < 0 {
		limit = low / step
	}
	n := max(0, min(c.binsBelow(limit)-from, len(re)))
	clear(re[n:])
	clear(im[n:])
	if n == 0 {
		return nil
	}
	bin := float64(c.grid.First + from)
	first, shift := step*bin, float64(g.m)*p.rotation
	rRe, rIm, rs := c.rRe[:n], c.rIm[:n], c.rs[:n]
	cos, sin := c.cos[:n], c.sin[:n]
	if err := g.barrier.Reflection(first, step, rRe, rIm); err != nil {
		return err
	}
	c.law.fill(p.law, p.temperature, first-shift, step, rs)
	fillTurns(p.phase, -2*p.x0*step, bin-shift/step, cos, sin)
	re, im = re[:n], im[:n]
	for j := range re {
		re[j] = rs[j] * (rRe[j]*cos[j] - rIm[j]*sin[j])
		im[j] = rs[j] * (rRe[j]*sin[j] + rIm[j]*cos[j])
	}
	return nil
}

// lnLargestPower bounds the powers of q: where |q| > 1 the sum ends at 1e100, so
// that it stays a number. Perturbations are no longer small long before.
const lnLargestPower = 230

// sumPowers replaces q by 1 + q + ... to that many terms, at least one.
func sumPowers(terms uint, re, im []float64) {
	im = im[:len(re)]
	limit := math.Exp(2 * lnLargestPower / float64(terms))
	for j := range re {
		qr, qi := re[j], im[j]
		switch square := qr*qr + qi*qi; {
		case square < 1e-32 || terms == 1:
			re[j], im[j] = 1, 0
		case square < 1e-8 && terms >= 4:
			// To q^3; the next is below 1e-16.
			sr, si := 1+qr, qi
			sr, si = 1+qr*sr-qi*si, qr*si+qi*sr
			re[j], im[j] = 1+qr*sr-qi*si, qr*si+qi*sr
		case square > limit:
			re[j], im[j] = geometricSum(qr, qi, uint(2*lnLargestPower/math.Log(square))+1)
		default:
			re[j], im[j] = geometricSum(qr, qi, terms)
		}
	}
}

// geometricSum is the sum of the first terms powers of q, from q^0 on, by
// doubling: sum_2s = sum_s (1 + q^s), sum_{s+1} = 1 + q sum_s. It has no singular
// point, unlike (1 - q^terms) / (1 - q).
func geometricSum(qr, qi float64, terms uint) (sr, si float64) {
	sr = 1
	pr, pi := qr, qi
	for b := bits.Len(terms) - 2; b >= 0; b-- {
		odd := terms>>b&1 == 1
		sr, si = sr+sr*pr-si*pi, si+sr*pi+si*pr
		if odd {
			sr, si = 1+sr*qr-si*qi, sr*qi+si*qr
		}
		if b == 0 {
			break
		}
		pr, pi = pr*pr-pi*pi, 2*pr*pi
		if odd {
			pr, pi = pr*qr-pi*qi, pr*qi+pi*qr
		}
	}
	return sr, si
}
