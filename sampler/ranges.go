package sampler

import (
	"math"
	"slices"
)

// ranges cuts the outcome into ranges of about step nats of compression, the
// first of which begins at the prior and the last of which ends with the
// outcome. A range after the last birth is not cut.
type ranges struct {
	level []float64 // at which each range begins, the first -Inf
	logX  []float64 // expected ln of the volume there
	step  []float64 // compression of each range, nats
	live  []float64 // mean live number
	mass  []float64 // posterior probability of each range
	above []float64 // and that of all from the middle of the range on

	// Sums over the points of the range: of the squared weights p, and of the
	// squares of G/n - p, which make up the variance of ln Z: the removal of a
	// point of live number n scales the volume above it, with the probability G
	// there, and takes its own edge along. Both fall as 1/live.
	squares, variance []float64
}

func (o *Outcome) ranges(step float64) *ranges {
	g := &ranges{}
	last := slices.Max(o.Birth)
	logX := o.priorShrinkage().mean
	begin := func(level float64) {
		g.level = append(g.level, level)
		g.logX = append(g.logX, logX)
		for _, s := range []*[]float64{&g.step, &g.live, &g.mass, &g.above, &g.squares, &g.variance} {
			*s = append(*s, 0)
		}
	}
	begin(math.Inf(-1))
	above := 1.0
	for i, l := range o.LogLikelihood {
		j := len(g.level) - 1
		if g.step[j] >= step && o.LogLikelihood[i-1] < l && o.LogLikelihood[i-1] <= last {
			g.above[j] = 0.5 * (g.above[j] + above)
			begin(o.LogLikelihood[i-1])
			j++
		}
		if g.live[j] == 0 {
			g.above[j] = above
		}
		p := math.Exp(o.LogWeight[i])
		n := float64(o.LiveCount[i])
		above = max(0, above-p)
		share := above/n - p
		logX -= 1 / n
		g.step[j] += 1 / n
		g.live[j]++
		g.mass[j] += p
		g.squares[j] += p * p
		g.variance[j] += share * share
	}
	g.above[len(g.above)-1] *= 0.5
	for j := range g.live {
		g.live[j] /= g.step[j]
	}
	return g
}
