package event

import (
	"math"

	"knell/internal/report"
	"knell/models"
	"knell/sampler"
)

// posteriorModes describes the parts that the posterior came apart into, those of
// more evidence first; nil where it is in one piece. columns are the parameters'
// values by point, weights the points'.
func posteriorModes(h *hypothesis, o *sampler.Outcome, parameters []models.Parameter, columns [][]float64, weights []float64) []report.PosteriorMode {
	found, of := o.Modes()
	if len(found) < 2 {
		return nil
	}
	list := make([]report.PosteriorMode, len(found))
	inside := make([]float64, len(weights))
	for m, mode := range found {
		for i, w := range weights {
			inside[i] = 0
			if of[i] == m {
				inside[i] = w
			}
		}
		list[m] = report.PosteriorMode{
			LogEvidenceOver:  report.Number(mode.LogEvidence.Value - h.allowed.logMass()),
			Error:            report.Number(math.Hypot(mode.LogEvidence.Error, h.allowed.error)),
			Share:            report.Number(mode.Share.Value),
			ShareError:       report.Number(mode.Share.Error),
			Points:           mode.Points,
			MaxLogLikelihood: report.Number(o.LogLikelihood[mode.Best]),
		}
		for j, p := range parameters {
			// A fixed parameter is where it is in every mode.
			if h.set.FreeIndex(p.Name) < 0 {
				continue
			}
			list[m].Parameters = append(list[m].Parameters, summary(p, columns[j], inside))
		}
	}
	return list
}

// summary is the median and the central 90 % interval of one column.
func summary(p models.Parameter, values, weights []float64) report.ParameterSummary {
	q := weightedQuantiles(values, weights, 0.05, 0.5, 0.95)
	return report.ParameterSummary{
		Parameter: p.Name, Unit: p.Unit,
		Low90: report.Number(q[0]), Median: report.Number(q[1]), High90: report.Number(q[2]),
	}
}

// phases is the run's account of its ways of drawing.
func phases(o *sampler.Outcome) []report.Phase {
	var list []report.Phase
	for _, p := range o.Phases {
		list = append(list, report.Phase{
			Name: p.Name, Calls: p.Calls, Points: p.Points, Efficiency: report.Number(p.Efficiency()),
			Ranks: p.Ranks, InsertionRankP: report.Number(p.InsertionRankP), InsertionRankBlockP: report.Number(p.InsertionRankBlockP),
		})
	}
	return list
}
