package sampler

import (
	"fmt"

	"gonum.org/v1/gonum/stat/distuv"
)

// compareRuns sets RunsP: the p-value of chi-squared = Σ (ln Z_i - m)²/σ_i², m
// the mean weighted by 1/σ_i², of the parts that ended by themselves. Resampled
// strands cannot see a mode that one whole run lost: strands of both kinds are
// then drawn as if that were chance. Parts that were merged themselves bring
// their own p-value along, and the least, corrected for their number, counts.
func (o *Outcome) compareRuns(parts []*Outcome) {
	o.RunsP = 1
	var sum, mean float64
	least, tested := 1.0, 0.0
	for _, p := range parts {
		if p.compared {
			least = min(least, p.RunsP)
			tested++
		}
		if v := p.LogEvidenceError * p.LogEvidenceError; v > 0 && !p.Partial {
			sum += 1 / v
			mean += p.LogEvidence / v
		}
	}
	if sum > 0 {
		mean /= sum
		var chi2, freedom float64
		for _, p := range parts {
			if v := p.LogEvidenceError * p.LogEvidenceError; v > 0 && !p.Partial {
				chi2 += (p.LogEvidence - mean) * (p.LogEvidence - mean) / v
				freedom++
			}
		}
		if freedom > 1 {
			least = min(least, distuv.ChiSquared{K: freedom - 1}.Survival(chi2))
			tested++
		}
	}
	if tested > 0 {
		o.compared = true
		o.RunsP = min(1, least*tested)
	}
}

// disagreement warns of merged runs that disagree and returns the doubt.
func (o *Outcome) disagreement() string {
	if o.Runs < 2 || !o.compared || o.RunsP >= doubtfulP {
		return ""
	}
	o.Warnings = append(o.Warnings, fmt.Sprintf("the evidences of the merged runs differ by more than their errors: p = %.2g", o.RunsP))
	return "independent runs disagree, so one may have lost a mode: use more live points"
}
