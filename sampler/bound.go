package sampler

import (
	"math"
	"math/rand/v2"
)

const (
	folds       = 5 // each cross-validation round leaves out a fifth
	foldRounds  = 4
	volumeTrial = 1000 // draws that measure the volume of the union

	// margin is the expected number of points of a cluster in the shell that
	// is added around it at least: were the cluster an ellipsoid of unknown
	// size, the shell would miss a share e^-margin/n of its volume.
	margin = 3
)

// bound is a union of ellipsoids that holds the part of the unit cube above a
// likelihood threshold, in a frame of its own.
type bound struct {
	frame      frame
	dim        int
	points     []float64 // n×dim, the points it was built from, frame coordinates
	ellipsoids []ellipsoid
	cumulative []float64 // running sum of the ellipsoids' shares of the volume
	weight     []float64 // running sum of their shares of the points
	logVolume  float64   // of the union within the cube, measured by draws
}

// newBound fits a bound to n×dim points of the cube that are spread uniformly
// over a prior volume of about exp(logX). It returns nil if they are too few or
// degenerate.
func newBound(points []float64, dim int, logX float64, periodic []bool, rng *rand.Rand) *bound {
	n := len(points) / dim
	if n < leastMembers(dim) {
		return nil
	}
	b := &bound{frame: newFrame(points, dim, periodic), dim: dim, points: make([]float64, n*dim)}
	members := make([]int, n)
	for i := range n {
		members[i] = i
		b.frame.into(points[i*dim:(i+1)*dim], b.points[i*dim:(i+1)*dim])
	}
	b.ellipsoids = cluster(b.points, dim, members, logX-math.Log(float64(n)), rng)
	if b.ellipsoids == nil {
		return nil
	}
	b.enlarge(rng)
	b.measure(rng)
	return b
}

// enlarge sets the radii: each ellipsoid first just holds its members, and then
// grows by the factor of its cross-validation, in which a point that another
// ellipsoid holds is held.
func (b *bound) enlarge(rng *rand.Rand) {
	for c := range b.ellipsoids {
		e := &b.ellipsoids[c]
		e.radius2 = hold(b.points, b.dim, e)
	}
	grow := make([]float64, len(b.ellipsoids))
	for c := range b.ellipsoids {
		grow[c] = crossValidate(b.points, b.dim, &b.ellipsoids[c], foldRounds, func(x []float64) bool { return b.held(x, c) }, rng)
	}
	for c := range b.ellipsoids {
		b.ellipsoids[c].radius2 *= grow[c]
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

// measure sets the shares of the ellipsoids and measures the volume of their
// union within the cube.
func (b *bound) measure(rng *rand.Rand) {
	total := totalVolume(b.ellipsoids)
	var sum, points float64
	for c := range b.ellipsoids {
		e := &b.ellipsoids[c]
		sum += math.Exp(e.logVolume() - total)
		points += float64(len(e.members)) * float64(b.dim) / float64(len(b.points))
		b.cumulative = append(b.cumulative, sum)
		b.weight = append(b.weight, points)
	}
	x, z := make([]float64, b.dim), make([]float64, b.dim)
	accepted := 0
	for range volumeTrial {
		if b.propose(rng, x, z) {
			accepted++
		}
	}
	b.logVolume = total + math.Log((float64(accepted)+0.5)/volumeTrial)
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
