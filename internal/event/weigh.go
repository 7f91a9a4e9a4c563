package event

import (
	"context"
	"errors"
	"fmt"
	"math"
	"runtime"
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
	// Keeper, if not nil, gives the place where the state of a hypothesis's sampling
	// is kept while Weigh runs, each its own. Weigh goes on from what it finds there,
	// to the bits of a run without a break, and leaves the states where they are.
	Keeper func(hypothesis string) sampler.Keeper
	// KeepEvery is the least time between two states, 0 for the sampler's default.
	KeepEvery time.Duration
	// NotKept, if not nil, hears of each state that could not be kept; Weigh goes on.
	NotKept func(hypothesis string, err error)
	// Resumed, if not nil, hears before any sampling of each kept state that Weigh
	// goes on from, and how many likelihood calls it holds.
	Resumed func(hypothesis string, calls int64)
}

// Progress is how far one hypothesis's sampling is.
type Progress struct {
	Hypothesis   string
	Index, Count int // this hypothesis among all
	sampler.Progress
}

// Weigh samples every hypothesis and compares them. A cancelled context ends it
// with a valid result of what was reached, marked as partial. So does an error,
// which comes with the hypotheses that were weighed before it. A kept state that Weigh
// cannot go on from is a *StateError before any sampling, except where only the sampler
// can tell: then it is a *sampler.ResumeError when the hypothesis's turn comes.
func (p *Prepared) Weigh(ctx context.Context, o Options) (*report.Weighing, []report.Posterior, error) {
	c := p.Config
	w := &report.Weighing{
		Event: c.Title, Seed: c.Seed, Version: o.Version,
		GoVersion: runtime.Version(), Platform: runtime.GOOS + "/" + runtime.GOARCH,
		LogEvidenceNoise: report.Number(p.likelihood.LogNoise()),
		Analysis:         p.analysis(),
		Sites:            p.sites,
		Cautions:         append([]string(nil), p.Notes...),
	}
	keepers, err := p.keepers(o)
	if err != nil {
		w.Partial = true
		w.Cautions = append(w.Cautions, err.Error())
		return w, nil, err
	}
	var posteriors []report.Posterior
	var failure error
	for i, h := range p.hypotheses {
		k := keepers[i]
		// What is kept of a hypothesis belongs into the result, whenever the
		// interruption came.
		if ctx.Err() != nil && !k.held() {
			w.Partial = true
			w.Cautions = append(w.Cautions, fmt.Sprintf("interrupted before hypothesis %s was weighed", h.Name))
			continue
		}
		k.begin()
		settings := sampler.Settings{
			// A hypothesis keeps its stream whichever others stand beside it.
			Seed:             random.New(c.Seed, "hypothesis "+h.Name).Uint64(),
			LivePoints:       c.Sampler.LivePoints,
			EvidenceError:    c.Sampler.EvidenceError,
			PosteriorSamples: c.Sampler.PosteriorSamples,
			Remaining:        c.Sampler.Remaining,
			MaxCalls:         c.Sampler.MaxCalls,
			Workers:          o.Workers,
			Periodic:         h.periodic,
			KeepEvery:        o.KeepEvery,
			Progress: func(s sampler.Progress) {
				k.calls = s.Calls
				if o.Progress != nil {
					o.Progress(Progress{h.Name, i, len(p.hypotheses), s})
				}
			},
		}
		if k.place != nil {
			settings.Keeper, settings.Problem = k, k.Identity.problem()
		}
		outcome, err := sampler.Run(ctx, h.newTarget, settings)
		if err != nil && ctx.Err() != nil && errors.Is(err, ctx.Err()) {
			w.Partial = true
			w.Cautions = append(w.Cautions, fmt.Sprintf("interrupted before hypothesis %s had its first live points", h.Name))
			continue
		}
		var entry report.Hypothesis
		var posterior report.Posterior
		if err == nil {
			entry, posterior, err = p.summarise(h, outcome)
		}
		if err == nil {
			var warnings []string
			entry.Routes, warnings, err = p.routes(ctx, h, outcome, o.Workers)
			entry.Warnings = append(entry.Warnings, warnings...)
			if err == nil && ctx.Err() != nil && !outcome.Partial {
				w.Partial = true
				w.Cautions = append(w.Cautions, fmt.Sprintf("interrupted while the evidence of %s was found by further routes", h.Name))
			}
		}
		if err != nil {
			failure = fmt.Errorf("hypothesis %s: %w", h.Name, err)
			w.Partial = true
			w.Cautions = append(w.Cautions, failure.Error())
			break
		}
		entry.Seconds = report.Number(k.seconds())
		w.Partial = w.Partial || outcome.Partial
		w.Hypotheses = append(w.Hypotheses, entry)
		posteriors = append(posteriors, posterior)
	}
	for i, a := range w.Hypotheses {
		for _, b := range w.Hypotheses[:i] {
			w.Ratios = append(w.Ratios, report.Ratio{
				For: a.Name, Against: b.Name,
				LogBayesFactor: a.LogEvidenceOver - b.LogEvidenceOver,
				Error:          report.Number(math.Hypot(float64(a.LogEvidenceError), float64(b.LogEvidenceError))),
			})
		}
	}
	w.Cautions = append(w.Cautions, cautions(w)...)
	return w, posteriors, failure
}

