package models

import (
	"fmt"
	"math"
	"strconv"

	"knell/models/kerr"
)

// Comb is a band of nearly equally spaced narrow lines: what a cavity rings like
// late, whatever it is made of. The lines stand at
//
//	psi(f_j) = (j + line_shift) line_spacing,  j any whole number,
//	psi(f) = f - line_stretch band_width (sqrt(1 + u^2) - 1),  u = (f - band_centre) / band_width,
//
// which is f_j = (j + line_shift) line_spacing without stretch. With it the
// spacing is line_spacing at the centre of the band, larger by line_stretch per
// band_width above it, and levels off outside the band. Each line has a full width
// of line_width at half its power. In closed form,
//
//	V(f) = B(f) (1 + q + ... + q^(N-1)),
//	q = exp(-(pi line_width + 2 pi i (psi - line_shift line_spacing)) / line_spacing),
//
// since without stretch the sum over all powers of q is 1/2 and the sum over all
// j of the Lorentzians line_spacing / (pi line_width + 2 pi i (f - f_j)). In time it
// is a train of N pulses, one every 1 / line_spacing, that decays as
// exp(-pi line_width t); N is the number that arrives within the data. The
// pulse's spectrum B is the envelope of the band: that of
//
//	(t/t_m)^3 exp(3 - 3 t/t_m) exp(-2 pi i band_centre t),  t > 0,
//	B(f) = (2 e^3 / 27) t_m / (1 + i (f - band_centre) / b)^4,  b = 3 / (2 pi t_m),
//
// with full width band_width at half power, 2 b sqrt(2^(1/4) - 1). The pulse
// begins with zero value, slope and curvature, and has its peak, 1, t_m later
// (0.415 / band_width). A Gaussian band would begin before the start, and a sum
// over Gaussian-weighted lines has no closed form: a band of 50 lines would cost
// ten times as much (BenchmarkFillComb: one line a fifth of what this takes in all).
//
// Stretched pulses are dispersed; those count of which the slowest part arrives
// within the data. What of a later pulse would come before the
// start is smaller than the pulse by exp(-2 pi band_width / line_spacing
// sqrt(1 - line_stretch^2)): nothing for a band of several lines.
//
// comb_amplitude is the strain amplitude of the first pulse at its peak,
// comb_phase the phase of its oscillation traced back to its beginning.
// Polarisations are those of l = m = 2 with the spherical factor -2Y_22 and its
// (2, -2) partner, as for a mode.
//
// With modes it is the ringdown and the comb; at comb_amplitude = 0 then the
// ringdown, bit for bit, and without modes zero.
//
// Parameters: with modes mass, spin, start_time and amplitude and phase of each
// mode, without them start_time; then those of combParameters.
type Comb struct {
	grid          Grid
	start, length float64
	lead          float64
	ringing       *ringing // nil without modes
	north, south  float64  // angular factors at the inclination and at pi minus it
	parameters    []Parameter
	startIndex    int
	ownIndex      int // of the first parameter of the comb itself
	sums          sums
}

var (
	_ Model  = (*Comb)(nil)
	_ Bender = (*Comb)(nil)
)

// The comb's own parameters, in this order from ownIndex on.
const (
	combAmplitude = iota
	combPhase
	combDelay
	lineSpacing
	lineShift
	lineWidth
	lineStretch
	bandCentre
	bandWidth
)

// maxStretch bounds line_stretch. The fastest parts of the pulses left out for
// their slowest parts arrive in the last 40 % of the data.
const maxStretch = 0.25

// maxFrequency bounds frequencies and widths in hertz.
const maxFrequency = 1e6

