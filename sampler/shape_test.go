package sampler

import (
	"fmt"
	"math"
	"slices"
	"testing"

	"knell/internal/random"
)

// thinned draws n points uniformly from the ball of the given dimension, centre
// ½ and radius r, and m that shrinking removed from it before, one after the
// other, at 500 live points: the last to go comes last.
func thinned(seed uint64, dim, n, m int, r float64) (points, recent []float64) {
	rng := random.New(seed, "thinned").Rand
	draw := func(radius float64) []float64 {
		x := make([]float64, dim)
		direction(rng, x)
		for k := range x {
			x[k] = 0.5 + radius*x[k]
		}
		return x
	}
	for range n {
		points = append(points, draw(r*math.Pow(rng.Float64(), 1/float64(dim)))...)
	}
	for i := m; i > 0; i-- {
		recent = append(recent, draw(r*math.Exp(float64(i)/500/float64(dim)))...)
	}
	return points, recent
}

// In many dimensions removed points must make a bound tighter that still holds
// what it has not seen. For n points of a ball an ellipsoid of the right shape
// that just holds them has exp(-1/n) of the volume; the rest is what the shape
// and the safety cost.
func TestRemovedPointsSharpenShapes(t *testing.T) {
	const n, fresh = 437, 4000
	for _, dim := range []int{16, 32} {
		t.Run(fmt.Sprint(dim), func(t *testing.T) {
			const r = 0.2
			logX := logBall(dim) + float64(dim)*math.Log(r)
			var excess [2]float64
			missed := 0
			for seed := range uint64(4) {
				points, recent := thinned(seed, dim, n, lookBack(dim, 500), r)
				for i, known := range [][]float64{nil, recent} {
					g := region{dim: dim, volume: math.Exp(logX)}
					b := g.boundAfter(seed, points, known)
					excess[i] += (b.logVolume - logX) / 4
					if i == 1 {
						unseen, _ := thinned(100+seed, dim, fresh, 0, r)
						for x := range slices.Chunk(unseen, dim) {
							if !b.held(x, -1) {
								missed++
							}
						}
					}
				}
			}
			t.Logf("volume ratio %.1f, without removed points %.1f; misses %.2f/n", math.Exp(excess[1]), math.Exp(excess[0]), float64(missed)/(4*fresh)*n)
			if excess[1] > excess[0]-math.Ln2 {
				t.Errorf("log volume %.2f too large, without removed points %.2f; want at most half the volume", excess[1], excess[0])
			}
			if share := float64(missed) / (4 * fresh); share > 0.5/n {
				t.Errorf("misses %.2g of the ball, want at most %.2g", share, 0.5/n)
			}
		})
	}
}

// Removed points of another mode must not enter a shape: a cluster's covariance
// with them is that without.
func TestShapesLeaveOutOtherModes(t *testing.T) {
	const dim, n = 3, 200
	points, _ := thinned(1, dim, n, 0, 0.05)
	far, _ := thinned(2, dim, n, 0, 0.05)
	for i := range far {
		far[i] += 0.4
	}
	b := &bound{dim: dim, points: points, recent: far}
	p := partition{k: 1, of: make([]int, n)}
	p.pooled = withinCovariance(points, dim, 1, p.of)
	for _, w := range ways {
		s := b.shapes(p, p.members(), w)[0]
		if s.weight != w.pooled {
			t.Errorf("%+v: a weight of %g, want %g: none of the points", w, s.weight, w.pooled)
		}
	}
	b.recent = points
	if s := b.shapes(p, p.members(), way{1, fewPooled, true})[0]; math.Abs(s.weight-(n-1+fewPooled)) > 1e-9 {
		t.Errorf("a weight of %g for the live points themselves, want %g", s.weight, n-1+fewPooled)
	}
}

// Every ellipsoid's share of the points removed last is held.
func TestBoundReachesThePointsRemovedLast(t *testing.T) {
	const dim, n = 6, 200
	points, recent := thinned(3, dim, n, lookBack(dim, n), 0.2)
	g := region{dim: dim, volume: math.Exp(logBall(dim)) * math.Pow(0.2, dim)}
	b := g.boundAfter(1, points, recent)
	last := recent[len(recent)-int(edgeShare*n)*dim:]
	for x := range slices.Chunk(last, dim) {
		if !b.held(x, -1) {
			t.Errorf("%v is left out", x)
		}
	}
}
