package models

import "math"

// A source at the tortoise coordinate x_s in the cavity sends one wave out and one
// wave in. Seen outside, the first is the ringdown h_H as a horizon would leave
// it; the second is reflected by the surface first and follows it by
// 2 (x_s - x0). Both then have the cavity's echoes:
//
//	h = h_H (1 + g) (1 + q + ...),   g = Rs exp(-2 i k (x0 - x_s)).
//
// x_s is given as a depth, 0 at the light ring and 1 at the surface, as a share of
// the tortoise distance between them. The limits:
//
//   - Depth 1: the second wave does not lag behind the first, so that for a
//     constant reflectivity the signal is that of an excitation from the barrier
//     times the complex number 1 + Rs; nothing tells them apart but the prior of
//     the amplitudes. With Rs = -1 nothing is left.
//   - Depth 0: the second wave follows by one whole delay, as the first echo of an
//     excitation from the barrier does, which has R besides: h = h_H (1 + g)(1 + ...)
//     against h_H (1 + q)(1 + ...) to first order. They differ most where |R| is
//     far from 1, above the barrier.
//   - Reflectivity 0: the ringdown, bit for bit.

// finishSource replaces q by the source's sum on the grid's first bins, at
// omega_j = step (First + j). Each term counts for itself whether it arrives
// within the data: the second wave has as many echoes as the first or one less.
func (c *Cavity) finishSource(g *group, p place, step float64, re, im []float64) {
	lag := 1 - p.exciting[0] // in delays
	direct := p.echoes()
	turned := int(math.Floor(p.span-lag)) + 1 // terms of the second wave
	if turned <= 0 || p.span == 0 {
		fillOnes(re, im)
		return
	}
	n := len(re)
	qr, qi := c.rRe[:n], c.rIm[:n]
	copy(qr, re)
	copy(qi, im)
	sumPowers(uint(turned), re, im)

	first, shift := float64(c.grid.First), float64(g.m)*p.rotation
	rs, cos, sin := c.rs[:n], c.cos[:n], c.sin[:n]
	c.law.fill(p.law, p.temperature, first*step-shift, step, rs)
	fillTurns(p.phase, lag*p.delay*step, first-shift/step, cos, sin)
	im = im[:n]
	if turned > direct {
		// As many terms of either.
		for j := range re {
			gr, gi := 1+rs[j]*cos[j], rs[j]*sin[j]
			re[j], im[j] = re[j]*gr-im[j]*gi, re[j]*gi+im[j]*gr
		}
		return
	}
	// The first wave's last term is beyond the second's: with S the second's sum,
	// 1 + q S + g S.
	for j := range re {
		gr, gi := qr[j]+rs[j]*cos[j], qi[j]+rs[j]*sin[j]
		re[j], im[j] = 1+re[j]*gr-im[j]*gi, re[j]*gi+im[j]*gr
	}
}
