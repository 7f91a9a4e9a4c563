package main

import (
	"fmt"
	"math"

	"gonum.org/v1/gonum/stat"

	"knell/internal/report"
	"knell/sampler"
	"knell/validation"
	"knell/validation/trials"
)

// row is a problem's line of the table. Log-evidences are in nats; z is (ln Z -
// truth) / error of one run.
type row struct {
	Name   string        `json:"name"`
	Dim    int           `json:"dim"`
	Seeds  int           `json:"seeds"` // finished
	Truth  report.Number `json:"truth"`
	Source string        `json:"source"`
	// Remaining is given where the runs were told to go on further than by default.
	Remaining float64 `json:"remaining,omitempty"`

	trials.Calibration
	Difference report.Number `json:"mean_difference"` // ln Z - truth
	Error      report.Number `json:"mean_error"`      // as quoted
	Wanted     float64       `json:"wanted_error,omitempty"`

	Calls      report.Number `json:"calls"` // per run
	IdealRatio report.Number `json:"ideal_ratio"`
	Aim        float64       `json:"ideal_ratio_target,omitempty"`

	RankP report.Number `json:"rank_p"`
	// Where volumes are known: the mean of the shrinkages n ln(V before / V),
	// which is 1 for fair draws, and the p-value of their distribution.
	Shrinkage      report.Number `json:"shrinkage_mean"`
	ShrinkageError report.Number `json:"shrinkage_error"`
	ShrinkageP     report.Number `json:"shrinkage_p"`

	Seconds  report.Number `json:"seconds"` // per run
	Drawing  []drawing     `json:"drawing"`
	Doubtful int           `json:"doubtful"` // runs whose own verdict is not "sound"

	Passed bool     `json:"passed"`
	Faults []string `json:"faults"` // why it did not pass
}

// drawing is the work of one way of drawing, summed over the runs.
type drawing struct {
	Name   string `json:"name"`
	Calls  int64  `json:"calls"`
	Points int64  `json:"points"`
}

// newRow turns the finished runs of a case into its row and judges it.
func newRow(c trials.Case, o options, runs []oneRun) row {
	nan := report.Number(math.NaN())
	r := row{
		Name: c.Name, Dim: c.Dim, Truth: report.Number(c.Truth), Source: c.Source, Remaining: c.Remaining, Aim: aim(c.Choice),
		Difference: nan, Error: nan, Calls: nan, IdealRatio: nan, RankP: nan,
		Shrinkage: nan, ShrinkageError: nan, ShrinkageP: nan, Seconds: nan,
		Drawing: []drawing{}, Faults: []string{},
	}
	var (
		pulls                                 []validation.Pull
		rankP, shrinks                        []float64
		calls, points, seconds, errs, differs float64
		open                                  int
	)
	for i, q := range runs {
		if !q.finished {
			continue
		}
		r.Seeds++
		if q.err != nil {
			r.Faults = append(r.Faults, fmt.Sprintf("run %d failed: %v", i, q.err))
			continue
		}
		if !q.converged {
			open++
			continue
		}
		if !q.sound {
			r.Doubtful++
		}
		r.Wanted = q.wanted
		if q.wanted > 0 && q.logZError > q.wanted {
			r.Faults = append(r.Faults, fmt.Sprintf("run %d ended at an error of %.3g, %.3g wanted", i, q.logZError, q.wanted))
		}
		pulls = append(pulls, validation.Pull{
			LogEvidence: q.logZ, Error: q.logZError, Z: (q.logZ - c.Truth) / q.logZError, Calls: q.calls,
		})
		rankP = append(rankP, q.rankP)
		shrinks = append(shrinks, q.shrinkages...)
		calls += float64(q.calls)
		points += float64(q.points)
		seconds += q.seconds
		errs += q.logZError
		differs += q.logZ - c.Truth
		r.add(q.phases)
	}
	if open > 0 {
		r.Faults = append(r.Faults, fmt.Sprintf("runs that did not converge: %d", open))
	}
	if n := float64(len(pulls)); n > 0 {
		r.Calls, r.IdealRatio = report.Number(calls/n), report.Number(calls/points)
		r.Seconds, r.Error, r.Difference = report.Number(seconds/n), report.Number(errs/n), report.Number(differs/n)
	}
	var faults []string
	r.Calibration, faults = trials.Calibrate(pulls)
	r.Faults = append(r.Faults, faults...)
	r.judgeDraws(rankP, shrinks)
	r.Passed = len(r.Faults) == 0
	return r
}

// judgeDraws sets what the insertion ranks and the shrinkages say of the draws.
func (r *row) judgeDraws(rankP, shrinks []float64) {
	p := validation.UniformP(rankP)
	r.RankP = report.Number(p)
	if p < trials.LeastP {
		r.Faults = append(r.Faults, fmt.Sprintf("insertion ranks p = %.1g", p))
	}
	if len(shrinks) < 2 {
		return
	}
	mean, deviation := stat.MeanStdDev(shrinks, nil)
	r.Shrinkage = report.Number(mean)
	r.ShrinkageError = report.Number(deviation / math.Sqrt(float64(len(shrinks))))
	uniform := make([]float64, len(shrinks))
	for i, s := range shrinks {
		uniform[i] = -math.Expm1(-s)
	}
	p = validation.UniformP(uniform)
	r.ShrinkageP = report.Number(p)
	if p < trials.LeastP {
		r.Faults = append(r.Faults, fmt.Sprintf("shrinkages p = %.1g, mean %.4f", p, mean))
	}
}

// add sums the work of the ways of drawing, in the order in which they are met.
func (r *row) add(phases []sampler.Phase) {
next:
	for _, p := range phases {
		for i := range r.Drawing {
			if r.Drawing[i].Name == p.Name {
				r.Drawing[i].Calls += p.Calls
				r.Drawing[i].Points += p.Points
				continue next
			}
		}
		r.Drawing = append(r.Drawing, drawing{p.Name, p.Calls, p.Points})
	}
}
