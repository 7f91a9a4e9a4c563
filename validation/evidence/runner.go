package main

import (
	"context"
	"math"
	"sync"
	"sync/atomic"
	"time"

	"knell/internal/random"
	"knell/sampler"
)

// oneRun is what is kept of a run of the sampler.
type oneRun struct {
	finished  bool // neither interrupted nor never begun
	err       error
	converged bool
	sound     bool // by the run's own verdict

	logZ, logZError float64 // nats
	calls           int64
	points          int
	rankP           float64
	phases          []sampler.Phase
	// shrinkages are n ln(V before / V) of the dead points whose volumes V are
	// known, n the live number: draws of a unit exponential.
	shrinkages []float64
	seconds    float64
}

// measure runs all cases for all seeds, o.workers at a time, and returns the rows
// in order. Each run has one worker and a seed of its own, and is stored by index,
// so the rows do not depend on how many run at a time. Once ctx is cancelled the
// runs under way are dropped.
func measure(ctx context.Context, cases []problemCase, o options, m *meter) []row {
	runs := make([][]oneRun, len(cases))
	for i := range runs {
		runs[i] = make([]oneRun, o.seeds)
	}
	var (
		next atomic.Int64
		wg   sync.WaitGroup
	)
	for w := range o.workers {
		wg.Add(1)
		go func() {
			defer wg.Done()
			for ctx.Err() == nil {
				task := int(next.Add(1)) - 1
				c, s := task/o.seeds, task%o.seeds
				if c >= len(cases) {
					return
				}
				m.begin(w, c)
				runs[c][s] = runOnce(ctx, cases[c], o, s, func(p sampler.Progress) { m.update(w, p.Fraction) })
				m.end(w, runs[c][s])
			}
		}()
	}
	wg.Wait()
	rows := make([]row, len(cases))
	for i, c := range cases {
		rows[i] = newRow(c, o, runs[i])
	}
	return rows
}

// runOnce is the run of one case and one seed.
func runOnce(ctx context.Context, c problemCase, o options, index int, progress func(sampler.Progress)) oneRun {
	began := time.Now()
	out, err := sampler.Run(ctx, c.newTarget, sampler.Settings{
		Seed:       random.New(o.seed, "evidence "+c.name, uint64(c.dim), uint64(index)).Uint64(),
		LivePoints: o.live,
		Periodic:   c.periodic,
		Remaining:  c.remaining,
		Workers:    1,
		Progress:   progress,
	})
	if ctx.Err() != nil {
		return oneRun{}
	}
	r := oneRun{finished: true, err: err, seconds: time.Since(began).Seconds()}
	if err != nil {
		return r
	}
	r.converged, r.sound = out.Status == sampler.Converged, out.Verdict == "sound"
	r.logZ, r.logZError = out.LogEvidence, out.LogEvidenceError
	r.calls, r.points, r.rankP, r.phases = out.Calls, len(out.Points), out.InsertionRankP, out.Phases
	r.shrinkages = shrinkages(c, out)
	return r
}

// shrinkages compares the volumes of consecutive dead points. The first point has
// the whole cube before it, if no draw from the prior was zero.
func shrinkages(c problemCase, out *sampler.Outcome) []float64 {
	var s []float64
	before, known := 0.0, out.PriorZeros == 0
	for i, l := range out.LogLikelihood {
		v, ok := c.logVolume(l)
		if ok && known {
			s = append(s, math.Max(0, float64(out.LiveCount[i])*(before-v)))
		}
		before, known = v, ok
	}
	return s
}