// keepers reads what is kept of every hypothesis, so that what cannot be gone on with is
// known before any work.
func (p *Prepared) keepers(o Options) ([]*keeper, error) {
	list := make([]*keeper, len(p.hypotheses))
	for i, h := range p.hypotheses {
		list[i] = new(keeper)
		if o.Keeper == nil {
			continue
		}
		var err error
		if list[i], err = newKeeper(o.Keeper(h.Name), p.identity(h, o.Version)); err != nil {
			return nil, err
		}
		list[i].notKept = o.NotKept
	}
	for i, h := range p.hypotheses {
		if list[i].held() && o.Resumed != nil {
			o.Resumed(h.Name, list[i].calls)
		}
	}
	return list, nil
}

// fewSamples is the effective number of posterior samples below which the ends of
// a central 90 % interval, with a twentieth of the samples beyond each, are those
// of a few points.
const fewSamples = 60

// cautions are the doubts particular to this result; report adds what holds of
// every evidence ratio.
func cautions(w *report.Weighing) []string {
	var list []string
	for _, h := range w.Hypotheses {
		if h.Partial {
			list = append(list, fmt.Sprintf("%s did not finish: its evidence, and every ratio with it, is what was reached and may still change by more than the error says", h.Name))
		}
		if n := float64(h.EffectiveSamples); n < fewSamples {
			list = append(list, fmt.Sprintf("the posterior of %s rests on %.2g effective samples: its medians and intervals mean little", h.Name, n))
		}
	}
	for _, h := range w.Hypotheses {
		if h.UnstablePosterior > 0.01 {
			list = append(list, fmt.Sprintf("%.0f %% of the posterior of %s lies where its echoes would grow without end (see growth_time): with stable = true in the hypothesis such points are excluded from its prior", 100*float64(h.UnstablePosterior), h.Name))
		}
	}
	for _, r := range w.Ratios {
		if math.Abs(float64(r.LogBayesFactor)) < 3*float64(r.Error) {
			list = append(list, fmt.Sprintf("the sign of ln B for %s over %s is within three standard errors of zero: ask for a smaller evidence_error before quoting it", r.For, r.Against))
		}
	}
	return list
}

// analysis is the report's account of the analysed stretch.
func (p *Prepared) analysis() report.Analysis {
	a := p.Config.Analysis
	return report.Analysis{
		Time: report.Number(p.geocentre), Start: report.Number(a.Start), SampleRate: report.Number(a.SampleRate),
		Duration: report.Number(a.Duration), Gate: report.Number(a.Gate),
		Band: [2]report.Number{report.Number(a.Low), report.Number(a.High)},
	}
}
