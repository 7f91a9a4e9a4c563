package sampler

import (
	"math"
	"time"
)

// Progress is the state of a run between two batches.
type Progress struct {
	Part      int   // 0 in the first run, then the number of the addition
	Iteration int   // batches of this part
	Calls     int64 // likelihood calls of all parts
	Resumed   int64 // calls of the state that the run went on from

	Earlier time.Duration // that those took

	// In nats: of the first run by the formula, then of all that is merged.
	LogEvidence, LogEvidenceError float64

	LogLikelihood float64 // threshold, nats
	Remaining     float64 // ln(1 + Z'/Z) of the first run, nats, see Settings.Remaining
	Fraction      float64 // rough share of the work done, 0 to 1, never falling
	Efficiency    float64 // accepted points per call in the last batch
	Phase         string  // way of drawing of the last batch

	// Trouble says why the state could not be kept; "" while it can.
	Trouble string
}

// gauge turns the work done into a share of all.
type gauge struct {
	fraction float64 // shown last
	done     float64 // points of the parts that are merged
	planned  float64 // points that the planned additions will have
}

// plan takes in what is planned.
func (m *gauge) plan(whole *Outcome, left []*path) {
	m.done, m.planned = float64(len(whole.Points)), 0
	for _, p := range left {
		m.planned += p.points()
	}
}

// points is about how many points the addition will have.
func (p *path) points() float64 {
	before, live := 0.0, p.first
	sum := 0.0
	for j, x := range p.logX {
		if j > 0 || p.first > 0 {
			sum += float64(live) * (before - x)
		}
		before, live = x, max(live, p.want[j])
	}
	return sum + float64(live)
}

// report tells the caller where the run is.
func (r *runner) report(m method, efficiency float64) {
	if r.set.Progress == nil {
		return
	}
	g := r.of
	p := Progress{
		Part: int(r.run), Iteration: r.out.Iterations,
		Calls: r.before + r.out.Calls, Resumed: g.resumed, Earlier: g.earlier,
		LogLikelihood: r.threshold, Efficiency: efficiency, Phase: m.String(),
	}
	if g.trouble != nil {
		p.Trouble = g.trouble.Error()
	}
	var fraction float64
	if r.path == nil {
		h := max(0, r.moment-r.logZ)
		variance := h / float64(r.set.LivePoints)
		p.LogEvidence, p.LogEvidenceError = logAdd(r.logZ, r.liveMean()+r.logX), math.Sqrt(variance)
		p.Remaining = r.remaining()
		r.part = max(r.part, r.share())
		fraction = r.part
		if e := r.set.EvidenceError; e > 0 {
			// The first of additions that will make up for the rest.
			fraction /= max(1, min(variance/(e*e), float64(r.set.MaxGrowth)))
		}
	} else {
		p.LogEvidence, p.LogEvidenceError = g.whole.LogEvidence, g.whole.LogEvidenceError
		now := float64(len(r.out.LogLikelihood))
		for _, part := range g.parts[g.merged:] {
			now += float64(len(part.Points))
		}
		fraction = (g.gauge.done + now) / (g.gauge.done + max(now, g.gauge.planned))
	}
	g.gauge.fraction = max(g.gauge.fraction, min(fraction, 1))
	p.Fraction = g.gauge.fraction
	r.set.Progress(p)
}

// share guesses how much of the first run is done, by compression. Were the
// likelihood a Gaussian, the best live point would be depth nats above the
// worst in the middle of a ball that has to shrink to depth = dim/2 to be in
// the bulk of the evidence, and by about -ln(Remaining) from there.
func (r *runner) share() float64 {
	if len(r.l) == 0 {
		return 0
	}
	done := -r.logX
	depth := r.l[len(r.l)-1] - r.l[0]
	half := float64(r.dim) / 2
	left := half * math.Log(max(1, depth/half))
	ratio := r.liveMean() + r.logX - r.logZ // ln Z'/Z
	left += max(0, min(ratio, 3)-math.Log(r.set.Remaining))
	return done / (done + left)
}
