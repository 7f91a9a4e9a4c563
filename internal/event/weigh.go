package event

import (
	"context"
	"fmt"
	"math"
	"time"

	"knell/internal/random"
	"knell/internal/report"
	"knell/sampler"
)

// Options of one weighing.
type Options struct {
	Version string
	Workers int // 0: one per core; the result does not depend on it
	// Progress, if not nil, hears how far the sampling is.
	Progress func(Progress)
}

// Progress is how far one hypothesis's sampling is.
type Progress struct {
	Hypothesis   string
	Index, Count int // this hypothesis among all
	sampler.Progress
}

// Weigh samples every hypothesis and compares them. A cancelled context ends it
// with a valid result of what was reached, marked as partial.
func (p *Prepared) Weigh(ctx context.Context, o Options) (*report.Weighing, []report.Posterior, error) {
	c := p.Config
	w := &report.Weighing{
		Event: c.Title, Seed: c.Seed, Version: o.Version,
		LogEvidenceNoise: p.likelihood.LogNoise(),
		Analysis:         p.analysis(),
		Sites:            p.sites,
		Cautions:         append([]string(nil), p.Notes...),
	}
	var posteriors []report.Posterior
	for i, h := range p.hypotheses {
		if ctx.Err() != nil {
			w.Partial = true
			w.Cautions = append(w.Cautions, fmt.Sprintf("interrupted before hypothesis %s was weighed", h.Name))
			continue
		}
		began := time.Now()
		outcome, err := sampler.Run(ctx, h.newTarget, sampler.Settings{
			// A hypothesis keeps its stream whichever others stand beside it.
			Seed:          random.New(c.Seed, "hypothesis "+h.Name).Uint64(),
			LivePoints:    c.Sampler.LivePoints,
			EvidenceError: c.Sampler.EvidenceError,
			Remaining:     c.Sampler.Remaining,
			MaxCalls:      c.Sampler.MaxCalls,
			Workers:       o.Workers,
			Periodic:      h.periodic,
			Progress: func(s sampler.Progress) {
				if o.Progress != nil {
					o.Progress(Progress{h.Name, i, len(p.hypotheses), s})
				}
			},
		})
		if err != nil {
			return nil, nil, fmt.Errorf("hypothesis %s: %w", h.Name, err)
		}
		seconds := time.Since(began).Seconds()
		entry, posterior, err := p.summarise(h, outcome)
		if err != nil {
			return nil, nil, fmt.Errorf("hypothesis %s: %w", h.Name, err)
		}
		entry.Seconds = seconds
		w.Partial = w.Partial || outcome.Partial
		w.Hypotheses = append(w.Hypotheses, entry)
		posteriors = append(posteriors, posterior)
	}
	for i, a := range w.Hypotheses {
		for _, b := range w.Hypotheses[:i] {
			w.Ratios = append(w.Ratios, report.Ratio{
				For: a.Name, Against: b.Name,
				LogBayesFactor: a.LogEvidenceOverNoise - b.LogEvidenceOverNoise,
				Error:          math.Hypot(a.LogEvidenceError, b.LogEvidenceError),
			})
		}
	}
	w.Cautions = append(w.Cautions, cautions(w)...)
	return w, posteriors, nil
}

// cautions are what a reader of any ratio must know, and what is particular to
// this one.
func cautions(w *report.Weighing) []string {
	list := []string{
		"An evidence ratio depends on the priors: a wider prior on a parameter that one hypothesis alone has lowers that hypothesis's evidence.",
		"The ratio compares these hypotheses with each other under stationary Gaussian noise; neither need be true. A claim needs a background: the same weighing on stretches without an event.",
	}
	for _, r := range w.Ratios {
		if math.Abs(r.LogBayesFactor) < 3*r.Error {
			list = append(list, fmt.Sprintf("The sign of ln B for %s over %s is within three standard errors of zero: run with a smaller evidence_error before quoting it.", r.For, r.Against))
		}
	}
	return list
}
