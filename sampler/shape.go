package sampler

const (
	// lookPerDim and lookMost set how far back removed points are used, in nats
	// of compression. Removed t nats ago, they lie exp(t/dim) times as far out.
	lookPerDim, lookMost = 0.25, 3

	// farthest is the squared distance, in units of that of the furthest live
	// point of a cluster, beyond which a removed point has no part in it.
	farthest = 2

	// fewPooled is what the pooled covariance counts for, in points, where each
	// cluster has a shape of its own: enough for it to be regular. manyPooled is
	// for clusters of one shape.
	fewPooled, manyPooled = 0.3, 30
)

// lookBack returns how many of the points removed last are of use for the shape
// of a bound in dim dimensions, at the given number of live points.
func lookBack(dim, live int) int {
	return int(min(lookPerDim*float64(dim), lookMost) * float64(live))
}

// way is a way to find the shapes of clusters.
type way struct {
	share  float64 // of the recent points that is used, the last ones
	pooled float64 // points that the covariance within all clusters counts for
	scaled bool    // the recent points are drawn in to the extent of the live ones
}

// ways are tried in turn; the least volume after cross-validation tells which is
// used. The covariance in 32 dimensions is badly known from a few hundred points: a
// Gaussian takes 20 times as many calls without removed points, by slices. Where a
// region changes its shape as it shrinks, they are no
// help. Unscaled, they make the least radius of fitShaped larger, which small
// clusters gain from: it holds unseen points without any growth.
var ways = []way{
	{0, fewPooled, false},
	{0.3, fewPooled, true},
	{1, fewPooled, true},
	{1, manyPooled, true},
	{1, manyPooled, false},
}

// shape is what is known of a cluster's covariance beside its live points: a sum
// of outer products around their own mean, and how many points it stands for.
type shape struct {
	weight  float64
	scatter scatter
}

// pooledShape is all that is known without removed points.
func pooledShape(pooled scatter) shape {
	s := shape{0, newScatter(pooled.dim)}
	s.add(fewPooled, pooled)
	return s
}

// add takes in a covariance that counts for weight points.
func (s *shape) add(weight float64, covariance scatter) {
	s.weight += weight
	for i, v := range covariance.a {
		s.scatter.a[i] += weight * v
	}
}

// shapes returns the shape of each cluster of a partition: the recent points in
// the cell of the cluster, around their own mean, and the covariance within all
// clusters. Cells and distances are those of the metric of the partition.
func (b *bound) shapes(p partition, members [][]int, by way) []shape {
	dim := b.dim
	out := make([]shape, len(members))
	for c := range out {
		out[c].scatter = newScatter(dim)
	}
	metric, ok := p.pooled.ellipsoid(nil)
	recent := b.recent[int((1-by.share)*float64(len(b.recent)/dim))*dim:]
	if len(recent) == 0 || !ok {
		for c := range out {
			out[c].add(by.pooled, p.pooled)
		}
		return out
	}
	// Whitened, each cluster's mean and squared reach.
	centres := make([]float64, len(members)*dim)
	spread := make([]float64, len(members)) // mean square of the live points
	wide := make([]float64, len(members))   // sum of the recent points' squares
	reach := make([]float64, len(members))
	x, y := make([]float64, dim), make([]float64, dim)
	for c, m := range members {
		centre := centres[c*dim : (c+1)*dim]
		for _, i := range m {
			for k, v := range b.points[i*dim : (i+1)*dim] {
				x[k] += v
			}
		}
		for k := range x {
			x[k] /= float64(len(m))
		}
		lowerTimes(metric.inverse, x, nil, centre)
		clear(x)
		for _, i := range m {
			lowerTimes(metric.inverse, b.points[i*dim:(i+1)*dim], nil, y)
			g := gap2(y, centre)
			spread[c] += g / max(1, float64(len(m)-1))
			reach[c] = max(reach[c], farthest*g)
		}
	}
	of := make([]int, len(recent)/dim)
	count := make([]float64, len(members))
	mean := make([]float64, len(members)*dim)
	for i := range of {
		z := recent[i*dim : (i+1)*dim]
		lowerTimes(metric.inverse, z, nil, y)
		c := nearest(y, centres)
		g := gap2(y, centres[c*dim:(c+1)*dim])
		if g > reach[c] {
			of[i] = -1
			continue
		}
		wide[c] += g
		of[i] = c
		count[c]++
		for k, v := range z {
			mean[c*dim+k] += v
		}
	}
	for c := range count {
		for k := range dim {
			mean[c*dim+k] /= max(1, count[c])
		}
	}
	for i, c := range of {
		if c < 0 {
			continue
		}
		for k, v := range recent[i*dim : (i+1)*dim] {
			x[k] = v - mean[c*dim+k]
		}
		out[c].scatter.add(x)
	}
	all := newScatter(dim)
	weight := 0.0
	for c := range out {
		out[c].weight += max(0, count[c]-1)
		if by.scaled && wide[c] > 0 {
			out[c].scatter.scale(min(1, spread[c]*count[c]/wide[c]))
		}
		weight += out[c].weight
		for i, v := range out[c].scatter.a {
			all.a[i] += v
		}
	}
	n := float64(len(p.of) - len(members))
	for i := range all.a {
		all.a[i] = (all.a[i] + n*p.pooled.a[i]) / (weight + n)
	}
	for c := range out {
		out[c].add(by.pooled, all)
	}
	return out
}

// nearest returns the row of centres nearest to y.
func nearest(y, centres []float64) int {
	dim := len(y)
	best, least := 0, gap2(y, centres[:dim])
	for c := dim; c < len(centres); c += dim {
		d := within(y, centres[c:c+dim], least)
		if d < least {
			best, least = c/dim, d
		}
	}
	return best
}
