package models

// Ringdown is the remnant with a horizon: a sum of Kerr quasi-normal modes that
// begin at start_time.
//
// Parameters: mass, spin, start_time, then amplitude and phase of each mode.
type Ringdown struct {
	grid       Grid
	start      float64 // s after the event time, where t = 0 lies
	lead       float64 // s
	ringing    *ringing
	parameters []Parameter
	cos, sin   []float64 // scratch space
}

var _ Model = (*Ringdown)(nil)

// describeRingdown lists the parameters that every model with modes begins with.
func describeRingdown(s Settings) ([]Parameter, error) {
	if _, err := checkAngular(s.Angular); err != nil {
		return nil, err
	}
	labels, err := parseModes(s.Modes)
	if err != nil {
		return nil, err
	}
	return append(remnantParameters(s), modeParameters(labels)...), nil
}

func newRingdown(s Settings) (Model, error) {
	parameters, err := describeRingdown(s)
	if err != nil {
		return nil, err
	}
	ringing, err := newRinging(s.Modes, s.Inclination, s.Angular)
	if err != nil {
		return nil, err
	}
	r := &Ringdown{grid: s.Grid, start: s.Start, lead: s.Lead, ringing: ringing, parameters: parameters}
	return r.Clone(), nil
}

// Parameters implements Model.
func (r *Ringdown) Parameters() []Parameter { return r.parameters }

// Derived implements Model.
func (r *Ringdown) Derived() []Parameter { return r.ringing.derived() }

// Derive implements Model.
func (r *Ringdown) Derive(theta, out []float64) error {
	if err := checkDomain(r.parameters, theta); err != nil {
		return err
	}
	return r.ringing.derive(theta[0], theta[1], out)
}

// Clone implements Model.
func (r *Ringdown) Clone() Model {
	twin := *r
	twin.cos, twin.sin = make([]float64, r.grid.Count), make([]float64, r.grid.Count)
	return &twin
}

// Fill implements Model.
func (r *Ringdown) Fill(theta []float64, h *Polarizations) error {
	if err := checkDomain(r.parameters, theta); err != nil {
		return err
	}
	h.clear()
	if err := r.ringing.addTo(h, theta, r.grid, r.lead); err != nil {
		return err
	}
	if late := theta[2] - r.start; late != 0 {
		h.delay(late, r.grid, r.cos, r.sin)
	}
	return nil
}
