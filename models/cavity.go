package models

import (
	"math"
	"strconv"
	"strings"

	"knell/internal/constants"
	"knell/models/kerr"
)

// Cavity is the remnant with a partially reflecting surface: the ringdown's
// spectrum times the finite echo sum
//
//	1 + q + ... + q^N,   q(omega) = R(omega) Rs(k) exp(-2 i k x0),
//
// with R the barrier's reflection for waves from the horizon side, Rs the
// surface's reflectivity with its phase, x0 the surface's tortoise coordinate
// (below zero) and k = omega - m Omega_H. N is the number of echoes that arrive
// within the data: the closed form 1 / (1 - q) would wrap later ones around the
// segment and hide the ergoregion instability, |q| > 1. That is the cavity set
// ringing from the barrier; excitation.go has the other ways.
//
// Modes of one (l, m) share a barrier, a k and hence an echo sum; those of
// different (l, m) do not mix. A mode's resonance takes the sum at
// omega = 2 pi f > 0 and its tail the sum at omega < 0, which is the conjugate
// of that for -m at -omega with the echo phase turned round; the signal is real
// either way. (A phase that is the same at every frequency of a mode's complex
// amplitude is causal, one that changes its sign at omega = 0 is not. So the tail
// of a mode 2,-2,0, and the growth in it, meets the surface with the phase opposite
// to that which the resonance of 2,2,0 meets.) Where the barrier reflects less than
// 1e-8 the sum is 1.
//
// Parameters: mass, spin, start_time, amplitude and phase of each mode, offset,
// echo_phase, then those of the reflectivity law, then those of the excitation.
type Cavity struct {
	grid          Grid
	start, length float64
	spill         float64
	growing       [][2]int // see waves
	lead          float64
	ringing       *ringing
	law           reflectivity
	excitation    excitation
	parity        kerr.Parity
	parameters    []Parameter
	// Where theta holds the offset, the echo phase, the law's and the
	// excitation's parameters.
	offsetIndex, echoPhaseIndex, lawIndex, excitationIndex int

	// surface and its method value, for package kerr to ask.
	surface        *surface
	reflectivityAt func(k float64) float64

	groups   []group
	rs       []float64 // surface reflectivity
	rRe, rIm []float64 // the barrier's reflection, or its transmission
	eRe, eIm []float64 // echo sum at +omega
	tRe, tIm []float64 // echo sum at -omega
	cos, sin []float64 // phases
}

var (
	_ Model  = (*Cavity)(nil)
	_ Bender = (*Cavity)(nil)
)

func describeCavity(s Settings) ([]Parameter, error) {
	if s.Reflectivity == "" {
		return nil, &SettingError{"reflectivity", "nothing", "a law of the surface, one of " + strings.Join(ReflectivityNames(), ", ")}
	}
	law, err := findReflectivity(s.Reflectivity)
	if err != nil {
		return nil, err
	}
	excitation, err := parseExcitation(s.Excitation)
	if err != nil {
		return nil, err
	}
	if _, err := parseParity(s.Parity); err != nil {
		return nil, err
	}
	list, err := describeRingdown(s)
	if err != nil {
		return nil, err
	}
	list = append(list,
		Parameter{Name: "offset", Note: "log10 of the surface's proper distance from the would-be horizon in Planck lengths", Low: -40, High: 34},
		Parameter{Name: "echo_phase", Unit: "rad", Note: "phase of the surface's reflectivity", Low: 0, High: 2 * math.Pi, Periodic: true})
	list = append(list, law.parameters...)
	return append(list, excitation.parameters()...), nil
}

func parseParity(name string) (kerr.Parity, error) {
	switch name {
	case "", "odd":
		return kerr.Odd, nil
	case "even":
		return kerr.Even, nil
	}
	return kerr.Odd, &SettingError{"parity", strconv.Quote(name), `"odd" or "even"`}
}

func newCavity(s Settings) (Model, error) {
	parameters, err := describeCavity(s)
	if err != nil {
		return nil, err
	}
	checkLength(s)
	law, err := findReflectivity(s.Reflectivity)
	if err != nil {
		return nil, err
	}
	excitation, err := parseExcitation(s.Excitation)
	if err != nil {
		return nil, err
	}
	parity, err := parseParity(s.Parity)
	if err != nil {
		return nil, err
	}
	ringing, err := newRinging(s.Modes, s.Inclination, s.Angular)
	if err != nil {
		return nil, err
	}
	c := &Cavity{
		grid: s.Grid, start: s.Start, length: s.Length, spill: s.Spill, lead: s.Lead,
		ringing: ringing, law: law, excitation: excitation, parity: parity, parameters: parameters,
		offsetIndex: 3 + 2*len(ringing.tracks),
	}
	c.echoPhaseIndex = c.offsetIndex + 1
	c.lawIndex = c.echoPhaseIndex + 1
	c.excitationIndex = c.lawIndex + len(law.parameters)
	return c.prepared()
}

