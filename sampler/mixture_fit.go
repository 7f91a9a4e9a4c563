package sampler

import (
	"fmt"
	"math"
)

const (
	// mostFitted bounds the points a mixture is fitted to; more are thinned.
	mostFitted = 4000

	// componentGain is how much held-out log-density, in nats per point, more
	// components have to gain; less is within its own noise.
	componentGain = 0.005
)

// freedoms are the degrees of freedom tried, from nearly Gaussian to heavy tails.
var freedoms = []float64{64, 16, 8, 4}

// sample is weighted points of the cube.
type sample struct {
	points    [][]float64
	weight    []float64 // sum 1
	effective float64   // 1 over the sum of squares
}

func newSample(points [][]float64, weight []float64) sample {
	s := sample{points: points, weight: make([]float64, len(weight))}
	var sum, square float64
	for _, w := range weight {
		sum += w
	}
	for i, w := range weight {
		s.weight[i] = w / sum
		square += s.weight[i] * s.weight[i]
	}
	s.effective = 1 / square
	return s
}

// posterior returns all points of o with their posterior weights.
func (o *Outcome) posterior() sample {
	weight := make([]float64, len(o.Points))
	for i, l := range o.LogWeight {
		weight[i] = math.Exp(l)
	}
	return newSample(o.Points, weight)
}

// half returns every second point from first on.
func (s sample) half(first int) sample {
	var points [][]float64
	var weight []float64
	for i := first; i < len(s.points); i += 2 {
		points = append(points, s.points[i])
		weight = append(weight, s.weight[i])
	}
	return newSample(points, weight)
}

// thin resamples systematically to n draws and returns how often each index
// came.
func (s sample) thin(n int) []int {
	count := make([]int, len(s.points))
	sum, next := 0.0, 0
	for i, w := range s.weight {
		sum += w * float64(n)
		for next < n && float64(next)+0.5 < sum {
			count[i]++
			next++
		}
	}
	return count
}

// bounded returns s, or mostFitted draws of it if it has more points.
func (s sample) bounded() sample {
	n := len(s.points)
	if n > mostFitted {
		n = mostFitted
	}
	var points [][]float64
	var weight []float64
	if len(s.points) > n {
		for i, c := range s.thin(n) {
			if c > 0 {
				points = append(points, s.points[i])
				weight = append(weight, float64(c))
			}
		}
	} else {
		for i, w := range s.weight {
			if w > 0 {
				points = append(points, s.points[i])
				weight = append(weight, w)
			}
		}
	}
	return newSample(points, weight)
}

// fitMixture fits a mixture of at most most components to s. Their number, a
// power of two, and the degrees of freedom are those that give the points of one
// half of s the largest log-density when the other half is fitted; then all are
// fitted. periodic may be nil. The result depends on the arguments only.
func fitMixture(s sample, periodic []bool, most int, seed uint64) (*mixture, error) {
	dim := 0
	if len(s.points) > 0 {
		dim = len(s.points[0])
	}
	if least := float64(4 * (dim + 1)); !(s.effective >= least) {
		return nil, fmt.Errorf("sampler: a mixture in %d dimensions fitted to %.0f effective points, want at least %.0f", dim, s.effective, least)
	}
	s = s.bounded()
	train, held := s.half(0), s.half(1)
	bestK, bestFreedom, best := 1, freedoms[0], math.Inf(-1)
	for k, lost := 1, 0; k <= most && lost < 2; k *= 2 {
		if k > 1 && float64(k) > train.effective/float64(4*(dim+1)) {
			break
		}
		f, ok := newFit(train, periodic, k, seed)
		if !ok {
			break
		}
		better, last := false, math.Inf(-1)
		for _, freedom := range freedoms {
			m, ok := f.run(freedom)
			if !ok {
				break
			}
			score := m.meanLogDensity(held)
			if score < last { // heavier tails only get worse
				break
			}
			last = score
			if score > best+componentGain || k == bestK && score > best {
				bestK, bestFreedom, best, better = k, freedom, score, true
			}
		}
		if lost++; better {
			lost = 0
		}
	}
	for ; bestK >= 1; bestK /= 2 {
		if f, ok := newFit(s, periodic, bestK, seed); ok {
			if m, ok := f.run(bestFreedom); ok {
				return m, nil
			}
		}
	}
	return nil, fmt.Errorf("sampler: the covariance of %d posterior points in %d dimensions is singular", len(s.points), dim)
}

// meanLogDensity is the weighted mean of ln q over s.
func (m *mixture) meanLogDensity(s sample) float64 {
	y := make([]float64, m.dim)
	var sum float64
	for i, u := range s.points {
		if s.weight[i] > 0 {
			sum += s.weight[i] * m.logDensity(u, y)
		}
	}
	return sum
}
