package models

import (
	"math"
	"math/cmplx"
)

// An infalling pulse passes the barrier inwards, reaches the surface, and comes
// out a part at each round trip:
//
//	h = h_H + K z,   K = T Rs exp(-2 i k x0) (1 + q + ...),
//
// with T the barrier's transmission (kerr.Response: the ratio of amplitudes far
// away and in the cavity). The pulse is seen outside like a mode of the first
// mode's (l, m), with its angular factor at the mode's a omega and with its
// partner; without surface and barrier it would be a Gaussian,
//
//	e(t) = A exp(i phi) exp(-(t - t0)^2 / 2 w^2 - i omega_c (t - t0)),
//
// A its amplitude, w its width and omega_c its carrier, by default the first
// mode's frequency: given as a ratio to that, since the mode's frequency changes
// with mass and spin. A carrier of 0 is a plain Gaussian.
//
// The pulse passes the light ring with its centre infallLead widths after the
// start, so that none of it is there before: what comes out first begins one echo
// delay after the start, like the first echo of a ringdown. Hence
// z = A exp(i phi) w sqrt(2 pi) exp(-(omega - omega_c)^2 w^2 / 2) exp(i omega
// infallLead w) exp(2 i k x_b), x_b the light ring's tortoise coordinate. (The last
// is the time the pulse saves by starting at the light ring and not at tortoise
// coordinate 0, in and out.)
//
// The n-th term begins n + 1 delays after the start; those that begin after the
// data are left out.

// infallLead is how many widths the pulse's centre lies after its beginning:
// erfc(4)/2 = 8e-9 of its energy comes before.
const infallLead = 4

// infallEnds is how many standard deviations of the pulse's spectrum are computed:
// exp(-8.5^2/2) = 2e-16.
const infallEnds = 8.5

// addInfall adds what comes out of the cavity of an infalling pulse.
func (c *Cavity) addInfall(theta []float64, p place, h *Polarizations) error {
	amplitude, phase, seconds, carrier := p.exciting[0], p.exciting[1], p.exciting[2], p.exciting[3]
	if amplitude == 0 || p.echoes() == 0 {
		return nil
	}
	w, err := c.ringing.wave(0, theta[0], theta[1], amplitude, phase)
	if err != nil {
		return err
	}
	g := &c.groups[0]
	if err := g.setSpin(p.spin); err != nil {
		return err
	}
	z := pulse{width: seconds / p.scale, carrier: carrier * w.omegaRe * p.scale, scale: p.scale}
	if err := c.fillInfall(g, p, z, p.step, c.eRe, c.eIm); err != nil {
		return err
	}
	if err := c.fillInfall(g, p, z, -p.step, c.tRe, c.tIm); err != nil {
		return err
	}
	h.addSignal(w, c.eRe, c.eIm, c.tRe, c.tIm)
	return nil
}

// pulse is the infalling Gaussian of amplitude 1, in units of M but for scale, M
// in s, which its spectrum carries.
type pulse struct{ width, carrier, scale float64 }

// fillInfall writes K z over the grid's bins at omega_j = step (First + j).
func (c *Cavity) fillInfall(g *group, p place, z pulse, step float64, re, im []float64) error {
	clear(re)
	clear(im)
	// Only the bins where the pulse's spectrum is not negligible.
	low, high := (z.carrier-infallEnds/z.width)/step, (z.carrier+infallEnds/z.width)/step
	if step < 0 {
		low, high = high, low
	}
	from, to := c.binsBelow(low), c.binsBelow(high)
	if from == to {
		return nil
	}
	re, im = re[from:to], im[from:to]
	if err := c.fillRoundTrip(g, p, step, from, re, im); err != nil {
		return err
	}
	sumPowers(uint(p.echoes()), re, im)

	n := len(re)
	bin, shift := float64(c.grid.First+from), float64(g.m)*p.rotation
	tRe, tIm, rs, cos, sin := c.rRe[:n], c.rIm[:n], c.rs[:n], c.cos[:n], c.sin[:n]
	if err := fillTransmission(g, shift, bin*step, step, tRe, tIm); err != nil {
		return err
	}
	c.law.fill(p.law, p.temperature, bin*step-shift, step, rs)
	// k delay + omega infallLead w, with delay = 2 (x_b - x0).
	fillTurns(p.phase-shift*p.delay, (p.delay+infallLead*z.width)*step, bin, cos, sin)
	z.weigh(bin*step, step, rs)
	im = im[:n]
	for j := range re {
		ar, ai := rs[j]*(tRe[j]*cos[j]-tIm[j]*sin[j]), rs[j]*(tRe[j]*sin[j]+tIm[j]*cos[j])
		re[j], im[j] = re[j]*ar-im[j]*ai, re[j]*ai+im[j]*ar
	}
	return nil
}

