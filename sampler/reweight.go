package sampler

import (
	"fmt"
	"math"
	"runtime"
)

// ReweightBy is Reweight with the ratio as a function of a point of the unit
// cube, called once per point, in order.
func (o *Outcome) ReweightBy(logRatio func(u []float64) float64) (*Posterior, error) {
	ratio := make([]float64, len(o.Points))
	for i, u := range o.Points {
		ratio[i] = logRatio(u)
	}
	return o.Reweight(ratio)
}

// Reweight returns evidence and posterior for another prior or likelihood from
// the same points. logRatio has, for each point, ln of the new prior density
// times likelihood over that of the run; -Inf rules a point out. It is best
// taken before any normalisation of the posterior: a change of prior keeps the
// likelihood, and its ratio is that of the two normalised prior densities.
//
//	ln Z' = ln Z + ln Σ w_i r_i,  w'_i ∝ w_i r_i
//
// The errors are those of the whole estimate over resampled strands. What the
// run gave no weight, no ratio brings back: the new posterior must lie within
// the old one, or the warnings say that few effective samples are left. Where
// the run's likelihood was zero it has no points, whatever the ratio is there.
func (o *Outcome) Reweight(logRatio []float64) (*Posterior, error) {
	if len(logRatio) != len(o.LogWeight) {
		return nil, fmt.Errorf("sampler: Reweight by %d ratios, want one for each of %d points", len(logRatio), len(o.LogWeight))
	}
	top := math.Inf(-1)
	for i, r := range logRatio {
		if math.IsNaN(r) || math.IsInf(r, 1) {
			return nil, fmt.Errorf("sampler: Reweight: ln of the ratio at point %d is %v, want a finite number or -Inf", i, r)
		}
		top = max(top, r+o.LogWeight[i])
	}
	if math.IsInf(top, -1) {
		return nil, fmt.Errorf("sampler: Reweight: the ratio is zero at every point of the posterior, want some above zero")
	}
	p := &Posterior{outcome: o, shift: logRatio, LogWeight: make([]float64, len(logRatio))}
	var sum, square, most float64 // of the new weights
	for i, r := range logRatio {
		w := math.Exp(r + o.LogWeight[i] - top)
		sum += w
		square += w * w
		most = max(most, w)
	}
	mean := top + math.Log(sum) // ln Σ w r
	for i, r := range logRatio {
		p.LogWeight[i] = r + o.LogWeight[i] - mean
	}
	p.EffectiveSamples = sum * sum / square
	p.LogEvidence = Quantity{o.LogEvidence + mean, math.NaN()}
	p.LogRatio = Quantity{mean, math.NaN()}
	if p.runs = o.resample(logRatio); p.runs != nil {
		plain := o.resample(nil)
		now, before := make([]float64, p.runs.most), make([]float64, p.runs.most)
		workers := runtime.GOMAXPROCS(0)
		p.runs.each(workers, func(at int, z float64, _ []float64) { now[at] = z })
		plain.each(workers, func(at int, z float64, _ []float64) { before[at] = z })
		p.LogEvidence.Error = p.runs.spread(now)
		for at := range now {
			now[at] -= before[at]
		}
		p.LogRatio.Error = p.runs.spread(now)
	}
	if p.EffectiveSamples < coarse {
		p.Warnings = append(p.Warnings, fmt.Sprintf(
			"reweighting leaves %.0f effective samples of %.0f, the largest weight is %.2g of the sum: the errors may be too small; sample the new problem itself",
			p.EffectiveSamples, o.EffectiveSamples, most/sum))
	}
	return p, nil
}