func combParameters() []Parameter {
	return []Parameter{
		combAmplitude: {Name: "comb_amplitude", Note: "strain amplitude of the first pulse at its peak", Low: 0, High: 1},
		combPhase:     {Name: "comb_phase", Unit: "rad", Note: "phase of the pulses' oscillation where they begin", Low: 0, High: 2 * math.Pi, Periodic: true},
		combDelay:     {Name: "comb_delay", Unit: "s", Note: "from start_time to the beginning of the first pulse", Low: 0, High: maxStart, Default: 0, HasDefault: true},
		lineSpacing:   {Name: "line_spacing", Unit: "Hz", Note: "from line to line", Low: 1e-4, High: maxFrequency},
		lineShift:     {Name: "line_shift", Note: "where the lines stand between the multiples of their spacing, in spacings", Low: 0, High: 1, Periodic: true},
		lineWidth:     {Name: "line_width", Unit: "Hz", Note: "full width of a line at half its power", Low: 0, High: maxFrequency},
		lineStretch:   {Name: "line_stretch", Note: "relative growth of the spacing per band_width above the band's centre", Low: -maxStretch, High: maxStretch, Default: 0, HasDefault: true},
		bandCentre:    {Name: "band_centre", Unit: "Hz", Note: "centre of the band of lines", Low: 0, High: maxFrequency},
		bandWidth:     {Name: "band_width", Unit: "Hz", Note: "full width of the band at half its power", Low: 1e-3, High: maxFrequency},
	}
}

func describeComb(s Settings) ([]Parameter, error) {
	if len(s.Modes) == 0 {
		if s.Angular != "" {
			return nil, &SettingError{"angular", strconv.Quote(s.Angular), "no such key without modes: the lines' factor is spherical"}
		}
		return append([]Parameter{startParameter(s, "where the comb begins, after the event time")}, combParameters()...), nil
	}
	list, err := describeRingdown(s)
	if err != nil {
		return nil, err
	}
	return append(list, combParameters()...), nil
}

func newComb(s Settings) (Model, error) {
	parameters, err := describeComb(s)
	if err != nil {
		return nil, err
	}
	checkLength(s)
	c := &Comb{grid: s.Grid, start: s.Start, length: s.Length, lead: s.Lead, parameters: parameters}
	c.ownIndex = len(parameters) - len(combParameters())
	if len(s.Modes) > 0 {
		if c.ringing, err = newRinging(s.Modes, s.Inclination, s.Angular); err != nil {
			return nil, err
		}
		c.startIndex = 2
	}
	for _, side := range []struct {
		factor *float64
		angle  float64
	}{{&c.north, s.Inclination}, {&c.south, math.Pi - s.Inclination}} {
		y, err := kerr.Spheroidal(2, 2, 0, side.angle)
		if err != nil {
			return nil, fmt.Errorf("models: inclination: %w", err)
		}
		*side.factor = real(y)
	}
	return c.Clone(), nil
}

// Parameters implements Model.
func (c *Comb) Parameters() []Parameter { return c.parameters }

// Derived implements Model.
func (c *Comb) Derived() []Parameter {
	var list []Parameter
	if c.ringing != nil {
		list = c.ringing.derived()
	}
	return append(list, Parameter{Name: "echo_delay", Unit: "s", Note: "time between pulses, one over line_spacing"})
}

// Derive implements Model.
func (c *Comb) Derive(theta, out []float64) error {
	if err := checkDomain(c.parameters, theta); err != nil {
		return err
	}
	if c.ringing != nil {
		if err := c.ringing.derive(theta[0], theta[1], out); err != nil {
			return err
		}
	}
	out[len(out)-1] = 1 / theta[c.ownIndex+lineSpacing]
	return nil
}

// Clone implements Model.
func (c *Comb) Clone() Model {
	twin := *c
	twin.sums = newSums(c.grid.Count)
	return &twin
}

// Bent implements Bender.
func (c *Comb) Bent() []int { return []int{c.ownIndex + lineShift} }

// Bend implements Bender. A change of the spacing moves the lines of the band by
// many times as much, as line_shift is counted from 0 Hz. The straight coordinate
// is the place of the lines against a fixed frequency in the band.
func (c *Comb) Bend(_ int, theta, centre []float64) float64 {
	return centre[c.ownIndex+bandCentre] / theta[c.ownIndex+lineSpacing]
}

// Fill implements Model.
func (c *Comb) Fill(theta []float64, h *Polarizations) error {
	if err := checkDomain(c.parameters, theta); err != nil {
		return err
	}
	h.clear()
	late := theta[c.startIndex] - c.start
	if c.ringing != nil {
		if err := c.ringing.addTo(h, theta, c.grid, c.lead); err != nil {
			return err
		}
	}
	own := theta[c.ownIndex:]
	if own[combAmplitude] != 0 {
		c.fillLines(own, late, h)
	}
	if late != 0 {
		h.delay(late, c.grid, c.sums.cos, c.sums.sin)
	}
	return nil
}

