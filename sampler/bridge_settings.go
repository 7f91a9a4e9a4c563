package sampler

import (
	"context"
	"fmt"
	"math"
	"runtime"

	"knell/internal/random"
)

// Defaults of RouteSettings.
const (
	DefaultRouteDraws      = 2000
	DefaultRouteComponents = 32
	DefaultPriorShare      = 0.1
)

// leastRouteDraws is the least number of draws an error is estimated from.
const leastRouteDraws = 100

// RouteSettings of a further route to the evidence of a finished run. The zero
// value of every field means its default.
type RouteSettings struct {
	// Seed keys every random stream of the route.
	Seed uint64

	// Draws from the fitted density, each one likelihood call; default 2000, at
	// least 100.
	Draws int

	// Components bounds the components of the fitted mixture, default 32.
	Components int

	// PriorShare is the share of Importance's draws that come from the prior,
	// above 0 and up to 1, default 0.1. No weight exceeds L/PriorShare.
	PriorShare float64

	// Workers is the number of goroutines that evaluate the likelihood,
	// default GOMAXPROCS. The result does not depend on it.
	Workers int

	// Periodic as Settings.Periodic of the run.
	Periodic []bool
}

// resolve checks s for a problem of the given dimension and fills in defaults.
func (s RouteSettings) resolve(dim int) (RouteSettings, error) {
	bad := func(field string, got any, want string) error {
		return &SettingError{field, fmt.Sprint(got), want}
	}
	if s.Draws == 0 {
		s.Draws = DefaultRouteDraws
	}
	if s.Draws < leastRouteDraws {
		return s, bad("Draws", s.Draws, fmt.Sprintf("0 (for %d) or at least %d", DefaultRouteDraws, leastRouteDraws))
	}
	if s.Components == 0 {
		s.Components = DefaultRouteComponents
	}
	if s.Components < 1 {
		return s, bad("Components", s.Components, fmt.Sprintf("0 (for %d) or at least 1", DefaultRouteComponents))
	}
	if s.PriorShare == 0 {
		s.PriorShare = DefaultPriorShare
	}
	if !(s.PriorShare > 0 && s.PriorShare <= 1) {
		return s, bad("PriorShare", s.PriorShare, fmt.Sprintf("0 (for %g) or above 0 and up to 1", DefaultPriorShare))
	}
	if s.Workers == 0 {
		s.Workers = runtime.GOMAXPROCS(0)
	}
	if s.Workers < 1 {
		return s, bad("Workers", s.Workers, "0 (for GOMAXPROCS) or at least 1")
	}
	if s.Periodic != nil && len(s.Periodic) != dim {
		return s, bad("Periodic", fmt.Sprintf("%d values", len(s.Periodic)), fmt.Sprintf("nil or one value for each of %d dimensions", dim))
	}
	return s, nil
}

// Estimate is the evidence by a further route.
type Estimate struct {
	Route       string  // "bridge" or "importance"
	LogEvidence float64 // ln of the integral of L over the cube, nats
	Error       float64 // its standard deviation, nats

	// EffectiveSamples is (sum w)² / sum w² of the weights L/q of the draws, and
	// for a bridge the lesser of that and the same of the posterior points used.
	EffectiveSamples float64

	Calls      int64 // likelihood calls it cost
	Components int   // of the fitted mixture
	Warnings   []string
}

func (e *Estimate) warn(format string, args ...any) {
	e.Warnings = append(e.Warnings, fmt.Sprintf(format, args...))
}

// route is what both routes share: a density fitted to posterior points and the
// likelihood at draws from it.
type route struct {
	RouteSettings
	pool *pool
	q    *mixture
}

// newRoute checks the settings and makes the targets.
func (o *Outcome) newRoute(newTarget func() (Target, error), settings RouteSettings) (*route, error) {
	if len(o.Points) == 0 || len(o.LogWeight) != len(o.Points) {
		return nil, fmt.Errorf("sampler: a further route to the evidence from an outcome of %d points with %d weights, want a finished run", len(o.Points), len(o.LogWeight))
	}
	settings, err := settings.resolve(o.dim())
	if err != nil {
		return nil, err
	}
	target, err := newTarget()
	if err != nil {
		return nil, fmt.Errorf("sampler: target of worker 0: %w", err)
	}
	if d := target.Dim(); d != o.dim() {
		return nil, fmt.Errorf("sampler: target of %d dimensions, want %d as the outcome", d, o.dim())
	}
	r := &route{RouteSettings: settings}
	r.pool, err = newPool(newTarget, target, settings.Workers)
	return r, err
}

// fit fits the density to posterior points.
func (r *route) fit(s sample) (err error) {
	r.q, err = fitMixture(s, r.Periodic, r.Components, r.Seed)
	return err
}

// draws is the likelihood and the mixture's density at draws.
type draws struct {
	logL []float64
	logQ []float64
}

// draw draws n points, the first uniform ones of them from the prior, the rest
// from the mixture, and calls the likelihood at each. Draw i has a random stream
// of its own.
func (r *route) draw(ctx context.Context, purpose string, n, uniform int) (draws, error) {
	d := draws{logL: make([]float64, n), logQ: make([]float64, n)}
	err := r.pool.each(ctx, n, func(w *worker, i int) error {
		rng := random.New(r.Seed, purpose, uint64(i))
		if i < uniform {
			for k := range w.cube {
				w.cube[k] = rng.Float64()
			}
		} else {
			r.q.draw(rng, w.cube, w.x, w.trial)
		}
		d.logQ[i] = r.q.logDensity(w.cube, w.x)
		var err error
		d.logL[i], err = w.at(w.cube)
		return err
	})
	return d, err
}

// agreeing is how many combined errors two routes may differ by, and
// agreeingRounding what rounding alone may add, in nats.
const (
	agreeing         = 3
	agreeingRounding = 1e-9
)

// Agree compares the evidence of the nested-sampling run with that of further
// routes and returns a sentence for each that differs from it by more than 3
// combined errors sqrt(a² + b²). The routes start from the run's own points, so
// they are not independent of what it failed to find: a mode that no point has
// seen is missing in the fitted density too, and only the prior draws of
// Importance can meet it.
func Agree(o *Outcome, routes ...Estimate) []string {
	var warnings []string
	for _, e := range routes {
		gap := e.LogEvidence - o.LogEvidence
		combined := math.Hypot(e.Error, o.LogEvidenceError)
		if !(math.Abs(gap) <= agreeing*combined+agreeingRounding*(1+math.Abs(o.LogEvidence))) {
			warnings = append(warnings, fmt.Sprintf(
				"the log-evidence by %s is %.3f ± %.3f nat, by nested sampling %.3f ± %.3f: they differ by %.1f combined errors",
				e.Route, e.LogEvidence, e.Error, o.LogEvidence, o.LogEvidenceError, math.Abs(gap)/combined))
		}
	}
	return warnings
}
