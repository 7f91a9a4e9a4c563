package models

import (
	"math"

	"knell/internal/constants"
)

// Pulses is a ringdown followed by copies of itself, for which no surface is
// modelled: the n-th copy, n = 1, 2, ..., begins at
//
//	t_n = pulse_delay + (n-1) pulse_delay spacing_ratio
//
// after the ringdown, with every mode's amplitude multiplied by
//
//	pulse_amplitude pulse_damping^(n-1) exp(i n pulse_turn)
//
// and with the smooth rise (1 - exp(-t'/pulse_rise))^2, t' = t - t_n: value and
// slope begin at zero. A turn of pi flips every other copy. Copies that would
// begin after the data end are left out.
//
// At pulse_amplitude = 0 the spectrum is the ringdown's, bit for bit.
//
// Parameters: mass, spin, start_time, amplitude and phase of each mode, then
// pulse_delay, spacing_ratio, pulse_amplitude, pulse_damping, pulse_turn and
// pulse_rise.
type Pulses struct {
	grid          Grid
	start, length float64
	lead          float64
	ringing       *ringing
	parameters    []Parameter
	sums          sums
}

var (
	_ Model  = (*Pulses)(nil)
	_ Bender = (*Pulses)(nil)
)

func describePulses(s Settings) ([]Parameter, error) {
	list, err := describeRingdown(s)
	if err != nil {
		return nil, err
	}
	return append(list,
		Parameter{Name: "pulse_delay", Unit: "s", Note: "from the start of the ringdown to the first copy", Low: 1e-5, High: maxStart},
		Parameter{Name: "spacing_ratio", Note: "time between later copies over that to the first", Low: 1e-3, High: 1e3, Default: 1, HasDefault: true},
		Parameter{Name: "pulse_amplitude", Note: "amplitude of the first copy over the ringdown's", Low: 0, High: 1e3},
		Parameter{Name: "pulse_damping", Note: "amplitude of each later copy over the one before", Low: 0, High: 1},
		Parameter{Name: "pulse_turn", Unit: "rad", Note: "turn of the phase from each copy to the next; pi flips", Low: 0, High: 2 * math.Pi, Periodic: true, Default: math.Pi, HasDefault: true},
		Parameter{Name: "pulse_rise", Unit: "s", Note: "time in which a copy rises; 0 begins with a jump", Low: 0, High: maxStart, Default: 0, HasDefault: true},
	), nil
}

func newPulses(s Settings) (Model, error) {
	parameters, err := describePulses(s)
	if err != nil {
		return nil, err
	}
	checkLength(s)
	ringing, err := newRinging(s.Modes, s.Inclination, s.Angular)
	if err != nil {
		return nil, err
	}
	p := &Pulses{grid: s.Grid, start: s.Start, length: s.Length, lead: s.Lead, ringing: ringing, parameters: parameters}
	return p.Clone(), nil
}

// Parameters implements Model.
func (p *Pulses) Parameters() []Parameter { return p.parameters }

// Derived implements Model.
func (p *Pulses) Derived() []Parameter {
	return append(p.ringing.derived(), Parameter{Name: "echo_delay", Unit: "s", Note: "time between later copies"})
}

// Derive implements Model.
func (p *Pulses) Derive(theta, out []float64) error {
	if err := checkDomain(p.parameters, theta); err != nil {
		return err
	}
	if err := p.ringing.derive(theta[0], theta[1], out); err != nil {
		return err
	}
	at := p.ownIndex()
	out[len(out)-1] = theta[at] * theta[at+1]
	return nil
}

// Clone implements Model.
func (p *Pulses) Clone() Model {
	twin := *p
	twin.sums = newSums(p.grid.Count)
	return &twin
}

// ownIndex is where pulse_delay stands; the others follow it.
func (p *Pulses) ownIndex() int { return 3 + 2*len(p.ringing.tracks) }

// Bent implements Bender.
func (p *Pulses) Bent() []int { return []int{p.ownIndex() + 4} }

