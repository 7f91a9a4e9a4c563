package event

import (
	"math"
	"sort"

	"gonum.org/v1/gonum/stat"

	"knell/internal/report"
	"knell/models"
	"knell/sampler"
)

// summarise turns a sampler's outcome into the report's entry and the
// posterior file's columns: every parameter in its physical unit, the derived
// quantities, the log-likelihood over noise and absolute.
func (p *Prepared) summarise(h *hypothesis, o *sampler.Outcome) (report.Hypothesis, report.Posterior, error) {
	largest := math.Inf(-1)
	for _, l := range o.LogLikelihood {
		largest = max(largest, l)
	}
	entry := report.Hypothesis{
		Name: h.Name, Model: h.Model, Dimensions: h.set.Dim(),
		LogEvidence:      report.Number(o.LogEvidence - h.allowed.logMass() + p.likelihood.LogNoise()),
		LogEvidenceError: report.Number(math.Hypot(o.LogEvidenceError, h.allowed.error)),
		LogEvidenceOver:  report.Number(o.LogEvidence - h.allowed.logMass()),
		Calls:            o.Calls, LivePoints: o.LivePoints,
		// The density of the prior that is left is higher by one over its mass.
		Information:         report.Number(o.Information + h.allowed.logMass()),
		EffectiveSamples:    report.Number(o.EffectiveSamples),
		InsertionRankP:      report.Number(o.InsertionRankP),
		InsertionRankBlockP: report.Number(o.InsertionRankBlockP),
		Efficiency:          report.Number(o.Efficiency()), Phases: phases(o),
		Status: o.Status.String(), Partial: o.Partial,
		BootstrapError: report.Number(math.Hypot(o.BootstrapError, h.allowed.error)),
		ErrorTension:   report.Number(o.ErrorTension),
		Verdict:        o.Verdict, Warnings: o.Warnings,
		MaxLogLikelihood: report.Number(largest),
	}

	columns := append(append([]models.Parameter(nil), h.model.Parameters()...), h.model.Derived()...)
	weighted := newColumns(len(columns), len(o.Points))
	theta := make([]float64, len(h.model.Parameters()))
	derived := make([]float64, len(h.model.Derived()))
	for i, u := range o.Points {
		h.place(u, theta)
		if err := h.model.Derive(theta, derived); err != nil {
			return entry, report.Posterior{}, err
		}
		for j, v := range theta {
			weighted[j][i] = v
		}
		for j, v := range derived {
			weighted[len(theta)+j][i] = v
		}
	}
	weights := make([]float64, len(o.LogWeight))
	for i, l := range o.LogWeight {
		weights[i] = math.Exp(l)
	}
	unstable, err := h.unstable(o.Points, weights)
	if err != nil {
		return entry, report.Posterior{}, err
	}
	entry.StablePrior = report.Number(h.allowed.mass)
	entry.UnstablePosterior = report.Number(unstable)
	for j, c := range columns {
		entry.Summary = append(entry.Summary, summary(c, weighted[j], weights))
	}
	entry.Modes = posteriorModes(h, o, h.model.Parameters(), weighted, weights)
	entry.DensityRatios = p.densityRatios(h, o)

	_, chosen := o.EqualWeight(p.Config.Seed, 0)
	posterior := report.Posterior{Name: h.Name, Values: newColumns(len(columns)+2, len(chosen))}
	for j, c := range columns {
		posterior.Columns = append(posterior.Columns, c.Name)
		posterior.Units = append(posterior.Units, c.Unit)
		for k, i := range chosen {
			posterior.Values[j][k] = weighted[j][i]
		}
	}
	posterior.Columns = append(posterior.Columns, "log_likelihood_over_noise", "log_likelihood")
	posterior.Units = append(posterior.Units, "nat", "nat")
	for k, i := range chosen {
		posterior.Values[len(columns)][k] = o.LogLikelihood[i]
		posterior.Values[len(columns)+1][k] = o.LogLikelihood[i] + p.likelihood.LogNoise()
	}
	return entry, posterior, nil
}

func newColumns(n, length int) [][]float64 {
	columns := make([][]float64, n)
	for i := range columns {
		columns[i] = make([]float64, length)
	}
	return columns
}

// weightedQuantiles returns the quantiles of x under the weights, which need not
// be normalised. What is not a number counts as larger than every number.
func weightedQuantiles(x, weights []float64, levels ...float64) []float64 {
	order := make([]int, len(x))
	for i := range order {
		order[i] = i
	}
	sort.Slice(order, func(a, b int) bool {
		v, w := x[order[a]], x[order[b]]
		return v < w || math.IsNaN(w) && !math.IsNaN(v)
	})
	sortedX, sortedW := make([]float64, len(x)), make([]float64, len(x))
	numbers, weight, all := 0, 0.0, 0.0
	for i, k := range order {
		sortedX[i], sortedW[i] = x[k], weights[k]
		all += weights[k]
		if !math.IsNaN(x[k]) {
			numbers, weight = i+1, all
		}
	}
	out := make([]float64, len(levels))
	for i, level := range levels {
		out[i] = math.NaN()
		if share := level * (all / weight); share <= 1 {
			out[i] = stat.Quantile(share, stat.Empirical, sortedX[:numbers], sortedW[:numbers])
		}
	}
	return out
}
