package sampler

import (
	"context"
	"math"
	"math/rand/v2"
)

const (
	// defaultSlicePerDim is the least number of slice steps per dimension. That
	// is enough for convex regions; memory.go raises it where it is not.
	defaultSlicePerDim = 4

	maxStepOut = 12 // interval growths of one slice
	maxShrink  = 200
)

// slice walks from a random survivor to a new point by slice sampling steps,
// each of which leaves the uniform distribution above the threshold unchanged:
//
//   - within the cell of the walker's ellipsoid (the points nearest to it), along
//     a direction of that ellipsoid or a difference of two of its points, on
//     the chord of the ellipsoid, which needs no stepping out;
//   - anywhere, along such a direction of an ellipsoid that is picked without
//     regard to where the walker is, stepping out from a random interval, round
//     periodic dimensions and on through the wall of lifted ones;
//   - a jump to the corresponding place of another ellipsoid, accepted with the
//     ratio of the volumes, so that modes keep their share of the volume.
//
// Which kind comes next is decided without regard to the walker's place.
func (w *worker) slice(ctx context.Context, s *stage, rng *rand.Rand) (float64, error) {
	dim := len(w.cube)
	b := s.bound
	start := rng.IntN(len(s.l))
	w.start = start
	l := s.l[start]
	u := s.u[start*dim : (start+1)*dim]
	if b == nil {
		b = &bound{dim: dim}
	}
	b.frame.into(u, w.x)
	for done := 0; done < s.steps; {
		if err := ctx.Err(); err != nil {
			return 0, err
		}
		var err error
		kind := rng.IntN(8)
		switch {
		case len(b.ellipsoids) > 1 && kind < 2:
			l, err = w.jump(b, s.threshold, l, rng)
			if kind == 0 { // half of the jumps count, so that the loop ends
				done++
			}
		case len(b.ellipsoids) > 0 && kind < 5:
			l, err = w.within(b, s.threshold, l, rng)
			done++
		default:
			l, err = w.anywhere(b, s.threshold, l, rng)
			done++
		}
		if err != nil {
			return 0, err
		}
	}
	b.frame.outOf(w.x, w.cube)
	return l, nil
}

// test evaluates w.trial. Points outside the cube cost no call.
func (w *worker) test(b *bound) (float64, error) {
	if !insideCube(w.trial) {
		return math.Inf(-1), nil
	}
	b.frame.outOf(w.trial, w.cube)
	return w.at(w.cube)
}

// within takes one step inside the cell of the walker's ellipsoid. A walker
// outside that ellipsoid stays.
func (w *worker) within(b *bound, threshold, l float64, rng *rand.Rand) (float64, error) {
	c := b.cell(w.x)
	e := &b.ellipsoids[c]
	if !e.contains(w.x) {
		return l, nil
	}
	w.along(b, c, rng)
	// The chord: |y + t q|² = radius2 with y, q the whitened place, direction.
	e.whiten(w.x, w.trial)
	lowerTimes(e.inverse, w.dir, nil, w.tr)
	qq, yq, yy := dot(w.tr, w.tr), dot(w.trial, w.tr), dot(w.trial, w.trial)
	if !(qq > 0) {
		return l, nil
	}
	root := math.Sqrt(max(0, yq*yq-qq*(yy-e.radius2)))
	lo, hi := (-yq-root)/qq, (-yq+root)/qq
	for k, d := range w.dir {
		switch {
		case d > 0:
			lo, hi = max(lo, -w.x[k]/d), min(hi, (1-w.x[k])/d)
		case d < 0:
			lo, hi = max(lo, (1-w.x[k])/d), min(hi, -w.x[k]/d)
		}
	}
	return w.shrink(b, c, lo, hi, threshold, l, rng)
}

// anywhere takes one step with stepping out, by the length of w.dir; periodic and
// lifted dimensions go round.
func (w *worker) anywhere(b *bound, threshold, l float64, rng *rand.Rand) (float64, error) {
	if len(b.ellipsoids) == 0 {
		direction(rng, w.dir)
	} else {
		w.along(b, pick(b.weight, rng.Float64()), rng)
	}
	lo := -rng.Float64()
	hi := lo + 1
	left := rng.IntN(maxStepOut + 1)
	right := maxStepOut - left
	for _, end := range []struct {
		t    *float64
		step float64
		left int
	}{{&lo, -1, left}, {&hi, 1, right}} {
		for ; end.left > 0; end.left-- {
			w.move(b, *end.t)
			v, err := w.test(b)
			if err != nil {
				return l, err
			}
			if !(v > threshold) {
				break
			}
			*end.t += end.step
		}
	}
	return w.shrink(b, -1, lo, hi, threshold, l, rng)
}

