package event

import (
	"fmt"
	"math"

	"knell/likelihood"
	"knell/models"
	"knell/priors"
	"knell/sampler"
)

// hypothesis is a model with its priors, ready to be compared with data.
type hypothesis struct {
	Hypothesis
	model      models.Model
	set        *priors.Set
	likelihood *likelihood.Gaussian
	periodic   []bool // by coordinate of the unit cube
	bends      []bend
	centre     []float64 // the prior's middle, for the bends
	allowed    allowed
}

// bend is a parameter that the sampler sees in a straight coordinate.
type bend struct {
	index, parameter, coordinate int     // in Bent, theta and the unit cube
	width                        float64 // of the prior's support
}

// newHypothesis builds the model and orders the priors as the model's
// parameters are.
func newHypothesis(h Hypothesis, c *Config, g *likelihood.Gaussian) (*hypothesis, error) {
	settings := modelSettings(h, c)
	// A signal that is known to begin in the gate may rise in what of the gate lies
	// before. One whose start is free may begin after it, where a rise would be seen.
	if start, ok := h.Priors["start_time"]; ok {
		if low, high := start.Prior.Support(); low == high && high <= c.Analysis.Start {
			settings.Lead = c.Analysis.Gate - (c.Analysis.Start - high)
		}
	}
	model, err := models.New(settings)
	if err != nil {
		return nil, fmt.Errorf("hypothesis %s: %w", h.Name, err)
	}
	var names []string
	var list []priors.Prior
	for _, p := range model.Parameters() {
		names = append(names, p.Name)
		list = append(list, h.Priors[p.Name].Prior)
	}
	set, err := priors.NewSet(names, list)
	if err != nil {
		return nil, fmt.Errorf("hypothesis %s: %w", h.Name, err)
	}
	if set.Dim() == 0 {
		return nil, &InputError{File: c.File, Line: c.lines.line("prior"), Key: "hypothesis " + h.Name, Got: "no free parameter", Want: "at least one prior that is not fixed"}
	}
	out := &hypothesis{Hypothesis: h, model: model, set: set, likelihood: g}
	for i, p := range model.Parameters() {
		if low, high := list[i].Support(); low != high {
			out.periodic = append(out.periodic, p.Periodic && isFullCircle(list[i], p))
		}
	}
	out.straighten()
	if err := out.restrict(c); err != nil {
		return nil, err
	}
	return out, nil
}

// straighten finds the parameters that the model bends and whose priors have a
// finite support to wrap around.
func (h *hypothesis) straighten() {
	bender, ok := h.model.(models.Bender)
	if !ok {
		return
	}
	h.centre = make([]float64, h.set.Len())
	middle := make([]float64, h.set.Dim())
	for i := range middle {
		middle[i] = 0.5
	}
	h.set.Map(middle, h.centre)
	for i, parameter := range bender.Bent() {
		coordinate := h.set.FreeIndex(h.set.Names()[parameter])
		low, high := h.set.Prior(parameter).Support()
		if coordinate < 0 || math.IsInf(high-low, 0) {
			continue
		}
		h.bends = append(h.bends, bend{i, parameter, coordinate, high - low})
		h.periodic[coordinate] = true
	}
}

// place maps a point of the unit cube to the parameters. A bent parameter's
// coordinate is shifted, around the unit interval, by an amount that depends on
// parameters placed before it; that keeps the measure, whatever the shift is.
func (h *hypothesis) place(u, theta []float64) {
	h.set.Map(u, theta)
	for _, b := range h.bends {
		x := u[b.coordinate] + h.model.(models.Bender).Bend(b.index, theta, h.centre)/b.width
		theta[b.parameter] = h.set.Prior(b.parameter).Quantile(x - math.Floor(x))
	}
}

// isFullCircle says whether the prior treats the ends of a periodic parameter as
// one place: a constant density over the whole of it.
func isFullCircle(p priors.Prior, of models.Parameter) bool {
	low, high := p.Support()
	if low != of.Low || high != of.High {
		return false
	}
	density := p.LogDensity(low + 0.1*(high-low))
	return math.Abs(p.LogDensity(low+0.6*(high-low))-density) < 1e-12 && math.Abs(p.LogDensity(low+0.9*(high-low))-density) < 1e-12
}

// target is a hypothesis as the sampler sees it, for one goroutine.
type target struct {
	*hypothesis
	model   models.Model     // its own clone
	stabler models.Stability // the same, if it can be unstable
	worker  *likelihood.Worker
	theta   []float64
	h       *models.Polarizations
}

var _ sampler.Target = (*target)(nil)

func (h *hypothesis) newTarget() (sampler.Target, error) { return h.target(), nil }

func (h *hypothesis) target() *target {
	t := &target{
		hypothesis: h,
		model:      h.model.Clone(),
		worker:     h.likelihood.Worker(),
		theta:      make([]float64, len(h.model.Parameters())),
		h:          models.NewPolarizations(h.likelihood.Grid().Count),
	}
	t.stabler, _ = t.model.(models.Stability)
	return t
}

// Dim implements sampler.Target.
func (t *target) Dim() int { return t.set.Dim() }

// LogLikelihood implements sampler.Target: ln L over noise alone, in nats.
func (t *target) LogLikelihood(u []float64) (float64, error) {
	t.place(u, t.theta)
	return t.at(t.theta)
}

func (t *target) at(theta []float64) (float64, error) {
	if t.Hypothesis.Stable {
		if stable, err := t.stabler.Stable(theta); err != nil || !stable {
			return math.Inf(-1), err
		}
	}
	if err := t.model.Fill(theta, t.h); err != nil {
		return 0, err
	}
	return t.worker.LogRatio(t.h), nil
}
