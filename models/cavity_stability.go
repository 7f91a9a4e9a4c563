package models

import (
	"math"

	"knell/internal/constants"
	"knell/models/kerr"
)

// Stability is a model that can be unstable: one whose echoes may each be louder
// than the one before.
type Stability interface {
	// Stable says whether no echo at theta is louder than the one before it, at
	// any frequency: the largest |Rs R| over all frequencies is not above 1.
	Stable(theta []float64) (bool, error)
}

var _ Stability = (*Cavity)(nil)

// surface is the reflectivity at one point of parameter space as a function of k,
// in units of M. It belongs to one Cavity, so that asking it allocates nothing.
type surface struct {
	law         reflectivity
	values      []float64
	temperature float64
	value       [1]float64
}

func (s *surface) at(k float64) float64 {
	s.law.fill(s.values, s.temperature, k, 0, s.value[:])
	return s.value[0]
}

// setSurface prepares c.surface for theta.
func (c *Cavity) setSurface(theta []float64) {
	c.surface.values, c.surface.temperature = theta[c.lawIndex:c.excitationIndex], kerr.HawkingTemperature(theta[1])
}

// loudestWave is the l and |m| that a barrier amplifies most, at every spin.
const loudestWave = 2

// waves lists the (l, m) whose echoes may grow: those of the modes, and the one
// that is amplified most, whether or not the signal has it. The surface reflects
// every wave, and noise enough of each is there to grow from.
func (c *Cavity) waves() [][2]int {
	var list [][2]int
	loudest := false
	for i := range c.groups {
		l, m := c.groups[i].l, c.groups[i].m
		list = append(list, [2]int{l, m})
		loudest = loudest || l == loudestWave && (m == loudestWave || m == -loudestWave)
	}
	if !loudest {
		list = append(list, [2]int{loudestWave, loudestWave})
	}
	return list
}

// Stable implements Stability, in some µs for each of waves. It is
// sufficient for a cavity without a growing mode, whatever the surface's place and
// phase, and not necessary: the loudest frequency may lie between two modes.
// The (l, -m) partners are as stable as the modes. The first call of an (l, m)
// computes a table, which takes some tens of milliseconds.
func (c *Cavity) Stable(theta []float64) (bool, error) {
	if !c.law.reflects(theta[c.lawIndex:]) {
		return true, nil
	}
	c.setSurface(theta)
	for _, w := range c.growing {
		gain, _, err := kerr.MaxLoop(w[0], w[1], theta[1], c.reflectivityAt)
		if err != nil || gain > 1 {
			return false, err
		}
	}
	return true, nil
}

// growthTime is the e-folding time in s of the fastest growing mode of the cavity
// over all of waves: +Inf if none grows, NaN where kerr.FastestGrowth has no answer,
// which is a surface so near to the light ring that there is no cavity. Then the
// rest of what is derived still stands.
func (c *Cavity) growthTime(theta []float64) float64 {
	if !c.law.reflects(theta[c.lawIndex:]) {
		return math.Inf(1)
	}
	c.setSurface(theta)
	x0 := kerr.SurfaceTortoise(theta[1], c.lnDistance(theta))
	rate := 0.0
	for _, w := range c.growing {
		omega, growing, err := kerr.FastestGrowth(w[0], w[1], c.parity, theta[1], x0, theta[c.echoPhaseIndex], c.reflectivityAt)
		if err != nil {
			return math.NaN()
		}
		if growing {
			rate = math.Max(rate, imag(omega))
		}
	}
	return theta[0] * constants.SolarMassSeconds / rate
}
