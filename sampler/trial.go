package sampler

import (
	"math/rand/v2"

	"golang.org/x/sync/errgroup"
)

// trial is what came of one partition.
type trial struct {
	partition
	way        int         // index in ways
	ellipsoids []ellipsoid // nil if it failed
	plain      float64     // log of their total volume
	volume     float64     // the same once they are grown, with splitGain for each added
}

// try fits each number of clusters, every other one in the metric of the bound
// before.
func (b *bound) try(ks []int, metric scatter, way int, last *bound, workers int, stream func(i int) *rand.Rand) []trial {
	tried := make([]trial, len(ks))
	var group errgroup.Group
	group.SetLimit(workers)
	for i := len(ks) - 1; i >= 0; i-- { // the dearest first
		group.Go(func() error {
			m, rng := metric, stream(i)
			if last != nil && i%2 == 1 {
				m = last.pooled
			}
			if p, ok := split(b.points, b.dim, ks[i], m, rng); ok {
				tried[i] = b.fit(p, way, rng)
			}
			return nil
		})
	}
	_ = group.Wait() // none returns an error
	return tried
}

// otherWays returns the best of a trial and those of the same partition with
// other ways to find the shapes.
func (b *bound) otherWays(t trial, rng *rand.Rand) trial {
	best := t
	if len(b.recent) == 0 {
		return t
	}
	for way := range ways {
		if way == t.way {
			continue
		}
		if o := b.fit(t.partition, way, rng); o.ellipsoids != nil && o.volume < best.volume {
			best = o
		}
	}
	return best
}

// fit finds the ellipsoids of a partition. They are grown by one round of
// cross-validation in the volume, but not yet in themselves.
func (b *bound) fit(p partition, way int, rng *rand.Rand) trial {
	t := &bound{dim: b.dim, points: b.points, pooled: p.pooled}
	members := p.members()
	shapes := b.shapes(p, members, ways[way])
	for c, m := range members {
		e, ok := fitShaped(b.points, b.dim, m, shapes[c])
		if !ok {
			return trial{}
		}
		t.ellipsoids = append(t.ellipsoids, e)
	}
	out := trial{partition: p, way: way, ellipsoids: append([]ellipsoid(nil), t.ellipsoids...), plain: totalVolume(t.ellipsoids)}
	t.enlarge(1, rng)
	out.volume = totalVolume(t.ellipsoids) + splitGain*float64(len(t.ellipsoids))
	return out
}
