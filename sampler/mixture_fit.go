package sampler

import (
	"fmt"
	"math"

	"knell/internal/random"
)

const (
	// mostFitted bounds the points a mixture is fitted to; more are thinned.
	mostFitted = 4000

	// componentGain is how much held-out log-density, in nats per point, more
	// components have to gain; less is within its own noise.
	componentGain = 0.005

	// emRounds bounds the rounds of a fit, emEnough is the gain in nats per
	// point below which it has converged.
	emRounds = 40
	emEnough = 1e-3

	// pooledPoints is how many points' weight the pooled covariance has in that
	// of each component, as in fitEllipsoid.
	pooledPoints = 0.3

	// negligible is the responsibility below which a component's covariance
	// leaves a point out.
	negligible = 1e-10
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

// posterior returns the points of o whose index i has i mod step = first, with
// their posterior weights.
func (o *Outcome) posterior(first, step int) sample {
	var points [][]float64
	var weight []float64
	for i := first; i < len(o.Points); i += step {
		points = append(points, o.Points[i])
		weight = append(weight, math.Exp(o.LogWeight[i]))
	}
	return newSample(points, weight)
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

// fit is the state of an expectation maximisation.
type fit struct {
	sample
	dim        int
	components []component
	y          [][]float64 // points in each component's chart, n×dim
	stretch    [][]float64 // logStretch of the points in each chart
	pooled     scatter
}

// newFit finds k clusters of equal-weight draws of s and fits an ellipsoid to
// each. It reports false if a covariance is singular.
func newFit(s sample, periodic []bool, k int, seed uint64) (*fit, bool) {
	dim := len(s.points[0])
	f := &fit{sample: s, dim: dim}
	// The clusters are sought in one chart for all points.
	var drawn []int
	for i, c := range s.thin(min(mostFitted/2, max(int(s.effective), 4*(dim+1)))) {
		for range c {
			drawn = append(drawn, i)
		}
	}
	common := chartAround(s.points, drawn, periodic)
	points := make([]float64, len(drawn)*dim)
	for i, j := range drawn {
		common.into(s.points[j], points[i*dim:(i+1)*dim])
	}
	p := partition{k: 1, of: make([]int, len(drawn))}
	p.pooled = withinCovariance(points, dim, 1, p.of)
	if k > 1 {
		var ok bool
		if p, ok = split(points, dim, k, p.pooled, random.New(seed, "mixture", uint64(k)).Rand); !ok {
			return nil, false
		}
	}
	f.pooled = p.pooled
	for _, members := range p.members() {
		own := make([]int, len(members))
		for i, j := range members {
			own[i] = drawn[j]
		}
		c := component{chart: chartAround(s.points, own, periodic), share: float64(len(members)) / float64(len(drawn))}
		rows := make([]float64, len(own)*dim)
		all := make([]int, len(own))
		for i, j := range own {
			c.into(s.points[j], rows[i*dim:(i+1)*dim])
			all[i] = i
		}
		var ok bool
		if c.ellipsoid, ok = fitEllipsoid(rows, dim, all, f.pooled); !ok {
			return nil, false
		}
		f.components = append(f.components, c)
		f.place(&c.chart)
	}
	return f, true
}

// place writes the points' coordinates in a chart; without periodic dimensions
// all components share one copy.
func (f *fit) place(c *chart) {
	if c.centre == nil && len(f.y) > 0 {
		f.y = append(f.y, f.y[0])
		f.stretch = append(f.stretch, f.stretch[0])
		return
	}
	y := make([]float64, len(f.points)*f.dim)
	stretch := make([]float64, len(f.points))
	for i, u := range f.points {
		row := y[i*f.dim : (i+1)*f.dim]
		c.into(u, row)
		stretch[i] = logStretch(row)
	}
	f.y = append(f.y, y)
	f.stretch = append(f.stretch, stretch)
}

// run maximises the weighted log-density by expectation maximisation for
// Student-t components, from where the last run ended, and leaves out a
// component that comes to hold fewer than dim+1 points. It reports false if a covariance is singular.
func (f *fit) run(freedom float64) (*mixture, bool) {
	n, dim := len(f.points), f.dim
	last := math.Inf(-1)
	d := make([]float64, dim)
	resp := make([]float64, n*len(f.components)) // log-densities, then responsibilities
	pull := make([]float64, n*len(f.components)) // (ν+d)/(ν+δ²)
	for range emRounds {
		m := newMixture(dim, freedom, f.components)
		k := len(f.components)
		var mean float64
		for i := range n {
			top := math.Inf(-1)
			for c := range f.components {
				d2 := f.components[c].distance2(f.y[c][i*dim:(i+1)*dim], math.Inf(1))
				l := m.logStudent(&f.components[c], d2) + math.Log(f.components[c].share) + f.stretch[c][i]
				resp[i*k+c] = l
				pull[i*k+c] = (freedom + float64(dim)) / (freedom + d2)
				top = max(top, l)
			}
			var sum float64
			for c := range k {
				resp[i*k+c] = math.Exp(resp[i*k+c] - top)
				sum += resp[i*k+c]
			}
			for c := range k {
				resp[i*k+c] *= f.weight[i] / sum
			}
			mean += f.weight[i] * (top + math.Log(sum))
		}
		if mean < last+emEnough {
			break
		}
		last = mean
		var kept []component
		var y [][]float64
		var stretch [][]float64
		var total float64
		for c := range k {
			var share, norm float64
			centre := make([]float64, dim)
			for i := range n {
				w := resp[i*k+c] * pull[i*k+c]
				share += resp[i*k+c]
				norm += w
				for j, v := range f.y[c][i*dim : (i+1)*dim] {
					centre[j] += w * v
				}
			}
			held := share * f.effective
			if held < float64(dim+1) {
				continue
			}
			for j := range centre {
				centre[j] /= norm
			}
			cov := newScatter(dim)
			for i := range n {
				w := resp[i*k+c] * pull[i*k+c]
				if w < negligible*f.weight[i] {
					continue
				}
				root := math.Sqrt(w)
				for j, v := range f.y[c][i*dim : (i+1)*dim] {
					d[j] = root * (v - centre[j])
				}
				cov.add(d)
			}
			for i := range cov.a {
				cov.a[i] = (held*cov.a[i]/share + pooledPoints*f.pooled.a[i]) / (held + pooledPoints)
			}
			e, ok := cov.ellipsoid(centre)
			if !ok {
				return nil, false
			}
			total += share
			kept = append(kept, component{ellipsoid: e, chart: f.components[c].chart, share: share})
			y = append(y, f.y[c])
			stretch = append(stretch, f.stretch[c])
		}
		if len(kept) == 0 {
			return nil, false
		}
		for c := range kept {
			kept[c].share /= total
		}
		f.components, f.y, f.stretch = kept, y, stretch
	}
	return newMixture(dim, freedom, f.components), true
}