// prepared gives c barriers and scratch space of its own.
func (c *Cavity) prepared() (*Cavity, error) {
	groups, err := newGroups(c.ringing.labels, c.parity)
	if err != nil {
		return nil, err
	}
	c.groups = groups
	if c.excitation == fromInfall {
		// The barrier gets its transmission when first asked; not in Fill.
		var re, im [1]float64
		if err := groups[0].barrier.SetSpin(0); err != nil {
			return nil, err
		}
		if err := groups[0].barrier.Transmission(0.5, 1e-3, re[:], im[:]); err != nil {
			return nil, err
		}
	}
	c.growing = c.waves()
	c.surface = &surface{law: c.law}
	c.reflectivityAt = c.surface.at
	n := c.grid.Count
	c.rs, c.rRe, c.rIm = make([]float64, n), make([]float64, n), make([]float64, n)
	c.eRe, c.eIm = make([]float64, n), make([]float64, n)
	c.tRe, c.tIm = make([]float64, n), make([]float64, n)
	c.cos, c.sin = make([]float64, n), make([]float64, n)
	return c, nil
}

// Parameters implements Model.
func (c *Cavity) Parameters() []Parameter { return c.parameters }

// Derived implements Model.
func (c *Cavity) Derived() []Parameter {
	return append(c.ringing.derived(),
		Parameter{Name: "echo_delay", Unit: "s", Note: "time between echoes"},
		Parameter{Name: "growth_time", Unit: "s", Note: "e-folding time of the fastest growing cavity mode; +Inf is stable"})
}

// Derive implements Model.
func (c *Cavity) Derive(theta, out []float64) error {
	if err := checkDomain(c.parameters, theta); err != nil {
		return err
	}
	if err := c.ringing.derive(theta[0], theta[1], out); err != nil {
		return err
	}
	n := 2 * len(c.ringing.tracks)
	out[n], out[n+1] = c.echoDelay(theta), c.growthTime(theta)
	return nil
}

// Clone implements Model.
func (c *Cavity) Clone() Model {
	twin := *c
	clone, err := twin.prepared()
	if err != nil {
		// The same tables were loaded when c was built.
		panic("models: " + err.Error())
	}
	return clone
}

// Fill implements Model.
func (c *Cavity) Fill(theta []float64, h *Polarizations) error {
	if err := checkDomain(c.parameters, theta); err != nil {
		return err
	}
	h.clear()
	late := theta[2] - c.start
	var err error
	switch {
	case !c.law.reflects(theta[c.lawIndex:]):
		err = c.ringing.addTo(h, theta, c.grid, c.lead)
	case c.excitation == fromInfall:
		if err = c.ringing.addTo(h, theta, c.grid, c.lead); err == nil {
			err = c.addInfall(theta, c.place(theta, late), h)
		}
	default:
		err = c.addEchoes(theta, c.place(theta, late), h)
	}
	if err != nil {
		return err
	}
	if late != 0 {
		h.delay(late, c.grid, c.cos, c.sin)
	}
	return nil
}

// addEchoes adds the modes group by group, each times its group's echo sum.
func (c *Cavity) addEchoes(theta []float64, p place, h *Polarizations) error {
	for i := range c.groups {
		g := &c.groups[i]
		reach, err := c.fillSums(g, p)
		if err != nil {
			return err
		}
		for _, mode := range g.modes {
			w, err := c.ringing.wave(mode, theta[0], theta[1], theta[3+2*mode], theta[4+2*mode])
			if err != nil {
				return err
			}
			h.addEchoing(w, c.grid, c.eRe[:reach], c.eIm[:reach], c.tRe[:reach], c.tIm[:reach])
			h.add(w, c.grid, reach)
			// The echoes are those of the ringdown alone.
			if c.lead > 0 {
				h.addLead(w, c.grid, c.lead)
			}
		}
	}
	return nil
}

// lnDistance is the logarithm of the surface's proper distance in units of M.
func lnDistance(mass, offset float64) float64 {
	return offset*math.Ln10 + math.Log(constants.PlanckLength/(mass*constants.SolarMassMetres))
}

func (c *Cavity) lnDistance(theta []float64) float64 {
	return lnDistance(theta[0], theta[c.offsetIndex])
}

func (c *Cavity) echoDelay(theta []float64) float64 {
	return kerr.EchoDelay(theta[1], c.lnDistance(theta)) * theta[0] * constants.SolarMassSeconds
}
