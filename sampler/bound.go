package sampler

import (
	"math"
	"math/rand/v2"
	"slices"
)

const (
	volumeTrial = 1000 // draws that measure the volume of the union

	// Many numbers of clusters are tried anew after ladderStep of compression,
	// twice that after each time that none was better than the last, and at once
	// when the bound has become worse by ladderWorse. In nats.
	ladderStep, ladderMost, ladderWorse = 0.5, 4, 0.2
)

// bound is a union of ellipsoids that holds the part of the unit cube above a
// likelihood threshold, in a frame of its own.
type bound struct {
	frame      frame
	dim        int
	points     []float64 // n×dim, the points it was built from, frame coordinates
	recent     []float64 // as points, removed lately, for the shapes alone
	pooled     scatter   // covariance within the clusters
	clusters   int       // that were asked for
	way        int       // index in ways of the shapes
	fits       bool      // one ellipsoid is as tight as can be
	ellipsoids []ellipsoid
	tight      []float64 // squared radii that just held the points
	cumulative []float64 // running sum of the ellipsoids' shares of the volume
	weight     []float64 // running sum of their shares of the points
	logVolume  float64   // of the union within the cube, measured by draws
	mode       []int     // of each ellipsoid: ellipsoids that overlap share one

	// logX when many numbers of clusters were last tried, by how much the
	// log-volume of the best exceeded it, and how long to wait for the next time.
	ladderX, ladderExcess, ladderWait float64

	// logX when it was last decided which dimensions to lift, and how long to
	// wait for the next time.
	liftX, liftWait float64
}

// newBound fits a bound to n×dim points of the cube that are spread
// uniformly over a prior volume of about exp(logX): the number of ellipsoids is
// the one with the least volume. recent, m×dim in the order of removal, are the
// points that were removed last, lookBack of them if there are as many: they
// help with the shapes and have no say in the size, but for the very last. last,
// which may be nil, is the bound before. stream returns the random stream of a
// number; the result does not depend on the number of workers. newBound
// returns nil if the points are degenerate.
func newBound(recent, points []float64, dim int, logX float64, periodic, reflective []bool, last *bound, workers int, stream func(i int) *rand.Rand) *bound {
	rng := stream(0)
	n := len(points) / dim
	b := &bound{frame: newFrame(points, dim, periodic), dim: dim, ladderWait: ladderStep}
	b.lift(points, reflective, logX, last, rng)
	b.points, b.recent = b.framed(points), b.framed(recent)
	if last != nil {
		if len(recent) > 0 {
			b.way = last.way
		}
		b.ladderX, b.ladderExcess, b.ladderWait = last.ladderX, last.ladderExcess, last.ladderWait
	}
	one := partition{k: 1, of: make([]int, n)}
	one.pooled = withinCovariance(b.points, dim, 1, one.of)
	best := b.fit(one, b.way, rng)
	if best.ellipsoids == nil {
		return nil
	}
	// loose tells whether another partition could be better: for a region that is
	// an ellipsoid, the one that just holds the points is no larger than it should.
	// How large that is, is known as well as the shrinkage so far.
	enough := logX + tightEnough + 1.5*math.Sqrt(max(0, -logX)/float64(n))
	loose := func() bool { return best.plain > enough }
	// due tells whether all that was not best before may be tried anew.
	due := func() bool {
		excess := best.volume - logX
		return loose() && (last == nil || b.ladderX-logX > b.ladderWait || excess > b.ladderExcess+ladderWorse)
	}
	if due() {
		best = b.otherWays(best, rng)
	}
	try := func(ks []int, base int) {
		way := best.way
		if last != nil && last.clusters > 1 && len(recent) > 0 {
			way = last.way
		}
		for _, t := range b.try(ks, one.pooled, way, last, workers, func(i int) *rand.Rand { return stream(base + i) }) {
			if t.ellipsoids != nil && t.volume < best.volume {
				best = t
			}
		}
	}
	if last != nil && last.clusters > 1 && loose() {
		try(neighbours(n, dim, last.clusters), 1)
	}
	if due() {
		before := best.volume
		try(ladder(n, dim), 1+mostNeighbours)
		if best.k > 1 {
			best = b.otherWays(best, rng)
		}
		b.ladderX, b.ladderExcess = logX, best.volume-logX
		if best.volume < before {
			b.ladderWait = ladderStep
		} else {
			b.ladderWait = min(2*b.ladderWait, ladderMost)
		}
	}
	b.ellipsoids, b.pooled, b.clusters, b.way = best.ellipsoids, best.pooled, best.k, best.way
	b.fits = best.k == 1 && !loose()
	for c := range b.ellipsoids {
		b.tight = append(b.tight, b.ellipsoids[c].radius2)
	}
	b.enlarge(foldRounds, rng)
	b.reach()
	b.measure(rng)
	b.connect()
	b.recent = nil
	for c := range b.ellipsoids {
		b.ellipsoids[c].shape = shape{}
	}
	return b
}

