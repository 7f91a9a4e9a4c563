package main

import (
	"context"
	"math"
	"sync"
	"time"

	"knell/internal/random"
	"knell/sampler"
	"knell/validation/trials"
)

// oneRun is what is kept of a run of the sampler.
type oneRun struct {
	finished  bool // neither interrupted nor never begun
	err       error
	converged bool
	sound     bool // by the run's own verdict

	logZ, logZError float64 // nats
	wanted          float64 // error that the run was to reach, nats, 0 for none
	calls           int64
	points          int
	rankP           float64
	phases          []sampler.Phase
	// shrinkages are n ln(V before / V) of the dead points whose volumes V are
	// known, n the live number: draws of a unit exponential.
	shrinkages []float64
	seconds    float64
}

// measure runs all cases for all seeds, o.workers at a time, and gives each row to
// ended once it is complete, in the order of the cases. Each run has one worker and a
// seed of its own, so the rows do not depend on how many run at a time. Once ctx is
// cancelled the runs under way are dropped.
func measure(ctx context.Context, cases []trials.Case, o options, m *trials.Meter, ended func(row)) {
	wanted := make([]func() (float64, error), len(cases))
	for i, c := range cases {
		wanted[i] = sync.OnceValues(func() (float64, error) { return wantedError(ctx, c, o) })
	}
	trials.Run(ctx, m, func(at, index int, tell func(float64)) (oneRun, bool) {
		r := runOnce(ctx, cases[at], o, index, wanted[at], tell)
		return r, r.finished
	}, func(at int, runs []oneRun) {
		ended(newRow(cases[at], o, runs))
	})
}

// plain is the settings of a run that does not grow.
func plain(c trials.Case, o options, purpose string, index int) sampler.Settings {
	return sampler.Settings{
		Seed:       random.New(o.seed, purpose+" "+c.Name, uint64(c.Dim), uint64(index)).Uint64(),
		LivePoints: o.live,
		Periodic:   c.Periodic,
		Remaining:  c.Remaining,
		Workers:    1,
	}
}

// wantedError is what the runs of a case grow to, 0 if they do not: a share of the
// error of a plain run that is none of them.
func wantedError(ctx context.Context, c trials.Case, o options) (float64, error) {
	if o.grow == 0 {
		return 0, nil
	}
	out, err := sampler.Run(ctx, c.NewTarget, plain(c, o, "evidence before growth", 0))
	if err != nil {
		return 0, err
	}
	return o.grow * out.LogEvidenceError, nil
}

// runOnce is the run of one case and one seed.
func runOnce(ctx context.Context, c trials.Case, o options, index int, wanted func() (float64, error), tell func(float64)) oneRun {
	began := time.Now()
	s := plain(c, o, "evidence", index)
	s.Progress = func(p sampler.Progress) { tell(p.Fraction) }
	var out *sampler.Outcome
	goal, err := wanted()
	if err == nil {
		s.EvidenceError = goal
		out, err = sampler.Run(ctx, c.NewTarget, s)
	}
	if ctx.Err() != nil {
		return oneRun{}
	}
	r := oneRun{finished: true, err: err, seconds: time.Since(began).Seconds()}
	if err != nil {
		return r
	}
	r.converged, r.sound = out.Status == sampler.Converged, out.Verdict == "sound"
	r.logZ, r.logZError, r.wanted = out.LogEvidence, out.LogEvidenceError, goal
	r.calls, r.points, r.rankP, r.phases = out.Calls, len(out.Points), out.InsertionRankP, out.Phases
	r.shrinkages = shrinkages(c, out)
	return r
}

// shrinkages compares the volumes of consecutive dead points. The first point has
// the whole cube before it, if no draw from the prior was zero.
func shrinkages(c trials.Case, out *sampler.Outcome) []float64 {
	var s []float64
	before, known := 0.0, out.PriorZeros == 0
	for i, l := range out.LogLikelihood {
		v, ok := c.LogVolume(l)
		if ok && known {
			s = append(s, math.Max(0, float64(out.LiveCount[i])*(before-v)))
		}
		before, known = v, ok
	}
	return s
}
