package models

import (
	"fmt"
	"math"
	"math/bits"
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
// segment and hide the ergoregion instability, |q| > 1.
//
// The mode's resonance takes the sum at omega = 2 pi f > 0 and its tail the sum
// at omega < 0, which is the conjugate of that for m = -2 at -omega; the signal
// is real either way.
//
// Only l = m = 2 modes: the barrier is tabulated for them. Beyond the table's
// reach |R| < 1e-8 and the sum is 1.
//
// Parameters: mass, spin, start_time, amplitude and phase of each mode, offset,
// echo_phase, then those of the reflectivity law.
type Cavity struct {
	grid          Grid
	start, length float64
	lead          float64
	ringing       *ringing
	law           reflectivity
	parity        kerr.Parity
	parameters    []Parameter

	barrier        *kerr.Barrier
	rs             []float64 // surface reflectivity
	rRe, rIm       []float64 // barrier reflection
	eRe, eIm       []float64 // echo sum at +omega
	tRe, tIm       []float64 // echo sum at -omega
	cos, sin       []float64 // phases
	offsetIndex    int
	echoPhaseIndex int
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
	if _, err := parseParity(s.Parity); err != nil {
		return nil, err
	}
	if _, err := checkAngular(s.Angular); err != nil {
		return nil, err
	}
	labels, err := parseModes(s.Modes)
	if err != nil {
		return nil, err
	}
	for _, label := range labels {
		if label.l != 2 || label.m != 2 {
			return nil, &SettingError{"modes", fmt.Sprintf(`"%d,%d,%d"`, label.l, label.m, label.n), "l = m = 2: the barrier of a cavity is tabulated for that"}
		}
	}
	list := append(remnantParameters(s), modeParameters(labels)...)
	list = append(list,
		Parameter{Name: "offset", Note: "log10 of the surface's proper distance from the would-be horizon in Planck lengths", Low: -40, High: 34},
		Parameter{Name: "echo_phase", Unit: "rad", Note: "phase of the surface's reflectivity", Low: 0, High: 2 * math.Pi, Periodic: true})
	return append(list, law.parameters...), nil
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
	if !(s.Length > 0) {
		panic(fmt.Sprintf("models: %g s of data after the analysis start", s.Length))
	}
	law, err := findReflectivity(s.Reflectivity)
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
		grid: s.Grid, start: s.Start, length: s.Length, lead: s.Lead,
		ringing: ringing, law: law, parity: parity, parameters: parameters,
		offsetIndex: 3 + 2*len(ringing.tracks), echoPhaseIndex: 4 + 2*len(ringing.tracks),
	}
	return c.prepared()
}

// prepared gives c scratch space of its own.
func (c *Cavity) prepared() (*Cavity, error) {
	barrier, err := kerr.NewBarrier(2, 2, c.parity)
	if err != nil {
		return nil, err
	}
	n := c.grid.Count
	c.barrier = barrier
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
	return append(c.ringing.derived(), Parameter{Name: "echo_delay", Unit: "s", Note: "time between echoes"})
}

// Derive implements Model.
func (c *Cavity) Derive(theta, out []float64) error {
	if err := c.ringing.derive(theta[0], theta[1], out); err != nil {
		return err
	}
	out[len(out)-1] = c.echoDelay(theta)
	return nil
}

