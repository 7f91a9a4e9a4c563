package main

import (
	"fmt"
	"math"

	"gonum.org/v1/gonum/stat"

	"knell/internal/report"
	"knell/validation"
	"knell/validation/trials"
)

const (
	// leastGain is how many times fewer calls per effective sample a grown run has to
	// need, for posterior use.
	leastGain = 3
	// mostCost is how many times the calls × error² of a static run a grown one may
	// need, for evidence use; a cost above it by chance, within this many standard
	// errors, is no fault.
	mostCost   = 1
	costErrors = 3
)

// row compares the grown with the static runs of one job.
type row struct {
	Use    string        `json:"use"`
	Name   string        `json:"name"`
	Dim    int           `json:"dim"`
	Seeds  int           `json:"seeds"` // finished pairs of runs
	Truth  report.Number `json:"truth"`
	Source string        `json:"source"`
	Goal   report.Number `json:"goal"` // effective samples, or error in nats

	Grown  kind `json:"grown"`
	Static kind `json:"static"`

	// Ratio is, for posterior use, calls per effective sample of the static runs over
	// those of the grown ones, and for evidence use calls × error² of the grown runs
	// over those of the static ones.
	Ratio      report.Number `json:"ratio"`
	RatioError report.Number `json:"ratio_error"`
	RatioLimit float64       `json:"ratio_limit"` // least, or most

	// Of the grown runs; Mean and Variance for the posterior use alone.
	LogZ     trials.Calibration  `json:"log_z"`
	Mean     *trials.Calibration `json:"posterior_mean,omitempty"`
	Variance *trials.Calibration `json:"posterior_variance,omitempty"`
	RankP    report.Number       `json:"rank_p"`
	Doubtful int                 `json:"doubtful"` // whose own verdict is not "sound"

	Passed bool     `json:"passed"`
	Faults []string `json:"faults"` // why it did not pass
}

// kind is the means over the runs of one kind.
type kind struct {
	LivePoints int           `json:"live_points"` // at the start
	Calls      report.Number `json:"calls"`
	Error      report.Number `json:"error"` // of ln Z as quoted, nats
	Samples    report.Number `json:"effective_samples"`

	cost, costError float64 // mean of the runs' cost, standard error of it
}

// newRow compares and judges what there is of a job.
func newRow(j job, o options, runs []oneRun) row {
	nan := report.Number(math.NaN())
	r := row{Use: j.use, Name: j.Name, Dim: j.Dim, Truth: report.Number(j.Truth), Source: j.Source, Goal: nan, Ratio: nan, RatioError: nan, Faults: []string{}}
	var grown, static []oneRun
	for i, q := range runs {
		name, list := "static", &static
		if grows(i) {
			name, list = "grown", &grown
		}
		if !q.finished {
			continue
		}
		if q.err == nil {
			r.Goal, r.Static.LivePoints = report.Number(q.plan.goal), q.plan.static
		}
		switch {
		case q.err != nil:
			r.fault("%s run %d failed: %v", name, i/2, q.err)
		case !q.converged:
			r.fault("%s run %d did not converge", name, i/2)
		default:
			*list = append(*list, q)
		}
	}
	r.Grown.LivePoints, r.RatioLimit = o.live, mostCost
	if j.use == posteriorUse {
		r.RatioLimit = leastGain
	}
	r.Seeds = min(len(grown), len(static))
	r.Grown.average(grown, j.use)
	r.Static.average(static, j.use)
	if r.Seeds > 1 {
		r.compare()
	}
	r.judge(j, grown)
	r.Passed = len(r.Faults) == 0
	return r
}

func (r *row) fault(format string, args ...any) {
	r.Faults = append(r.Faults, fmt.Sprintf(format, args...))
}

// cost is calls per effective sample, or calls × error².
func (q oneRun) cost(use string) float64 {
	if use == posteriorUse {
		return float64(q.calls) / q.samples
	}
	return float64(q.calls) * q.logZError * q.logZError
}

func (k *kind) average(runs []oneRun, use string) {
	var calls, errs, samples, costs []float64
	for _, q := range runs {
		calls = append(calls, float64(q.calls))
		errs = append(errs, q.logZError)
		samples = append(samples, q.samples)
		costs = append(costs, q.cost(use))
	}
	k.Calls, k.Error, k.Samples = report.Number(stat.Mean(calls, nil)), report.Number(stat.Mean(errs, nil)), report.Number(stat.Mean(samples, nil))
	mean, deviation := stat.MeanStdDev(costs, nil)
	k.cost, k.costError = mean, deviation/math.Sqrt(float64(len(costs)))
}

// compare sets the ratio and judges it.
func (r *row) compare() {
	above, below := r.Grown, r.Static
	if r.Use == posteriorUse {
		above, below = below, above
	}
	ratio := above.cost / below.cost
	err := ratio * math.Hypot(above.costError/above.cost, below.costError/below.cost)
	r.Ratio, r.RatioError = report.Number(ratio), report.Number(err)
	switch {
	case r.Use == posteriorUse && !(ratio >= leastGain):
		r.fault("%.2f times fewer calls per sample, want %d at least", ratio, leastGain)
	case r.Use == evidenceUse && !(ratio-costErrors*err <= mostCost):
		r.fault("%.2f times the calls × error² of a static run, want %d at most", ratio, mostCost)
	}
}

// judge holds the grown runs against the goal and the truth.
func (r *row) judge(j job, grown []oneRun) {
	var logZ, mean, variance []validation.Pull
	var rankP []float64
	short := 0
	for _, q := range grown {
		logZ = append(logZ, validation.Pull{LogEvidence: q.logZ, Error: q.logZError, Z: (q.logZ - j.Truth) / q.logZError, Calls: q.calls})
		mean = append(mean, validation.Pull{Z: q.meanZ})
		variance = append(variance, validation.Pull{Z: q.varianceZ})
		rankP = append(rankP, q.rankP)
		if !q.sound {
			r.Doubtful++
		}
		if j.use == posteriorUse && q.samples < q.plan.goal || j.use == evidenceUse && q.logZError > q.plan.goal {
			short++
		}
	}
	if short > 0 {
		r.fault("grown runs that fell short of the goal: %d", short)
	}
	r.LogZ = r.calibrate("ln Z", logZ)
	if j.use == posteriorUse {
		m, v := r.calibrate("the mean", mean), r.calibrate("the variance", variance)
		r.Mean, r.Variance = &m, &v
	}
	p := validation.UniformP(rankP)
	r.RankP = report.Number(p)
	if p < trials.LeastP {
		r.fault("insertion ranks p = %.1g", p)
	}
}

// calibrate notes what is wrong with the pulls of something.
func (r *row) calibrate(of string, pulls []validation.Pull) trials.Calibration {
	c, faults := trials.Calibrate(pulls)
	for _, f := range faults {
		r.fault("%s: %s", of, f)
	}
	return c
}
