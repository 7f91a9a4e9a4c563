package sampler

import (
	"context"
	"fmt"
	"math"
)

// dominant is the share of the evidence above which one weight is said to
// dominate (common practice, no source).
const dominant = 0.05

// Importance computes the evidence by importance sampling with a defensive
// density: a share α = s.PriorShare of the draws comes from the prior, the rest
// from a density q fitted to all posterior points of the finished run, and
//
//	Z = mean over draws of L / (α + (1-α) q)
//
// (Technometrics 37, 185 (1995)). No weight exceeds L/α, however badly q fits.
// α is the exact share of the draws: s.PriorShare of s.Draws, rounded, at least 2.
//
// The error is the standard error of the mean, from the variances within the
// two kinds of draws, over Z. The draws are independent, and given q nothing of
// the run enters but through q, so the estimate is right whatever the run's
// points are worth; what q misses costs error, and where hardly a draw falls
// the error is too small. A largest weight that dominates is a warning.
//
// It costs s.Draws likelihood calls; errors and repeatability are those of Bridge.
func (o *Outcome) Importance(ctx context.Context, newTarget func() (Target, error), s RouteSettings) (Estimate, error) {
	e := Estimate{Route: "importance"}
	r, err := o.newRoute(newTarget, s)
	if err != nil {
		return e, err
	}
	if err := r.fit(o.posterior()); err != nil {
		return e, err
	}
	s = r.RouteSettings
	e.Components = len(r.q.components)
	uniform := max(2, int(math.Round(s.PriorShare*float64(s.Draws))))
	if s.Draws-uniform < 2 { // a variance needs two of each kind
		uniform = s.Draws
	}
	d, err := r.draw(ctx, "importance draw", s.Draws, uniform)
	if err != nil {
		return e, err
	}
	e.Calls = int64(s.Draws)
	share := float64(uniform) / float64(s.Draws)
	logWeight := make([]float64, s.Draws)
	for i := range logWeight {
		logWeight[i] = d.logL[i] - logAdd(math.Log(share), math.Log1p(-share)+d.logQ[i])
	}
	var largest float64
	e.LogEvidence, e.EffectiveSamples, largest = summariseWeights(logWeight)
	if e.EffectiveSamples == 0 {
		return e, fmt.Errorf("sampler: importance: the likelihood is zero at all %d draws", s.Draws)
	}
	e.Error = math.Sqrt(squares(logWeight[:uniform], e.LogEvidence)+squares(logWeight[uniform:], e.LogEvidence)) / float64(s.Draws)
	if largest > dominant {
		e.warn("the largest importance weight holds %.0f %% of the evidence: the fitted density misses part of the posterior, and the error may be too small", 100*largest)
	}
	o.doubts(&e)
	return e, nil
}

// squares is n times the variance of the weights exp(v - logZ).
func squares(v []float64, logZ float64) float64 {
	if len(v) < 2 {
		return 0
	}
	w := make([]float64, len(v))
	for i, x := range v {
		w[i] = math.Exp(x - logZ)
	}
	_, sd := meanSD(w)
	return float64(len(v)) * sd * sd
}