// Clone implements Model.
func (c *Cavity) Clone() Model {
	twin := *c
	clone, err := twin.prepared()
	if err != nil {
		// The same table was loaded when c was built.
		panic("models: " + err.Error())
	}
	return clone
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

// Bent implements Bender.
func (c *Cavity) Bent() []int { return []int{c.offsetIndex, c.echoPhaseIndex} }

// Bend implements Bender. The offset is counted from that which gives the
// centre's echo delay. The echo phase is counted from the phase that the round
// trip, 2 k x0, has at one frequency in hertz, the first mode's at the centre.
// (At the mode's own frequency at theta it would still wind: some hertz of
// uncertainty times a third of a second are turns.)
func (c *Cavity) Bend(i int, theta, centre []float64) float64 {
	mass, spin := theta[0], theta[1]
	if i == 0 {
		// The delay is linear in the offset.
		at := func(offset float64) float64 {
			return kerr.EchoDelay(spin, lnDistance(mass, offset)) * mass
		}
		zero := at(0)
		return (c.echoDelay(centre)/constants.SolarMassSeconds - zero) / (at(1) - zero)
	}
	omega, _, _, err := c.ringing.tracks[0].At(centre[1])
	if err != nil {
		return 0
	}
	k := real(omega)*mass/centre[0] - 2*kerr.HorizonFrequency(spin)
	return 2 * k * kerr.SurfaceTortoise(spin, c.lnDistance(theta))
}

// Fill implements Model.
func (c *Cavity) Fill(theta []float64, h *Polarizations) error {
	h.clear()
	mass, spin := theta[0], theta[1]
	late := theta[2] - c.start
	law := theta[c.echoPhaseIndex+1:]
	// Without reflection the signal is the ringdown's, bit for bit.
	reach := 0
	if law[0] != 0 {
		var err error
		if reach, err = c.echoes(theta, late); err != nil {
			return err
		}
	}
	for i := range c.ringing.tracks {
		w, err := c.ringing.wave(i, mass, spin, theta[3+2*i], theta[4+2*i])
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
	if late != 0 {
		h.delay(late, c.grid, c.cos, c.sin)
	}
	return nil
}

// echoes fills the echo sums at both signs of the frequency and returns how many
// bins, from the first on, they differ from one in.
func (c *Cavity) echoes(theta []float64, late float64) (int, error) {
	mass, spin := theta[0], theta[1]
	if err := c.barrier.SetSpin(spin); err != nil {
		return 0, err
	}
	scale := mass * constants.SolarMassSeconds
	lnDistance := c.lnDistance(theta)
	delay := kerr.EchoDelay(spin, lnDistance) * scale
	terms := 1
	if delay > 0 && c.length > late {
		terms += int(math.Min((c.length-late)/delay, 1e6))
	}
	e := echoSum{
		shift: 2 * kerr.HorizonFrequency(spin), temperature: kerr.HawkingTemperature(spin),
		x0: kerr.SurfaceTortoise(spin, lnDistance), terms: uint(terms),
		phase: theta[c.echoPhaseIndex], law: theta[c.echoPhaseIndex+1:],
	}
	step := 2 * math.Pi * c.grid.Step * scale
	low, high := c.barrier.Reach()
	ahead, behind := c.binsBelow(high/step), c.binsBelow(-low/step)
	c.fillEchoSum(e, step, c.eRe[:ahead], c.eIm[:ahead])
	c.fillEchoSum(e, -step, c.tRe[:behind], c.tIm[:behind])
	reach := max(ahead, behind)
	fillOnes(c.eRe[ahead:reach], c.eIm[ahead:reach])
	fillOnes(c.tRe[behind:reach], c.tIm[behind:reach])
	return reach, nil
}

// binsBelow is how many bins of the grid lie below a multiple of its step.
func (c *Cavity) binsBelow(multiple float64) int {
	return max(0, min(int(math.Ceil(multiple))-c.grid.First, c.grid.Count))
}

func fillOnes(re, im []float64) {
	for j := range re {
		re[j], im[j] = 1, 0
	}
}

// echoSum is what the sum needs to know at one point of parameter space, in
// units of M.
type echoSum struct {
	shift, temperature, x0 float64
	terms                  uint // N + 1
	phase                  float64
	law                    []float64
}

// fillEchoSum writes 1 + q + ... + q^N at omega_j = step (First + j).
func (c *Cavity) fillEchoSum(e echoSum, step float64, re, im []float64) {
	n := len(re)
	if n == 0 {
		return
	}
	first := step * float64(c.grid.First)
	rRe, rIm, rs := c.rRe[:n], c.rIm[:n], c.rs[:n]
	cos, sin := c.cos[:n], c.sin[:n]
	c.barrier.Reflection(first, step, rRe, rIm)
	c.law.fill(e.law, e.temperature, first-e.shift, step, rs)
	fillTurns(e.phase, -2*e.x0*step, float64(c.grid.First)-e.shift/step, cos, sin)
	im = im[:n]
	for j := range re {
		qr := rs[j] * (rRe[j]*cos[j] - rIm[j]*sin[j])
		qi := rs[j] * (rRe[j]*sin[j] + rIm[j]*cos[j])
		switch square := qr*qr + qi*qi; {
		case square < 1e-32 || e.terms == 1:
			re[j], im[j] = 1, 0
		case square < 1e-8 && e.terms >= 4:
			// To q^3; the next is below 1e-16.
			sr, si := 1+qr, qi
			sr, si = 1+qr*sr-qi*si, qr*si+qi*sr
			re[j], im[j] = 1+qr*sr-qi*si, qr*si+qi*sr
		default:
			re[j], im[j] = geometricSum(qr, qi, e.terms)
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
		sr, si = sr+sr*pr-si*pi, si+sr*pi+si*pr
		pr, pi = pr*pr-pi*pi, 2*pr*pi
		if terms>>b&1 == 1 {
			sr, si = 1+sr*qr-si*qi, sr*qi+si*qr
			pr, pi = pr*qr-pi*qi, pr*qi+pi*qr
		}
	}
	return sr, si
}
