package sampler

import (
	"math"
	"slices"
)

const (
	// growthStep is the compression, in nats, from one level of an addition to
	// the next: it is replenished there. Where few strands are added, levels
	// are further apart, so that a batch is worth sending.
	growthStep, coarseStep = 1.0 / 16, 1.0 / 4

	// beyond is by how much more than what is wanted an addition aims at: its own
	// gain is known to a few percent, and a second addition costs more than
	// that.
	beyond = 0.02

	// smoothing is the number of ranges on either side that the posterior
	// density in ln X is averaged over.
	smoothing = 2
)

// reached reports whether the targets hold.
func (s Settings) reached(o *Outcome) bool {
	return (s.EvidenceError == 0 || o.LogEvidenceError <= s.EvidenceError) && o.EffectiveSamples >= s.PosteriorSamples
}

// additions plans the strands that an outcome needs for the targets to hold: for
// one runner after another. limited says that MaxGrowth does not let them.
//
// With n the live number, P the posterior density in ln X and G the probability
// above X, the variance of ln Z is ∫ (G-P)²/n d(-ln X) and the effective number of
// samples is 1/∫ P²/n d(-ln X); the points cost ∫ n d(-ln X). So n is best
// proportional to |G-P| for the evidence and to P for the posterior. The live
// number wanted is the largest of what there is and these two, each scaled until
// its target holds.
func (s Settings) additions(o *Outcome) (paths []*path, limited bool) {
	g := o.ranges(growthStep)
	n := len(g.level)
	want := slices.Clone(g.live)
	most := float64(s.MaxGrowth) * float64(s.LivePoints)
	// raise lifts want to a multiple of shape until the sum of value, which is now
	// with the live numbers there are, falls to goal.
	raise := func(shape, value []float64, now, goal float64) {
		base, all := slices.Clone(want), sum(value)
		predicted := func(scale float64) float64 {
			var left float64
			for j := range want {
				want[j] = max(base[j], min(scale*shape[j], most))
				left += value[j] * g.live[j] / want[j]
			}
			return now * left / all
		}
		top := slices.Max(shape)
		if top == 0 || predicted(0) <= goal {
			return
		}
		lo, hi := 0.0, most/top
		if predicted(hi) > goal {
			// The peak is at its limit. Filling up what lies below it buys little.
			limited = true
			return
		}
		for range 60 {
			if mid := 0.5 * (lo + hi); predicted(mid) > goal {
				lo = mid
			} else {
				hi = mid
			}
		}
		predicted(hi)
	}
	if e := s.EvidenceError; e > 0 && o.LogEvidenceError > e {
		// The zeros among the first draws fade with the strands that begin there.
		g.variance[0] += o.zeroVariance()
		raise(g.leverage(), g.variance, o.LogEvidenceError*o.LogEvidenceError, e*e*(1-beyond))
	}
	if e := s.PosteriorSamples; e > 0 && o.EffectiveSamples < e {
		raise(g.density(), g.squares, 1/o.EffectiveSamples, (1-beyond)/e)
	}
	more := make([]int, n)
	peak := 0
	for j := range more {
		if x := want[j] - g.live[j]; x > 1e-9 {
			more[j] = int(math.Ceil(x))
			peak = max(peak, more[j])
		}
	}
	chunk := s.companions()
	count := (peak + chunk - 1) / chunk
	for i := range count {
		paths = append(paths, s.path(g, more, i, count))
	}
	return paths, limited
}

// path makes addition number i of count: it has its share of the strands at each
// level, so that all have the same rise and fall.
func (s Settings) path(g *ranges, more []int, i, count int) *path {
	of := func(j int) int { return more[j]*(i+1)/count - more[j]*i/count }
	p := &path{first: of(0)}
	peak := 0
	end := 0
	for j := range more {
		if w := of(j); w > 0 {
			peak, end = max(peak, w), j
		}
	}
	// A batch should be about as large as those of the first run.
	step := float64(s.LivePoints) / BatchShare / float64(peak)
	step = min(max(step, growthStep), coarseStep)
	at := math.Inf(1)
	if p.first > 0 {
		at = g.logX[0]
	}
	for j := 1; j <= end; j++ {
		w := of(j)
		if len(p.level) == 0 && p.first == 0 && w == 0 {
			continue // not begun
		}
		if at-g.logX[j] < step*(1-1e-9) && j < end {
			continue
		}
		at = g.logX[j]
		p.level = append(p.level, g.level[j])
		p.want = append(p.want, w)
		p.logX = append(p.logX, g.logX[j])
	}
	// The last range ends here: from there on nothing is replaced.
	if j := end + 1; j < len(g.level) {
		p.level = append(p.level, g.level[j])
		p.want = append(p.want, 0)
		p.logX = append(p.logX, g.logX[j])
	}
	return p
}

// leverage is |G-P|, see additions.
func (g *ranges) leverage() []float64 {
	d := g.density()
	for j := range d {
		d[j] = math.Abs(g.above[j] - d[j])
	}
	return d
}

// density is the posterior density in ln X, smoothed.
func (g *ranges) density() []float64 {
	d := make([]float64, len(g.mass))
	for j := range d {
		var mass, step float64
		for i := max(0, j-smoothing); i <= min(len(d)-1, j+smoothing); i++ {
			mass += g.mass[i]
			step += g.step[i]
		}
		d[j] = mass / step
	}
	return d
}

func sum(v []float64) float64 {
	var total float64
	for _, x := range v {
		total += x
	}
	return total
}