// Bend implements Bender. The data know a copy's phase at a fixed time, that is
// its turn plus its delay times the mode's frequency.
func (p *Pulses) Bend(_ int, theta, centre []float64) float64 {
	omega, _, _, err := p.ringing.tracks[0].At(centre[1])
	if err != nil {
		return 0
	}
	return -real(omega) / (centre[0] * constants.SolarMassSeconds) * theta[p.ownIndex()]
}

// Fill implements Model.
func (p *Pulses) Fill(theta []float64, h *Polarizations) error {
	if err := checkDomain(p.parameters, theta); err != nil {
		return err
	}
	h.clear()
	late := theta[2] - p.start
	own := theta[3+2*len(p.ringing.tracks):]
	delay, amplitude, turn, rise := own[0], own[2], own[4], own[5]
	t := train{
		first: amplitude, delay: delay, startTurn: turn,
		damping: own[3], spacing: delay * own[1], pulseTurn: turn,
	}
	if amplitude != 0 {
		t.count = arrivals(p.length-late, delay, t.spacing)
	}
	if t.count > 0 {
		p.sums.fill(t, p.grid)
	}
	for i := range p.ringing.tracks {
		w, err := p.ringing.wave(i, theta[0], theta[1], theta[3+2*i], theta[4+2*i])
		if err != nil {
			return err
		}
		h.add(w, p.grid, 0)
		// The copies are those of the ringdown alone.
		if p.lead > 0 {
			h.addLead(w, p.grid, p.lead)
		}
		if t.count > 0 {
			h.addPulses(w, p.grid, rise, &p.sums)
		}
	}
	if late != 0 {
		h.delay(late, p.grid, p.sums.cos, p.sums.sin)
	}
	return nil
}

// addPulses adds the transform of a mode with a rise of tau, multiplied by the
// sums. The mode's U and V are 1/z with z = gamma + i (2 pi f +- omega_R); of
// (1 - exp(-t/tau))^2 times the mode they are
//
//	1/z - 2/(z + 1/tau) + 1/(z + 2/tau) = 1 / (z (1 + z tau) (1 + z tau/2)),
//
// of which the second form is good at every tau, zero included.
func (h *Polarizations) addPulses(w wave, g Grid, tau float64, s *sums) {
	pr, pi := real(w.p)/2, imag(w.p)/2
	xr, xi := real(w.x)/2, imag(w.x)/2
	gamma := -w.omegaIm
	half := tau / 2
	// 1 + z tau and 1 + z tau/2 have constant real parts.
	one, two := 1+gamma*tau, 1+gamma*half
	step := 2 * math.Pi * g.Step
	n := g.Count
	plusRe, plusIm, crossRe, crossIm := h.PlusRe[:n], h.PlusIm[:n], h.CrossRe[:n], h.CrossIm[:n]
	vRe, vIm, uRe, uIm := s.vRe[:n], s.vIm[:n], s.uRe[:n], s.uIm[:n]
	for j := range plusRe {
		angular := float64(g.First+j) * step
		near, far := angular-w.omegaRe, angular+w.omegaRe
		// (1 + z tau)(1 + z tau/2), times z
		ar, ai := one*two-near*tau*near*half, near*(one*half+two*tau)
		ar, ai = ar*gamma-ai*near, ar*near+ai*gamma
		br, bi := one*two-far*tau*far*half, far*(one*half+two*tau)
		br, bi = br*gamma-bi*far, br*far+bi*gamma
		// One division for both reciprocals.
		aSquare, bSquare := ar*ar+ai*ai, br*br+bi*bi
		both := 1 / (aSquare * bSquare)
		va, ub := both*bSquare, both*aSquare
		ar, ai, br, bi = ar*va, -ai*va, br*ub, -bi*ub
		vr, vi := ar*vRe[j]-ai*vIm[j], ar*vIm[j]+ai*vRe[j]
		ur, ui := br*uRe[j]-bi*uIm[j], br*uIm[j]+bi*uRe[j]
		sumR, sumI, difR, difI := ur+vr, ui+vi, ur-vr, ui-vi
		plusRe[j] += pr*sumR - pi*difI
		plusIm[j] += pr*sumI + pi*difR
		crossRe[j] += xr*sumR - xi*difI
		crossIm[j] += xr*sumI + xi*difR
	}
}
