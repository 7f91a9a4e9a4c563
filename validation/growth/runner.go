package main

import (
	"context"
	"fmt"
	"math"
	"sync"

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
	plan      plan

	logZ, logZError float64 // nats
	calls           int64
	samples         float64 // effective
	rankP           float64
	// For the posterior use: (estimate - truth) / quoted error of the mean and of the
	// variance of the first coordinate.
	meanZ, varianceZ float64
}

// plan is what both kinds of run of a job aim at.
type plan struct {
	goal   float64 // effective samples, or error in nats
	static int     // live points of a static run that gets there
}

// measure runs all jobs for all seeds, growing and static in turn, and gives each row
// to ended once it is complete, in the order of the jobs. Each run has one worker and
// a seed of its own.
func measure(ctx context.Context, jobs []job, o options, m *trials.Meter, ended func(row)) {
	plans := make([]func() (plan, error), len(jobs))
	for i, j := range jobs {
		plans[i] = sync.OnceValues(func() (plan, error) { return makePlan(ctx, j, o) })
	}
	trials.Run(ctx, m, func(at, index int, tell func(float64)) (oneRun, bool) {
		r := runOnce(ctx, jobs[at], o, index, plans[at], tell)
		return r, r.finished
	}, func(at int, runs []oneRun) {
		ended(newRow(jobs[at], o, runs))
	})
}

// settings of a run that does not grow.
func settings(j job, o options, purpose string, index int) sampler.Settings {
	return sampler.Settings{
		Seed:       random.New(o.seed, "growth "+purpose+" "+j.use+" "+j.Name, uint64(j.Dim), uint64(index)).Uint64(),
		LivePoints: o.live,
		Periodic:   j.Periodic,
		Remaining:  j.Remaining,
		Workers:    1,
	}
}

// makePlan runs once without growth. Effective samples rise as the live points do, the
// squared error falls as they do.
func makePlan(ctx context.Context, j job, o options) (plan, error) {
	out, err := sampler.Run(ctx, j.NewTarget, settings(j, o, "plan", 0))
	if err != nil {
		return plan{}, err
	}
	if out.Status != sampler.Converged {
		return plan{}, fmt.Errorf("the run before growth ended by %v, want converged", out.Status)
	}
	if j.use == posteriorUse {
		return plan{o.samples, int(math.Ceil(float64(o.live) * o.samples / out.EffectiveSamples))}, nil
	}
	return plan{o.share * out.LogEvidenceError, int(math.Ceil(float64(o.live) / (o.share * o.share)))}, nil
}

// grows says whether the run of an index grows; its neighbour is static.
func grows(index int) bool { return index%2 == 0 }

// runOnce is the run of one job and one index.
func runOnce(ctx context.Context, j job, o options, index int, makePlan func() (plan, error), tell func(float64)) oneRun {
	p, err := makePlan()
	if ctx.Err() != nil {
		return oneRun{}
	}
	if err != nil {
		return oneRun{finished: true, err: err}
	}
	s := settings(j, o, "static", index/2)
	switch {
	case !grows(index):
		s.LivePoints = p.static
	case j.use == posteriorUse:
		s = settings(j, o, "grown", index/2)
		s.PosteriorSamples = p.goal
	default:
		s = settings(j, o, "grown", index/2)
		s.EvidenceError = p.goal
	}
	s.Progress = func(p sampler.Progress) { tell(p.Fraction) }
	out, err := sampler.Run(ctx, j.NewTarget, s)
	if ctx.Err() != nil {
		return oneRun{}
	}
	r := oneRun{finished: true, err: err, plan: p}
	if err != nil {
		return r
	}
	r.converged, r.sound = out.Status == sampler.Converged, out.Verdict == "sound"
	r.logZ, r.logZError, r.samples = out.LogEvidence, out.LogEvidenceError, out.EffectiveSamples
	r.calls, r.rankP = out.Calls, out.InsertionRankP
	if j.use == posteriorUse {
		x := make([]float64, len(out.Points))
		for i, u := range out.Points {
			x[i] = u[0]
		}
		mean, covariance, err := out.Posterior().Covariance([][]float64{x})
		if err != nil {
			r.err = err
			return r
		}
		r.meanZ = (mean[0].Value - posteriorMean) / mean[0].Error
		r.varianceZ = (covariance[0][0].Value - posteriorVariance) / covariance[0][0].Error
	}
	return r
}
