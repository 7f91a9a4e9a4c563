package sampler

import (
	"math"
	"math/rand/v2"
	"slices"
)

const (
	folds      = 5 // each cross-validation round leaves out a fifth
	foldRounds = 4

	// fewOuter is the number of members below which a cross-validation looks at
	// all of them, and otherwise at the outermost quarter, which is where those
	// are that set a radius or lie beyond it.
	fewOuter = 80
)

// crossValidation is what the rounds of one ellipsoid share: its members around
// its mean, and their distances.
type crossValidation struct {
	dim     int
	e       *ellipsoid
	points  []float64
	outer   []bool  // by member: whether it counts for radii
	total   scatter // of all members around the mean
	part    scatter // of those left out
	rest    scatter
	first   []float64 // sum of those left out, around the mean
	shifted []float64
}

func newCrossValidation(points []float64, dim int, e *ellipsoid) *crossValidation {
	v := &crossValidation{dim: dim, e: e, points: points,
		total: newScatter(dim), part: newScatter(dim), rest: newScatter(dim),
		first: make([]float64, dim), shifted: make([]float64, dim),
	}
	n := len(e.members)
	v.outer = make([]bool, n)
	distance := make([]float64, n)
	for j, i := range e.members {
		x := points[i*dim : (i+1)*dim]
		v.add(v.total, x)
		distance[j] = e.distance2(x, math.Inf(1))
	}
	least := math.Inf(-1)
	if n >= fewOuter {
		sorted := slices.Clone(distance)
		slices.Sort(sorted)
		least = sorted[n-n/4]
	}
	for j, d := range distance {
		v.outer[j] = d >= least
	}
	return v
}

// add adds a point to a scatter around the mean.
func (v *crossValidation) add(s scatter, x []float64) {
	for k := range v.shifted {
		v.shifted[k] = x[k] - v.e.mean[k]
	}
	s.add(v.shifted)
}

// leaveOut fits the members but for those given by their places, as fitShaped
// does: their scatter is that of all without that of those left out.
func (v *crossValidation) leaveOut(out []int, left []int) (ellipsoid, bool) {
	dim := v.dim
	clear(v.part.a)
	clear(v.first)
	for _, j := range out {
		i := v.e.members[j]
		v.add(v.part, v.points[i*dim:(i+1)*dim])
		for k, d := range v.shifted {
			v.first[k] += d
		}
	}
	n := float64(len(left))
	mean := make([]float64, dim)
	for k, s := range v.first {
		v.shifted[k] = -s / n // of the rest's mean
		mean[k] = v.e.mean[k] + v.shifted[k]
	}
	shape := v.e.shape
	for r := range dim {
		for k := 0; k <= r; k++ {
			at := r*dim + k
			v.rest.a[at] = (v.total.a[at] - v.part.a[at] - n*v.shifted[r]*v.shifted[k] + shape.scatter.a[at]) / (n + shape.weight)
		}
	}
	fit, ok := v.rest.ellipsoid(mean)
	if !ok {
		return fit, false
	}
	fit.radius2 = float64(dim + 2)
	for _, j := range left {
		if v.outer[j] {
			i := v.e.members[j]
			fit.radius2 = max(fit.radius2, fit.distance2(v.points[i*dim:(i+1)*dim], math.Inf(1)))
		}
	}
	return fit, true
}

// crossValidate leaves out parts of the members of ellipsoid c in turn, fits the
// rest alone, and returns the factor by which the squared radius of such a fit
// must grow, at most, to hold the points it has not seen and that no other
// ellipsoid holds. It is at least 1.
func (b *bound) crossValidate(c, rounds int, rng *rand.Rand) float64 {
	e := &b.ellipsoids[c]
	n := len(e.members)
	grow := 1.0
	v := newCrossValidation(b.points, b.dim, e)
	order := make([]int, n) // places among the members
	for j := range order {
		order[j] = j
	}
	rest := make([]int, 0, n)
	for range rounds {
		rng.Shuffle(n, func(i, j int) { order[i], order[j] = order[j], order[i] })
		for f := range folds {
			lo, hi := f*n/folds, (f+1)*n/folds
			if lo == hi || hi-lo == n {
				continue
			}
			rest = append(append(rest[:0], order[:lo]...), order[hi:]...)
			fit, ok := v.leaveOut(order[lo:hi], rest)
			if !ok {
				continue
			}
			for _, j := range order[lo:hi] {
				if !v.outer[j] {
					continue
				}
				i := e.members[j]
				x := b.points[i*b.dim : (i+1)*b.dim]
				if d := fit.distance2(x, math.Inf(1)) / fit.radius2; d > grow && !b.held(x, c) {
					grow = d
				}
			}
		}
	}
	return grow
}