// along sets w.dir to a direction of ellipsoid c, as long as a typical chord: a
// random one in its metric, or the difference of two of its points.
//
// The first is a whitened direction on the scale of one cluster, not of all
// the points: on a ridge covered by many ellipsoids each gives the direction and
// the width of the ridge where it is. The second is a differential one: within a
// cluster whose points bend, two of them lie along the bend more often than
// the covariance says, and their distance is a step that fits it. Both points are
// of one cluster, for the difference of two clusters leads out of a curved ridge;
// from one mode to another jump goes.
//
// Neither depends on where the walker is but through c, and within keeps to the
// cell of c: the direction back has the same probability.
func (w *worker) along(b *bound, c int, rng *rand.Rand) {
	e := &b.ellipsoids[c]
	if len(e.members) < 2 || rng.IntN(2) == 0 {
		direction(rng, w.tr)
		for k := range w.tr {
			w.tr[k] *= math.Sqrt(float64(b.dim + 2))
		}
		e.stretch(w.tr, w.dir)
		return
	}
	i := rng.IntN(len(e.members))
	j := rng.IntN(len(e.members) - 1)
	if j >= i {
		j++
	}
	p, q := e.members[i]*b.dim, e.members[j]*b.dim
	for k := range w.dir {
		w.dir[k] = b.points[p+k] - b.points[q+k]
	}
}

// move sets w.trial to w.x + t w.dir, wrapped in periodic dimensions and in
// those lifted at a wall, where going on across v = ½ or round v = 1 is what a
// reflection at the walls is in u.
func (w *worker) move(b *bound, t float64) {
	for k := range w.trial {
		w.trial[k] = w.x[k] + t*w.dir[k]
		if b.frame.round(k) {
			w.trial[k] = wrap(w.trial[k])
		}
	}
}

// shrink draws from the interval of the line through w.x until it hits a point
// above the threshold (and in cell c, unless that is -1), cutting the interval
// at each miss, and moves the walker there.
func (w *worker) shrink(b *bound, c int, lo, hi, threshold, l float64, rng *rand.Rand) (float64, error) {
	if !(lo <= 0 && hi >= 0) {
		return l, nil // the walker sits on the wall, within rounding
	}
	for range maxShrink {
		t := lo + (hi-lo)*rng.Float64()
		w.move(b, t)
		ok := c < 0 || b.cell(w.trial) == c && b.ellipsoids[c].contains(w.trial)
		if ok {
			v, err := w.test(b)
			if err != nil {
				return l, err
			}
			if v > threshold {
				copy(w.x, w.trial)
				return v, nil
			}
		}
		if t < 0 {
			lo = t
		} else {
			hi = t
		}
	}
	return l, nil // the interval closed on the walker: it stays
}

// jump proposes the place in another ellipsoid that corresponds to the
// walker's in its own. The map between cells i and j scales volume by
// det Lj / det Li, which the acceptance makes up for.
func (w *worker) jump(b *bound, threshold, l float64, rng *rand.Rand) (float64, error) {
	c := b.cell(w.x)
	to := rng.IntN(len(b.ellipsoids) - 1)
	if to >= c {
		to++
	}
	from, other := &b.ellipsoids[c], &b.ellipsoids[to]
	ratio := other.logDet - from.logDet + float64(b.dim)/2*math.Log(other.radius2/from.radius2)
	from.whiten(w.x, w.tr)
	for k := range w.tr {
		w.tr[k] *= math.Sqrt(other.radius2 / from.radius2)
	}
	other.stretch(w.tr, w.trial)
	for k := range w.trial {
		w.trial[k] += other.mean[k]
	}
	if ratio < 0 && math.Log(rng.Float64()) >= ratio || b.cell(w.trial) != to {
		return l, nil
	}
	v, err := w.test(b)
	if err != nil || !(v > threshold) {
		return l, err
	}
	copy(w.x, w.trial)
	return v, nil
}
