package validation

import (
	"fmt"
	"math"

	"gonum.org/v1/gonum/dsp/fourier"

	"knell/internal/random"
	"knell/likelihood"
	"knell/likelihood/strain"
	"knell/models"
	"knell/priors"
	"knell/sampler"
)

// Problem is a hypothesis with data of its own, as a target on the unit cube.
// It is read-only once built.
type Problem struct {
	model      models.Model
	set        *priors.Set
	likelihood *likelihood.Gaussian
	truth      []float64 // theta of the injected signal
	snr        float64
}

// The cavity problem: a remnant of twice the usual mass, so that a low sample
// rate holds its mode (123 Hz, 8 ms), and a surface far enough out that three
// echoes fall within one second of data.
const (
	problemRate     = 512.0 // Hz
	problemDuration = 1.0   // s
	problemGate     = 48    // samples
	problemLow      = 70.0  // Hz
	problemHigh     = 200.0 // Hz
	problemCurve    = "second-generation-broadband"
)

// NewCavityProblem returns a cavity with constant reflectivity seen at one site
// in synthetic noise with an injected signal, gate on. Mass, amplitude, echo
// phase and reflectivity are free (in this order in the unit cube, the echo
// phase periodic), spin, phase, start and offset are known. A call of the
// likelihood takes some tens of microseconds, most of it the barrier's table.
func NewCavityProblem(seed uint64) (*Problem, error) {
	n := int(problemRate * problemDuration)
	first, last := int(problemLow*problemDuration), int(problemHigh*problemDuration)
	grid := models.Grid{First: first, Count: last - first + 1, Step: 1 / problemDuration}
	model, err := models.New(models.Settings{
		Model: "cavity", Modes: []string{"2,2,0"}, Reflectivity: "constant",
		Grid: grid, Inclination: 0.4, Length: problemDuration - problemGate/problemRate,
	})
	if err != nil {
		return nil, err
	}
	p := &Problem{model: model}
	var names []string
	var list []priors.Prior
	for _, q := range []struct {
		name             string
		truth, low, high float64 // low = high: known
	}{
		{"mass", 136, 131, 141},
		{"spin", 0.69, 0, 0},
		{"start_time", 0, 0, 0},
		{"amplitude_220", 1e-21, 0, 2e-21},
		{"phase_220", 1.3, 0, 0},
		{"offset", 22, 0, 0},
		{"echo_phase", 2, 0, 2 * math.Pi},
		{"reflectivity", 0.6, 0, 1},
	} {
		var prior priors.Prior
		if q.low == q.high {
			prior, err = priors.NewFixed(q.truth)
		} else {
			prior, err = priors.NewUniform(q.low, q.high)
		}
		if err != nil {
			return nil, fmt.Errorf("validation: %s: %w", q.name, err)
		}
		if i := len(names); i >= len(model.Parameters()) || model.Parameters()[i].Name != q.name {
			return nil, fmt.Errorf("validation: parameter %d of the cavity is not %s", i, q.name)
		}
		names, list, p.truth = append(names, q.name), append(list, prior), append(p.truth, q.truth)
	}
	if p.set, err = priors.NewSet(names, list); err != nil {
		return nil, err
	}

	curve, err := strain.Curve(problemCurve)
	if err != nil {
		return nil, err
	}
	values, err := strain.Synthesize(random.New(seed, "validation cavity noise"), curve, problemRate, n, 20)
	if err != nil {
		return nil, err
	}
	spectrum, err := strain.SampleCurve(curve, 1/problemDuration, n/2+1, 20)
	if err != nil {
		return nil, err
	}
	density, err := likelihood.Loud(spectrum.Density, spectrum.Density, 1/problemDuration, problemLow, problemHigh, 4*problemRate/problemGate)
	if err != nil {
		return nil, err
	}
	site := likelihood.Site{
		Code: "V0", Strain: values, Density: density,
		Plus: 0.7, Cross: -0.5, Arrival: problemGate/problemRate + 0.0004,
	}
	h := models.NewPolarizations(grid.Count)
	if err := model.Fill(p.truth, h); err != nil {
		return nil, err
	}
	for i, v := range projected(h, grid, site, problemRate) {
		values[i] += v
	}
	p.likelihood, err = likelihood.New([]likelihood.Site{site}, likelihood.Settings{
		SampleRate: problemRate, Gate: problemGate, Grid: grid,
	})
	if err != nil {
		return nil, err
	}
	p.snr = p.likelihood.Worker().OptimalSNR(h, nil)[0]
	return p, nil
}

// projected is what a site measures of a signal, as a series at rate Hz over the
// site's segment.
func projected(h *models.Polarizations, grid models.Grid, s likelihood.Site, rate float64) []float64 {
	n := len(s.Strain)
	c := make([]complex128, n/2+1)
	for j := range grid.Count {
		sin, cos := math.Sincos(-2 * math.Pi * grid.Frequency(j) * s.Arrival)
		re := s.Plus*h.PlusRe[j] + s.Cross*h.CrossRe[j]
		im := s.Plus*h.PlusIm[j] + s.Cross*h.CrossIm[j]
		c[grid.First+j] = complex(re, im) * complex(cos, sin)
	}
	x := fourier.NewFFT(n).Sequence(nil, c)
	for i := range x {
		x[i] *= rate / float64(n)
	}
	return x
}

// Dim is the number of free parameters.
func (p *Problem) Dim() int { return p.set.Dim() }

// SNR is the injected signal's optimal signal-to-noise ratio outside the gate.
func (p *Problem) SNR() float64 { return p.snr }

// Periodic says which coordinates of the unit cube are periodic.
func (p *Problem) Periodic() []bool {
	periodic := make([]bool, p.set.Dim())
	for _, q := range p.model.Parameters() {
		if i := p.set.FreeIndex(q.Name); i >= 0 {
			periodic[i] = q.Periodic
		}
	}
	return periodic
}

// NewTarget returns the problem's log-likelihood over noise for one more
// goroutine.
func (p *Problem) NewTarget() (sampler.Target, error) {
	return &problemTarget{
		set: p.set, model: p.model.Clone(), worker: p.likelihood.Worker(),
		theta: make([]float64, p.set.Len()),
		h:     models.NewPolarizations(p.likelihood.Grid().Count),
	}, nil
}

// problemTarget is a Problem for one goroutine.
type problemTarget struct {
	set    *priors.Set
	model  models.Model
	worker *likelihood.Worker
	theta  []float64
	h      *models.Polarizations
}

var _ sampler.Target = (*problemTarget)(nil)

// Dim implements sampler.Target.
func (t *problemTarget) Dim() int { return t.set.Dim() }

// LogLikelihood implements sampler.Target.
func (t *problemTarget) LogLikelihood(u []float64) (float64, error) {
	t.set.Map(u, t.theta)
	if err := t.model.Fill(t.theta, t.h); err != nil {
		return 0, err
	}
	return t.worker.LogRatio(t.h), nil
}
