package sampler

import (
	"math"
	"math/rand/v2"
)

const (
	// splitGain is how much smaller, in log-volume, the parts of a cluster
	// must be than the whole to be kept. Each further ellipsoid adds about as
	// much uncovered volume as the one before, so it has to pay for itself.
	splitGain = 0.25

	// tightEnough is the log-volume over its share of the expected prior
	// volume below which a cluster is not tried for a split.
	tightEnough = 0.25

	lloydRounds  = 8
	refineRounds = 4
)

// cluster splits the members among the n×dim points into groups whose
// ellipsoids have the least total volume. logShare is the log of the prior
// volume per point. It returns the groups' fits, radius2 set by leave-one-out.
//
// A split is judged only after its parts were split in turn: two halves of
// eighteen modes are no better than the whole, eighteen parts are.
func cluster(points []float64, dim int, members []int, logShare float64, rng *rand.Rand) []ellipsoid {
	whole, ok := fitEllipsoid(points, dim, members)
	if !ok {
		return nil
	}
	whole.radius2 = hold(points, dim, &whole) * crossValidate(points, dim, &whole, 1, nil, rng)
	own := []ellipsoid{whole}
	n := len(members)
	least := leastMembers(dim)
	volume := whole.logVolume()
	if n < 2*least || volume < logShare+math.Log(float64(n))+tightEnough {
		return own
	}
	best := own
	for _, far := range []bool{true, false} {
		a, b := bisect(points, dim, &whole, least, far, rng)
		if a == nil {
			continue
		}
		left := cluster(points, dim, a, logShare, rng)
		right := cluster(points, dim, b, logShare, rng)
		if left == nil || right == nil {
			continue
		}
		parts := append(left, right...)
		if v := totalVolume(parts); v < volume-splitGain {
			best, volume = parts, v
			break
		}
	}
	return best
}

// leastMembers is the least number of points an ellipsoid is fitted to.
func leastMembers(dim int) int { return 3 * (dim + 1) }

func totalVolume(es []ellipsoid) float64 {
	top := math.Inf(-1)
	for i := range es {
		top = max(top, es[i].logVolume())
	}
	var sum float64
	for i := range es {
		sum += math.Exp(es[i].logVolume() - top)
	}
	return top + math.Log(sum)
}

// hold returns the least radius2 that holds the members of e.
func hold(points []float64, dim int, e *ellipsoid) float64 {
	var r float64
	for _, i := range e.members {
		r = max(r, e.distance2(points[i*dim:(i+1)*dim], math.Inf(1)))
	}
	return r
}

// crossValidate leaves out parts of the members of e in turn, fits the rest
// alone, and returns the factor by which the squared radius of such a fit must
// grow, at most, to hold the points it has not seen. Points for which held is
// true need not be. The factor is at least that of a shell with margin/n of the
// volume.
func crossValidate(points []float64, dim int, e *ellipsoid, rounds int, held func(x []float64) bool, rng *rand.Rand) float64 {
	n := len(e.members)
	grow := math.Pow(1+margin/float64(n), 2/float64(dim))
	order := append([]int(nil), e.members...)
	rest := make([]int, 0, n)
	for range rounds {
		rng.Shuffle(n, func(i, j int) { order[i], order[j] = order[j], order[i] })
		for f := range folds {
			lo, hi := f*n/folds, (f+1)*n/folds
			rest = append(append(rest[:0], order[:lo]...), order[hi:]...)
			fit, ok := fitEllipsoid(points, dim, rest)
			if !ok {
				continue
			}
			fit.radius2 = hold(points, dim, &fit)
			for _, i := range order[lo:hi] {
				x := points[i*dim : (i+1)*dim]
				if d := fit.distance2(x, math.Inf(1)) / fit.radius2; d > grow && (held == nil || !held(x)) {
					grow = d
				}
			}
		}
	}
	return grow
}

// bisect splits the members of e in two: 2-means on whitened coordinates, then
// reassignment to the likelier of the two Gaussians, which lets a narrow group
// leave a wide one. It starts from two far points, or two random ones, and
// returns nil if a part falls below least.
func bisect(points []float64, dim int, e *ellipsoid, least int, far bool, rng *rand.Rand) (a, b []int) {
	n := len(e.members)
	y := make([]float64, n*dim)
	var start int
	var worst float64
	for j, i := range e.members {
		row := y[j*dim : (j+1)*dim]
		e.whiten(points[i*dim:(i+1)*dim], row)
		if d := dot(row, row); d > worst {
			start, worst = j, d
		}
	}
	other := -1
	if far {
		worst = 0
		for j := range n {
			if d := gap2(y[j*dim:(j+1)*dim], y[start*dim:(start+1)*dim]); d > worst {
				other, worst = j, d
			}
		}
	} else {
		start, other = rng.IntN(n), rng.IntN(n)
	}
	if other < 0 || start == other {
		return nil, nil
	}
	centre := [2][]float64{append([]float64(nil), y[start*dim:(start+1)*dim]...), append([]float64(nil), y[other*dim:(other+1)*dim]...)}
	side := make([]bool, n)
	for round := range lloydRounds {
		changed := false
		for j := range n {
			row := y[j*dim : (j+1)*dim]
			s := gap2(row, centre[1]) < gap2(row, centre[0])
			changed = changed || s != side[j]
			side[j] = s
		}
		if round > 0 && !changed {
			break
		}
		var count [2]float64
		clear(centre[0])
		clear(centre[1])
		for j, s := range side {
			c := 0
			if s {
				c = 1
			}
			count[c]++
			for k := range dim {
				centre[c][k] += y[j*dim+k]
			}
		}
		if count[0] == 0 || count[1] == 0 {
			return nil, nil
		}
		for c := range centre {
			for k := range dim {
				centre[c][k] /= count[c]
			}
		}
	}
	a, b = divide(e.members, side)
	for range refineRounds {
		if min(len(a), len(b)) < dim+2 {
			break
		}
		ea, okA := fitEllipsoid(points, dim, a)
		eb, okB := fitEllipsoid(points, dim, b)
		if !okA || !okB {
			break
		}
		biasA := 2*ea.logDet - 2*math.Log(float64(len(a)))
		biasB := 2*eb.logDet - 2*math.Log(float64(len(b)))
		changed := false
		for j, i := range e.members {
			x := points[i*dim : (i+1)*dim]
			s := eb.distance2(x, math.Inf(1))+biasB < ea.distance2(x, math.Inf(1))+biasA
			changed = changed || s != side[j]
			side[j] = s
		}
		if !changed {
			break
		}
		na, nb := divide(e.members, side)
		if min(len(na), len(nb)) < least {
			break
		}
		a, b = na, nb
	}
	if min(len(a), len(b)) < least {
		return nil, nil
	}
	return a, b
}

func divide(members []int, side []bool) (a, b []int) {
	for j, i := range members {
		if side[j] {
			b = append(b, i)
		} else {
			a = append(a, i)
		}
	}
	return a, b
}

func dot(x, y []float64) float64 {
	var s float64
	for k := range x {
		s += x[k] * y[k]
	}
	return s
}

func gap2(x, y []float64) float64 {
	var s float64
	for k := range x {
		s += (x[k] - y[k]) * (x[k] - y[k])
	}
	return s
}
