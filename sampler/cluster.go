package sampler

import (
	"math"
	"math/rand/v2"
	"slices"
)

const (
	// tightEnough is the log-volume of ellipsoids that just hold the points, over
	// the expected prior volume, below which they are good enough to look no further.
	tightEnough = 0.2

	// splitGain is how much log-volume each further ellipsoid has to save. It
	// adds about as much uncovered volume as the one before, so it must pay.
	splitGain = 0.01

	kmeansRounds = 12

	mostNeighbours = 3 // that neighbours lists
	metricRounds   = 2
)

// partition is an assignment of points to k clusters.
type partition struct {
	k      int
	of     []int   // cluster of each point
	pooled scatter // covariance within the clusters, the metric they were found in
}

// ladder lists numbers of clusters to try for n points, a factor 2 apart.
func ladder(n, dim int) []int {
	var ks []int
	for k := 2; k <= n/(2*(dim+1)); k *= 2 {
		ks = append(ks, k)
	}
	return ks
}

// neighbours lists the numbers of clusters to try when last was best before.
func neighbours(n, dim, last int) []int {
	var ks []int
	for _, f := range []float64{0.8, 1, 1.25} {
		if k := int(math.Ceil(f * float64(last))); k > 1 && k <= n/(2*(dim+1)) {
			ks = append(ks, k)
		}
	}
	return slices.Compact(ks)
}

// split finds k clusters of the n×dim points by k-means, first in the metric of
// the given covariance and then in that of the covariance within the clusters
// it found: narrow stripes side by side come apart only in the latter. It
// returns false if a metric is singular.
func split(points []float64, dim, k int, metric scatter, rng *rand.Rand) (partition, bool) {
	n := len(points) / dim
	p := partition{k: k, of: make([]int, n), pooled: metric}
	y := make([]float64, n*dim)
	centres := make([]float64, k*dim)
	for round := range metricRounds {
		m, ok := p.pooled.ellipsoid(nil)
		if !ok {
			return p, false
		}
		for i := range n {
			lowerTimes(m.inverse, points[i*dim:(i+1)*dim], nil, y[i*dim:(i+1)*dim])
		}
		if round == 0 {
			seedCentres(y, dim, centres, rng)
		} else {
			meanCentres(y, dim, p.of, centres)
		}
		kmeans(y, dim, p.of, centres)
		p.pooled = withinCovariance(points, dim, k, p.of)
	}
	return p, true
}

// seedCentres picks centres among the points, each with probability
// proportional to its squared distance from those before.
func seedCentres(y []float64, dim int, centres []float64, rng *rand.Rand) {
	n := len(y) / dim
	gap := make([]float64, n)
	for i := range gap {
		gap[i] = math.Inf(1)
	}
	pick := rng.IntN(n)
	for c := 0; c < len(centres)/dim; c++ {
		copy(centres[c*dim:], y[pick*dim:(pick+1)*dim])
		var sum float64
		for i := range gap {
			gap[i] = min(gap[i], gap2(y[i*dim:(i+1)*dim], centres[c*dim:(c+1)*dim]))
			sum += gap[i]
		}
		u := rng.Float64() * sum
		for pick = 0; pick < n-1; pick++ {
			if u -= gap[pick]; u < 0 {
				break
			}
		}
	}
}

// kmeans moves the centres to the means of the points nearest to them, until
// nothing changes or kmeansRounds are over.
func kmeans(y []float64, dim int, of []int, centres []float64) {
	for round := range kmeansRounds {
		changed := false
		for i := range of {
			// From the centre it had: nearly all others are then soon seen to be further.
			row := y[i*dim : (i+1)*dim]
			best := of[i]
			least := gap2(row, centres[best*dim:(best+1)*dim])
			for c := 0; c < len(centres); c += dim {
				if d := within(row, centres[c:c+dim], least); d < least {
					best, least = c/dim, d
				}
			}
			changed = changed || of[i] != best
			of[i] = best
		}
		if round > 0 && !changed {
			return
		}
		meanCentres(y, dim, of, centres)
	}
}

// within is gap2, or some value of at least limit where that is larger. It looks
// at the limit after every fourth coordinate.
func within(x, y []float64, limit float64) float64 {
	var s float64
	for len(x) >= 4 && len(y) >= 4 {
		a, b, c, d := x[0]-y[0], x[1]-y[1], x[2]-y[2], x[3]-y[3]
		s += a*a + b*b + (c*c + d*d)
		if s >= limit {
			return s
		}
		x, y = x[4:], y[4:]
	}
	for k := range x {
		s += (x[k] - y[k]) * (x[k] - y[k])
	}
	return s
}

// meanCentres sets each centre to the mean of its points; one that has lost all
// its points stays.
func meanCentres(y []float64, dim int, of []int, centres []float64) {
	k := len(centres) / dim
	count := make([]float64, k)
	sum := make([]float64, len(centres))
	for i, c := range of {
		count[c]++
		for j := range dim {
			sum[c*dim+j] += y[i*dim+j]
		}
	}
	for c := range k {
		if count[c] > 0 {
			for j := range dim {
				centres[c*dim+j] = sum[c*dim+j] / count[c]
			}
		}
	}
}

// withinCovariance returns the covariance of the points around the means of their clusters.
func withinCovariance(points []float64, dim, k int, of []int) scatter {
	centres := make([]float64, k*dim)
	meanCentres(points, dim, of, centres)
	s := newScatter(dim)
	d := make([]float64, dim)
	for i, c := range of {
		for j := range d {
			d[j] = points[i*dim+j] - centres[c*dim+j]
		}
		s.add(d)
	}
	s.scale(1 / float64(max(1, len(of)-k)))
	return s
}

// members lists the points of each cluster, without empty clusters.
func (p *partition) members() [][]int {
	all := make([][]int, p.k)
	for i, c := range p.of {
		all[c] = append(all[c], i)
	}
	var out [][]int
	for _, m := range all {
		if len(m) > 0 {
			out = append(out, m)
		}
	}
	return out
}

func gap2(x, y []float64) float64 {
	var s float64
	for k := range x {
		s += (x[k] - y[k]) * (x[k] - y[k])
	}
	return s
}

func dot(x, y []float64) float64 {
	var s float64
	for k := range x {
		s += x[k] * y[k]
	}
	return s
}
