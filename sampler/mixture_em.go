package sampler

import (
	"math"

	"knell/internal/random"
)

const (
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
