package sampler

import (
	"context"
	"fmt"
	"math"
)

// Progress is the state of a run between two batches.
type Progress struct {
	Run       int   // number of the run, from 0
	Iteration int   // batches of this run
	Calls     int64 // likelihood calls of all runs

	// Of all finished runs and this one, in nats, by the formula; the outcome
	// has the simulated values.
	LogEvidence, LogEvidenceError float64

	LogLikelihood float64 // of the worst live point, nats
	Remaining     float64 // ln(1 + Z'/Z), nats, see Settings.Remaining
	Fraction      float64 // rough share of the work done, 0 to 1, never falling
	Efficiency    float64 // accepted points per call in the last batch
	Phase         string  // way of drawing of the last batch
}

// Run computes the evidence of the targets that newTarget makes, one per
// worker, all of the same likelihood.
//
// Equal settings give equal bits, whatever the number of workers. A cancelled
// context gives a Partial outcome and no error: the batch under way is dropped
// and the live points are counted as they stand. Only if it comes before the
// first live points are complete is there nothing to return but the context's
// error. Other errors are a *SettingError, a *PointError, an error of newTarget,
// or a likelihood that is zero wherever it was tried.
func Run(ctx context.Context, newTarget func() (Target, error), s Settings) (*Outcome, error) {
	first, err := newTarget()
	if err != nil {
		return nil, fmt.Errorf("sampler: target of worker 0: %w", err)
	}
	s, err = s.resolve(first.Dim())
	if err != nil {
		return nil, err
	}
	p, err := newPool(newTarget, first, s.Workers)
	if err != nil {
		return nil, err
	}
	var (
		parts []*Outcome
		prior = ledger{wanted: 1}
	)
	for {
		r := newRunner(p, s, len(parts), prior)
		part, err := r.whole(ctx)
		if err != nil {
			if ctx.Err() == nil || len(parts) == 0 {
				return nil, err
			}
			// The next run had no live points yet: what is there, stands.
			return conclude(parts, s, Interrupted)
		}
		parts = append(parts, part)
		prior.calls += part.Calls
		prior.runs = len(parts)
		prior.fraction = r.prior.fraction
		switch {
		case part.Status != Converged || s.EvidenceError == 0:
			return merge(parts, s.Workers)
		case s.MaxCalls != 0 && prior.calls+int64(s.LivePoints) > s.MaxCalls:
			return conclude(parts, s, CallLimit)
		case len(parts) < prior.wanted:
			continue
		}
		result, err := merge(parts, s.Workers)
		if err != nil || result.LogEvidenceError <= s.EvidenceError {
			return result, err
		}
		if len(parts) == s.MaxGrowth {
			result.note("%d runs reached an error of %.3g nat, %.3g wanted: use more live points", len(parts), result.LogEvidenceError, s.EvidenceError)
			result.judge()
			return result, nil
		}
		ratio := result.LogEvidenceError / s.EvidenceError
		prior.wanted = int(math.Ceil(min(float64(s.MaxGrowth), cautious*float64(len(parts))*ratio*ratio)))
		prior.wanted = max(prior.wanted, len(parts)+1)
		prior.logZ, prior.variance = result.LogEvidence, result.LogEvidenceError*result.LogEvidenceError
		prior.known = len(parts)
	}
}

// cautious scales the estimate of how many runs are needed, which is uncertain
// by a few percent; a last run is added if they turn out too few.
const cautious = 0.95

// conclude merges the runs there are when the wanted error was not reached.
func conclude(parts []*Outcome, s Settings, status Status) (*Outcome, error) {
	result, err := merge(parts, s.Workers)
	if err != nil || status == CallLimit && result.LogEvidenceError <= s.EvidenceError {
		return result, err
	}
	result.Status = status
	if status == Interrupted {
		result.Partial = true
		result.note("interrupted at an error of %.3g nat, %.3g wanted", result.LogEvidenceError, s.EvidenceError)
	} else {
		result.note("the limit of %d calls was reached at an error of %.3g nat, %.3g wanted", s.MaxCalls, result.LogEvidenceError, s.EvidenceError)
	}
	result.judge()
	return result, nil
}

// ledger is what earlier runs leave for the next, and for its progress.
type ledger struct {
	runs, wanted   int
	calls          int64
	fraction       float64
	known          int // runs that the following two come from
	logZ, variance float64
}
