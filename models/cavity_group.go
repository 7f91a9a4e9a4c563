package models

import (
	"fmt"
	"math"
	"strconv"

	"knell/internal/constants"
	"knell/models/kerr"
)

// group is the modes of one (l, m), which share a barrier and an echo sum.
type group struct {
	l, m    int
	modes   []int // indices of the modes, in their order
	barrier *kerr.Barrier
	spin    float64 // that the barrier is set to; below 0 before the first
}

// newGroups gathers modes by (l, m) in the order of their first modes, each group
// with a barrier of its own.
func newGroups(labels []modeLabel, parity kerr.Parity) ([]group, error) {
	var groups []group
	for i, label := range labels {
		known := false
		for j := range groups {
			if first := labels[groups[j].modes[0]]; first.l == label.l && first.m == label.m {
				groups[j].modes = append(groups[j].modes, i)
				known = true
			}
		}
		if known {
			continue
		}
		barrier, err := kerr.NewBarrier(label.l, label.m, parity)
		if err != nil {
			return nil, &SettingError{"modes", strconv.Quote(fmt.Sprintf("%d,%d,%d", label.l, label.m, label.n)), "a mode whose barrier is tabulated (" + err.Error() + ")"}
		}
		groups = append(groups, group{l: label.l, m: label.m, modes: []int{i}, barrier: barrier, spin: -1})
	}
	return groups, nil
}

// setSpin prepares the barrier, unless it is at that spin already.
func (g *group) setSpin(spin float64) error {
	if spin == g.spin {
		return nil
	}
	g.spin = -1
	if err := g.barrier.SetSpin(spin); err != nil {
		return err
	}
	g.spin = spin
	return nil
}

// reach is the frequencies between which the barrier reflects, within its table.
func (g *group) reach() (low, high float64) {
	low, high = g.barrier.Reach()
	least, most := g.barrier.Range()
	return math.Max(low, least), math.Min(high, most)
}

// place is one point of parameter space as the echo sums need it, in units of M.
type place struct {
	spin, rotation, temperature float64 // a, Omega_H, T_H
	x0, delay                   float64
	step                        float64 // of the grid, in M omega
	scale                       float64 // M in s
	// span is how many delays of data there are after the start; 0 where the
	// surface lies outside the light ring and there is no cavity.
	span     float64
	phase    float64
	law      []float64
	exciting []float64 // the excitation's parameters
}

// earlyArrival is how long before its nominal time an echo still matters, in M:
// what the surface reflects at some frequencies only is spread in time. An echo
// that is due within that time of the data's end counts, as far as the gate hides
// its later part: half of the gate for the lateness, half for the echo.
const earlyArrival = 100.0

// maxEchoes bounds the echoes that are counted. Only a surface within a millionth
// of the data's length of the light ring has more, and no cavity to speak of.
const maxEchoes = 1e6

func (c *Cavity) place(theta []float64, late float64) place {
	spin, lnDistance := theta[1], c.lnDistance(theta)
	p := place{
		spin: spin, rotation: kerr.HorizonFrequency(spin), temperature: kerr.HawkingTemperature(spin),
		x0: kerr.SurfaceTortoise(spin, lnDistance), delay: kerr.EchoDelay(spin, lnDistance),
		scale: theta[0] * constants.SolarMassSeconds,
		phase: theta[c.echoPhaseIndex], law: theta[c.lawIndex:c.excitationIndex], exciting: theta[c.excitationIndex:],
	}
	p.step = 2 * math.Pi * c.grid.Step * p.scale
	length := c.length + math.Min(c.spill/2, earlyArrival*p.scale)
	if delay := p.delay * p.scale; delay > 0 && length > late {
		p.span = math.Min((length-late)/delay, maxEchoes)
	}
	return p
}

// echoes is how many echoes arrive within the data.
func (p place) echoes() int { return int(p.span) }
