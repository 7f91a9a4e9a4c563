package sampler

import "math"

// report tells the caller where the run is.
func (r *runner) report(m method, efficiency float64) {
	if r.set.Progress == nil {
		return
	}
	live := r.liveMean() + r.logX
	logZ := logAdd(r.logZ, live)
	h := max(0, r.moment-r.logZ)
	variance := h / float64(r.set.LivePoints)
	r.part = max(r.part, r.share())
	fraction := r.part
	if p := r.prior; p.runs > 0 {
		// This run beside those that were merged.
		w := 1 / (1 + float64(p.known))
		logZ = w*logZ + (1-w)*p.logZ
		variance = w*w*variance + (1-w)*(1-w)*p.variance
		fraction = (float64(p.runs) + r.part) / float64(p.wanted)
	} else if r.set.EvidenceError > 0 {
		// One run of this information will be one of so many.
		runs := max(1, math.Ceil(variance/(r.set.EvidenceError*r.set.EvidenceError)))
		fraction /= min(runs, float64(r.set.MaxGrowth))
	}
	r.prior.fraction = max(r.prior.fraction, fraction)
	r.set.Progress(Progress{
		Run:              int(r.run),
		Iteration:        r.out.Iterations,
		Calls:            r.prior.calls + r.out.Calls,
		LogEvidence:      logZ,
		LogEvidenceError: math.Sqrt(variance),
		LogLikelihood:    r.l[0],
		Remaining:        r.remaining(),
		Fraction:         r.prior.fraction,
		Efficiency:       efficiency,
		Phase:            m.String(),
	})
}

// share guesses how much of this run is done, by compression. Were the
// likelihood a Gaussian, the best live point would be depth nats above the
// worst in the middle of a ball that has to shrink to depth = dim/2 to be in
// the bulk of the evidence, and by about -ln(Remaining) from there.
func (r *runner) share() float64 {
	done := -r.logX
	depth := r.l[len(r.l)-1] - r.l[0]
	half := float64(r.dim) / 2
	left := half * math.Log(max(1, depth/half))
	ratio := r.liveMean() + r.logX - r.logZ // ln Z'/Z
	left += max(0, min(ratio, 3)-math.Log(r.set.Remaining))
	return done / (done + left)
}