// weigh multiplies values at omega0 + j step by the pulse's spectrum in s, by
// multiplication between fresh exponentials: both value and ratio of neighbours
// are exponentials of polynomials in j.
func (z pulse) weigh(omega0, step float64, values []float64) {
	unit := z.width * z.scale * math.Sqrt(2*math.Pi)
	a := step * z.width
	curve := math.Exp(-a * a)
	for start := 0; start < len(values); start += turnSpan {
		end := min(start+turnSpan, len(values))
		x := (omega0 + float64(start)*step - z.carrier) * z.width
		value, ratio := unit*math.Exp(-x*x/2), math.Exp(-a*(x+a/2))
		for j := start; j < end; j++ {
			values[j] *= value
			value *= ratio
			ratio *= curve
		}
	}
}

// transmissionFrom is the least |M omega| of the barrier's table of T.
const transmissionFrom = 1e-3

// fillTransmission writes the group's T at omega0 + j step, away from omega = 0.
//
// Beyond the barrier's table nothing is reflected, so |T|^2 = k/omega, and the
// phase is continued to a limit with one over the frequency, as a potential that
// does not depend on the frequency has it; value and slope join the table's.
// TestTransmissionBeyondTheTable measures it up to kerr.MaxFrequency: off by 0.001
// at spin 0 and by 0.06 at spin 0.95, in the part of a very short pulse that no
// barrier holds back.
//
// Below the table, where |T| is about 1e-6 or less, it falls with the l-th power of
// the frequency.
func fillTransmission(g *group, shift, omega0, step float64, re, im []float64) error {
	low, high := g.barrier.Range()
	edge, least := high, transmissionFrom
	if step < 0 {
		edge, least = low, -transmissionFrom
	}
	bins := func(limit float64) int {
		return int(math.Min(math.Max(math.Ceil((limit-omega0)/step), 0), float64(len(re))))
	}
	from, to := bins(least), bins(edge)
	if from < to {
		if err := g.barrier.Transmission(omega0+float64(from)*step, step, re[from:to], im[from:to]); err != nil {
			return err
		}
	}
	if from > 0 {
		at, _, err := transmissionNear(g, least, edge)
		if err != nil {
			return err
		}
		for j := range from {
			fall := math.Pow((omega0+float64(j)*step)/least, float64(g.l))
			re[j], im[j] = fall*real(at), fall*imag(at)
		}
	}
	if to < len(re) {
		at, slope, err := transmissionNear(g, edge, least)
		if err != nil {
			return err
		}
		limit := cmplx.Phase(at)
		for j := to; j < len(re); j++ {
			omega := omega0 + float64(j)*step
			size := math.Sqrt(math.Max(0, 1-shift/omega))
			im[j], re[j] = math.Sincos(limit + slope*edge*(1-edge/omega))
			re[j] *= size
			im[j] *= size
		}
	}
	return nil
}

// transmissionNear returns T at omega and the slope of its phase there, from a
// point nearby on the way to another frequency.
func transmissionNear(g *group, omega, towards float64) (at complex128, slope float64, err error) {
	step := math.Copysign(1e-4, towards-omega)
	var re, im [2]float64
	if err := g.barrier.Transmission(omega, step, re[:], im[:]); err != nil {
		return 0, 0, err
	}
	at = complex(re[0], im[0])
	return at, cmplx.Phase(complex(re[1], im[1])/at) / step, nil
}

// addSignal adds the signal whose complex e(t), see ringing, has the transform
// e at +omega and t at -omega: a mode's V is conj(e), its U is t.
func (h *Polarizations) addSignal(w wave, eRe, eIm, tRe, tIm []float64) {
	pr, pi := real(w.p)/2, imag(w.p)/2
	xr, xi := real(w.x)/2, imag(w.x)/2
	eIm, tRe, tIm = eIm[:len(eRe)], tRe[:len(eRe)], tIm[:len(eRe)]
	for j := range eRe {
		sumR, sumI, difR, difI := tRe[j]+eRe[j], tIm[j]-eIm[j], tRe[j]-eRe[j], tIm[j]+eIm[j]
		h.PlusRe[j] += pr*sumR - pi*difI
		h.PlusIm[j] += pr*sumI + pi*difR
		h.CrossRe[j] += xr*sumR - xi*difI
		h.CrossIm[j] += xr*sumI + xi*difR
	}
}
