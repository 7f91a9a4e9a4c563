package sampler

import (
	"math"
	"math/rand/v2"
	"slices"
)

const (
	// foresight times the excess of the factor found by cross-validation over 1
	// is what the squared radius grows by. More costs calls and misses less
	// (TestBoundCoversUnseenPoints). The share left outside, times the information,
	// is the bias of the log-evidence.
	foresight = 0.85

	// margin is the number of points whose volume is added around each ellipsoid
	// besides.
	margin = 1

	// C ellipsoids of fixed shapes, each the least that holds its own points,
	// miss about C/n together. So each grows beyond that by tail·ln C times the
	// mean log-excess of its tailMost largest squared distances over the next,
	// tail being tailLeast + tailPerDim·dim. Without, a mixture of four skewed
	// modes in ten dimensions (log-gamma in validation/evidence) loses volume where
	// the modes part, and its log-evidence is high by half an error.
	tailLeast, tailPerDim = 0.3, 0.03
	tailMost              = 10

	// The points removed last, edgeShare of the number of the live ones, lie just
	// outside the region, where a bound misses something if it misses anything,
	// and neither shapes nor radii were made to hold them: each ellipsoid grows
	// to hold those near it, which have less than edgeMost times its squared
	// radius. The corners of a box are missed less for it.
	edgeShare = 0.1
	edgeMost  = 1.5
)

// enlarge grows the ellipsoids, which just hold their members, by the factors
// of their cross-validations.
func (b *bound) enlarge(rounds int, rng *rand.Rand) {
	grow := make([]float64, len(b.ellipsoids))
	for c := range b.ellipsoids {
		grow[c] = b.crossValidate(c, rounds, rng)
	}
	tail := (tailLeast + tailPerDim*float64(b.dim)) * math.Log(float64(len(b.ellipsoids)))
	for c := range b.ellipsoids {
		e := &b.ellipsoids[c]
		if tail > 0 {
			e.radius2 *= math.Exp(tail * b.tail(e))
		}
		e.radius2 *= (1 + foresight*(grow[c]-1)) * math.Pow(1+margin/float64(len(e.members)), 2/float64(b.dim))
	}
}

// tail returns the mean excess of the logs of the largest squared distances of
// an ellipsoid's members over the next.
func (b *bound) tail(e *ellipsoid) float64 {
	d := make([]float64, len(e.members))
	for j, i := range e.members {
		d[j] = e.distance2(b.points[i*b.dim:(i+1)*b.dim], math.Inf(1))
	}
	k := min(len(d)/5, tailMost)
	if k < 1 {
		return 0
	}
	slices.Sort(d)
	n := len(d) - 1
	var sum float64
	for i := range k {
		sum += math.Log(d[n-i] / d[n-k])
	}
	return sum / float64(k)
}

// reach grows the ellipsoids to hold the points removed last.
func (b *bound) reach() {
	dim := b.dim
	have := len(b.recent) / dim
	edge := min(have, int(edgeShare*float64(len(b.points)/dim)))
	for i := have - edge; i < have; i++ {
		x := b.recent[i*dim : (i+1)*dim]
		if b.held(x, -1) {
			continue
		}
		e := &b.ellipsoids[b.cell(x)]
		if d := e.distance2(x, math.Inf(1)); d < edgeMost*e.radius2 {
			e.radius2 = d
		}
	}
}

// held reports whether an ellipsoid other than number c holds x.
func (b *bound) held(x []float64, c int) bool {
	for o := range b.ellipsoids {
		if o != c && b.ellipsoids[o].contains(x) {
			return true
		}
	}
	return false
}