// shrunk returns b drawn in to n×dim points of the cube that lie above a higher
// threshold: centres and shapes stay, and the squared radii keep their proportion
// to those that just hold the points. It costs a tenth of a new bound.
func (b *bound) shrunk(points []float64) *bound {
	s := *b
	s.ellipsoids = slices.Clone(b.ellipsoids)
	s.tight, s.cumulative, s.weight = nil, nil, nil
	reach := make([]float64, len(s.ellipsoids))
	count := make([]int, len(s.ellipsoids))
	x := make([]float64, b.dim)
	for i := 0; i < len(points); i += b.dim {
		b.frame.into(points[i:i+b.dim], x)
		c := b.cell(x)
		count[c]++
		reach[c] = max(reach[c], b.ellipsoids[c].distance2(x, math.Inf(1)))
	}
	for c := range s.ellipsoids {
		e := &s.ellipsoids[c]
		tight := b.tight[c]
		if count[c] > 2*b.dim { // fewer do not say where it ends
			tight = min(tight, reach[c])
		}
		e.radius2 *= tight / b.tight[c]
		s.tight = append(s.tight, tight)
	}
	// The share of draws within the cube, and that in several, hardly change.
	s.logVolume += totalVolume(s.ellipsoids) - totalVolume(b.ellipsoids)
	s.shares()
	return &s
}

// framed returns the frame coordinates of points of the cube.
func (b *bound) framed(points []float64) []float64 {
	v := make([]float64, len(points))
	for i := 0; i < len(points); i += b.dim {
		b.frame.into(points[i:i+b.dim], v[i:i+b.dim])
	}
	return v
}

// connect sets the modes: two ellipsoids are of one mode if either holds a
// member of the other, or through others of that mode.
func (b *bound) connect() {
	b.mode = make([]int, len(b.ellipsoids))
	for c := range b.mode {
		b.mode[c] = c
	}
	join := func(c, o int) {
		from, to := b.mode[o], b.mode[c]
		for i, m := range b.mode {
			if m == from {
				b.mode[i] = to
			}
		}
	}
	for c := range b.ellipsoids {
		for o := range b.ellipsoids {
			if b.mode[o] == b.mode[c] {
				continue
			}
			for _, i := range b.ellipsoids[o].members {
				if b.ellipsoids[c].contains(b.points[i*b.dim : (i+1)*b.dim]) {
					join(c, o)
					break
				}
			}
		}
	}
}

// modeOf returns the mode of the ellipsoid nearest to x.
func (b *bound) modeOf(x []float64) int {
	if len(b.ellipsoids) == 0 {
		return 0
	}
	return b.mode[b.cell(x)]
}

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

// shares sets the running sums of the ellipsoids' shares.
func (b *bound) shares() {
	total := totalVolume(b.ellipsoids)
	var sum, points float64
	for c := range b.ellipsoids {
		e := &b.ellipsoids[c]
		sum += math.Exp(e.logVolume() - total)
		points += float64(len(e.members)) * float64(b.dim) / float64(len(b.points))
		b.cumulative = append(b.cumulative, sum)
		b.weight = append(b.weight, points)
	}
}

// measure sets the shares of the ellipsoids and measures the volume of their
// union within the cube.
func (b *bound) measure(rng *rand.Rand) {
	b.shares()
	x, z := make([]float64, b.dim), make([]float64, b.dim)
	accepted := 0
	for range volumeTrial {
		if b.propose(rng, x, z) {
			accepted++
		}
	}
	b.logVolume = totalVolume(b.ellipsoids) + math.Log((float64(accepted)+0.5)/volumeTrial)
}

// propose writes one candidate to x, frame coordinates, with z as scratch, and
// reports whether it may be used. Given that, it is uniform over the union
// within the cube: an ellipsoid is taken by volume and a point that lies in m
// of them is kept with probability 1/m.
func (b *bound) propose(rng *rand.Rand, x, z []float64) bool {
	c := pick(b.cumulative, rng.Float64())
	b.ellipsoids[c].draw(rng, x, z)
	if !insideCube(x) {
		return false
	}
	m := 1
	for o := range b.ellipsoids {
		if o != c && b.ellipsoids[o].contains(x) {
			m++
		}
	}
	return m == 1 || rng.IntN(m) == 0
}

// cell returns the ellipsoid nearest to x in its own metric.
func (b *bound) cell(x []float64) int {
	if len(b.ellipsoids) == 1 {
		return 0
	}
	best, least := 0, math.Inf(1)
	for c := range b.ellipsoids {
		e := &b.ellipsoids[c]
		if d := e.distance2(x, least*e.radius2) / e.radius2; d < least {
			best, least = c, d
		}
	}
	return best
}

// pick returns the first index whose running sum exceeds u times the last.
func pick(cumulative []float64, u float64) int {
	u *= cumulative[len(cumulative)-1]
	for i, s := range cumulative {
		if u < s {
			return i
		}
	}
	return len(cumulative) - 1
}
