package models

import "knell/models/kerr"

// Bent implements Bender.
func (c *Cavity) Bent() []int { return []int{c.offsetIndex, c.echoPhaseIndex} }

// Bend implements Bender. The offset is counted from that which gives the
// centre's echo delay. The echo phase is counted from the phase that the round
// trip, 2 k x0, has at one frequency in hertz, the first mode's at the centre.
// (At the mode's own frequency at theta it would still wind: some hertz of
// uncertainty times a third of a second are turns.) Groups of another m turn at
// another rate with the spin; the first mode, which should be the loudest, is the
// one made straight.
func (c *Cavity) Bend(i int, theta, centre []float64) float64 {
	mass, spin := theta[0], theta[1]
	if i == 0 {
		// The delay is linear in the offset.
		at := func(offset float64) float64 {
			return kerr.EchoDelay(spin, lnDistance(mass, offset)) * mass
		}
		zero := at(0)
		return (kerr.EchoDelay(centre[1], c.lnDistance(centre))*centre[0] - zero) / (at(1) - zero)
	}
	omega, _, _, err := c.ringing.tracks[0].At(centre[1])
	if err != nil {
		return 0
	}
	m := float64(c.ringing.labels[0].m)
	k := real(omega)*mass/centre[0] - m*kerr.HorizonFrequency(spin)
	return 2 * k * kerr.SurfaceTortoise(spin, c.lnDistance(theta))
}