func (c *Comb) fillLines(own []float64, late float64, h *Polarizations) {
	t := train{
		first: 1, delay: own[combDelay], spacing: 1 / own[lineSpacing],
		damping:   math.Exp(-math.Pi * own[lineWidth] / own[lineSpacing]),
		pulseTurn: -2 * math.Pi * own[lineShift],
		stretch:   own[lineStretch], centre: own[bandCentre], scale: own[bandWidth],
	}
	// The slowest part of a pulse that counts arrives within the data.
	slowest := t.spacing * (1 + math.Abs(t.stretch))
	if t.count = arrivals(c.length-late, t.delay, slowest); t.count == 0 {
		return
	}
	c.sums.fill(t, c.grid)
	sin, cos := math.Sincos(own[combPhase])
	amplitude := complex(own[combAmplitude]*cos, own[combAmplitude]*sin)
	h.addBand(wave{
		omegaRe: 2 * math.Pi * own[bandCentre],
		omegaIm: -2 * math.Pi * own[bandWidth] / halfPowerWidth,
		p:       amplitude * complex(c.north+c.south, 0),
		x:       1i * amplitude * complex(c.north-c.south, 0),
	}, c.grid, &c.sums)
}

// halfPowerWidth is 2 sqrt(2^(1/4) - 1), the full width at half power of
// 1 / (1 + i x)^4.
var halfPowerWidth = 2 * math.Sqrt(math.Sqrt(math.Sqrt2)-1)

// addBand adds the transform of the pulse
//
//	Re(p (t/t_m)^3 exp(3 - 3 t/t_m) exp(-i omegaRe t)),  t_m = 3 / -omegaIm,
//
// multiplied by the sums: p U + conj(p) V as for a mode, with U and V of the form
// (6 e^3 / t_m^3) / z^4, z = -omegaIm + i (2 pi f +- omegaRe).
func (h *Polarizations) addBand(w wave, g Grid, s *sums) {
	beta := -w.omegaIm
	// 6 e^3 / t_m^3 = (6 e^3 / 27) beta^3; half of it, as p and x are halved, over
	// beta^4, as z is taken in units of beta.
	scale := 3 * math.Exp(3) / 27 / beta
	pr, pi := real(w.p)*scale, imag(w.p)*scale
	xr, xi := real(w.x)*scale, imag(w.x)*scale
	centre := w.omegaRe / beta
	step := 2 * math.Pi * g.Step / beta
	n := g.Count
	plusRe, plusIm, crossRe, crossIm := h.PlusRe[:n], h.PlusIm[:n], h.CrossRe[:n], h.CrossIm[:n]
	vRe, vIm, uRe, uIm := s.vRe[:n], s.vIm[:n], s.uRe[:n], s.uIm[:n]
	for j := range plusRe {
		x := float64(g.First+j) * step
		near, far := x-centre, x+centre
		// 1/z = (1 - i near) / (1 + near^2), then its fourth power.
		nearSquare, farSquare := 1+near*near, 1+far*far
		both := 1 / (nearSquare * farSquare)
		ar, br := both*farSquare, both*nearSquare
		ai, bi := -ar*near, -br*far
		ar, ai = ar*ar-ai*ai, 2*ar*ai
		ar, ai = ar*ar-ai*ai, 2*ar*ai
		br, bi = br*br-bi*bi, 2*br*bi
		br, bi = br*br-bi*bi, 2*br*bi
		vr, vi := ar*vRe[j]-ai*vIm[j], ar*vIm[j]+ai*vRe[j]
		ur, ui := br*uRe[j]-bi*uIm[j], br*uIm[j]+bi*uRe[j]
		sumR, sumI, difR, difI := ur+vr, ui+vi, ur-vr, ui-vi
		plusRe[j] += pr*sumR - pi*difI
		plusIm[j] += pr*sumI + pi*difR
		crossRe[j] += xr*sumR - xi*difI
		crossIm[j] += xr*sumI + xi*difR
	}
}
