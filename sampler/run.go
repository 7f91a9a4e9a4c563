package sampler

import (
	"context"
	"errors"
	"fmt"
	"time"
)

// Run computes the evidence of the targets that newTarget makes, one per
// worker, all of the same likelihood.
//
// Equal settings give equal bits, whatever the number of workers, and however
// often the run was broken off and gone on with from its Keeper. A cancelled
// context gives a Partial outcome and no error: the batches under way are dropped
// and the live points are counted as they stand. Only if it comes before the
// first live points are complete is there nothing to return but the context's
// error. Other errors are a *SettingError, a *PointError, a *ResumeError, an
// error of newTarget or of Keeper.Load, or a likelihood that is zero wherever it
// was tried.
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
	g := &growing{set: s, pool: p, began: time.Now()}
	if err := g.load(); err != nil {
		return nil, err
	}
	// The goroutines end with this call, also on an error.
	ctx, cancel := context.WithCancel(ctx)
	g.crew = newCrew(ctx, p)
	defer func() { cancel(); g.crew.stop() }()
	if r := g.current; r != nil { // what was in flight is drawn again
		for _, f := range r.flights {
			r.launch(f)
		}
	}
	o, err := g.grow(ctx)
	if o != nil && g.trouble != nil {
		o.note("the state could not be kept, so a run that breaks off begins again further back: %v", g.trouble)
		o.judge()
	}
	return o, err
}

// growing is a run with its additions.
type growing struct {
	set  Settings
	pool *pool
	crew *crew

	parts   []*Outcome // the first run and its additions, not weighed
	merged  int        // parts that the additions under way were planned by
	current *runner    // under way, nil between two

	// Not part of the state: what follows from it, and the clock.
	whole   *Outcome // the merger of the first merged parts
	left    []*path  // additions still to begin
	limited bool
	keeping
	began   time.Time
	earlier time.Duration // of the run before it was broken off
	gauge   gauge
}

// grow takes the run to its end.
func (g *growing) grow(ctx context.Context) (*Outcome, error) {
	for {
		r, err := g.begin()
		if err != nil {
			return nil, err
		}
		if r == nil {
			g.save()
			return g.whole, nil
		}
		for more := true; more; {
			g.limit()
			if more, err = r.step(ctx); err != nil {
				break
			}
			g.saveIfDue()
		}
		switch {
		case err == nil:
			if part := r.finish(); len(part.Points) > 0 {
				g.parts = append(g.parts, part)
			}
			g.current = nil
		case ctx.Err() != nil && errors.Is(err, ctx.Err()):
			return g.interrupted(err)
		default:
			return nil, err
		}
	}
}

// begin returns the runner to go on with: the one under way, or the next
// addition, or nil if whole is the outcome.
func (g *growing) begin() (*runner, error) {
	if g.current != nil {
		return g.current, nil
	}
	if len(g.parts) == 0 {
		g.current = newRunner(g, nil)
		return g.current, nil
	}
	if most := g.set.MaxCalls; most != 0 && g.calls() >= most {
		g.left = nil
	}
	if len(g.left) == 0 {
		if done, err := g.plan(len(g.parts)); done || err != nil {
			return nil, err
		}
	}
	g.current = newRunner(g, g.left[0])
	g.left = g.left[1:]
	return g.current, nil
}

// plan merges the first n parts and plans what to add to them. It reports true
// if nothing is to be added.
func (g *growing) plan(n int) (bool, error) {
	whole, err := merge(g.parts[:n], g.set.Workers)
	if err != nil {
		return false, err
	}
	limited := g.limited
	g.whole, g.merged = whole, n
	s := g.set
	switch {
	case whole.Status != Converged || s.reached(whole):
		return true, nil
	case s.MaxCalls != 0 && whole.Calls >= s.MaxCalls:
		g.missed(CallLimit, "the limit of %d calls was reached", s.MaxCalls)
		return true, nil
	case limited:
		g.missed(GrowthLimit, "the run grew to %d times its live points (use more)", s.MaxGrowth)
		return true, nil
	}
	g.left, g.limited = s.additions(whole)
	g.gauge.plan(whole, g.left)
	if len(g.left) == 0 {
		g.missed(GrowthLimit, "the run grew to %d times its live points (use more)", s.MaxGrowth)
		return true, nil
	}
	return false, nil
}

// missed says why the whole is short of its targets.
func (g *growing) missed(status Status, format string, args ...any) {
	g.whole.Status = status
	why := fmt.Sprintf(format, args...)
	if e := g.set.EvidenceError; e > 0 && g.whole.LogEvidenceError > e {
		g.whole.missed = append(g.whole.missed, fmt.Sprintf("%s at an error of %.3g nat, %.3g wanted", why, g.whole.LogEvidenceError, e))
	}
	if e := g.set.PosteriorSamples; g.whole.EffectiveSamples < e {
		g.whole.missed = append(g.whole.missed, fmt.Sprintf("%s at %.0f effective posterior samples, %.0f wanted", why, g.whole.EffectiveSamples, e))
	}
	g.whole.judge()
}

// limit ends the runner under way at the limit of calls.
func (g *growing) limit() {
	r, most := g.current, g.set.MaxCalls
	if most == 0 || r.ending || !r.begun || r.before+r.out.Calls < most {
		return
	}
	if r.path == nil {
		if left := r.remaining(); left >= g.set.Remaining {
			r.out.Status, r.out.Partial = CallLimit, true
			r.out.note("the limit of %d calls was reached with ln(1 + Z'/Z) = %.3g nat remaining, %.3g wanted", most, left, g.set.Remaining)
		}
	}
	r.ending = true
}

// interrupted concludes with what there is.
func (g *growing) interrupted(err error) (*Outcome, error) {
	g.crew.stop()
	g.save()
	r := g.current
	if !r.begun {
		if len(g.parts) == 0 {
			return nil, err
		}
	} else {
		if r.path == nil {
			r.out.note("interrupted with ln(1 + Z'/Z) = %.3g nat remaining, %.3g wanted", r.remaining(), g.set.Remaining)
		}
		if part := r.finish(); len(part.Points) > 0 {
			g.parts = append(g.parts, part)
		}
	}
	whole, err := merge(g.parts, g.set.Workers)
	if err != nil {
		return nil, err
	}
	g.whole = whole
	whole.Status, whole.Partial = Interrupted, true
	if r.path == nil {
		whole.judge()
	} else {
		g.missed(Interrupted, "interrupted")
	}
	return whole, nil
}

// calls of the parts that are over.
func (g *growing) calls() int64 {
	var n int64
	for _, p := range g.parts {
		n += p.Calls
	}
	return n
}
