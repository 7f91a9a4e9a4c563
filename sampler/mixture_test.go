package sampler

import (
	"math"
	"testing"

	"gonum.org/v1/gonum/integrate/quad"

	"knell/internal/random"
)

// cloud draws n points of two clusters in dim dimensions, one of them around the
// cut of coordinate 0 and cut off by the wall of the last.
func cloud(dim, n int) sample {
	rng := random.New(3, "cloud", uint64(dim))
	var points [][]float64
	var weight []float64
	for len(points) < n {
		u := make([]float64, dim)
		common := rng.NormFloat64()
		for k := range u {
			u[k] = 0.35 + 0.05*(0.6*common+0.8*rng.NormFloat64())
		}
		if rng.Float64() < 0.5 {
			u[dim-1] -= 0.33
			if dim > 1 {
				u[0] = wrap(u[0] - 0.35)
			}
		}
		if insideCube(u) {
			points = append(points, u)
			weight = append(weight, 0.5+rng.Float64())
		}
	}
	return newSample(points, weight)
}

// fitted is the mixture of cloud, of more than one component.
func fitted(t *testing.T, dim int, periodic bool) *mixture {
	t.Helper()
	p := make([]bool, dim)
	p[0] = periodic
	m, err := fitMixture(cloud(dim, 1200), p, 8, 1)
	if err != nil {
		t.Fatal(err)
	}
	if len(m.components) < 2 {
		t.Fatalf("%d components, want at least 2 for two clusters", len(m.components))
	}
	return m
}

// panels are Gauss-Legendre nodes on [0, 1]: equal panels within, and towards
// both ends, where the density may diverge, each a thirty-second of the last.
func panels(inner, order int) (node, weight []float64) {
	var edges []float64
	for e := 50; e > 5; e -= 5 {
		edges = append(edges, math.Ldexp(1, -e))
	}
	for i := range inner + 1 {
		edges = append(edges, 0.03+0.94*float64(i)/float64(inner))
	}
	for e := 10; e <= 50; e += 5 {
		edges = append(edges, 1-math.Ldexp(1, -e))
	}
	x, w := make([]float64, order), make([]float64, order)
	for i := 1; i < len(edges); i++ {
		quad.Legendre{}.FixedLocations(x, w, edges[i-1], edges[i])
		node = append(node, x...)
		weight = append(weight, w...)
	}
	return node, weight
}

// TestMixtureIntegral: the density integrates to 1 over the cube, by quadrature
// in 1 to 3 dimensions (the last only with a cut, for time). The tolerances are a
// few times what the grids leave; a term left out of the density is of order 1.
func TestMixtureIntegral(t *testing.T) {
	for _, c := range []struct {
		dim, inner, order int
		tol               float64
	}{{1, 40, 10, 1e-5}, {2, 24, 6, 1e-4}, {3, 12, 3, 1e-2}} {
		for _, periodic := range []bool{false, true}[c.dim/3:] {
			m := fitted(t, c.dim, periodic)
			node, weight := panels(c.inner, c.order)
			u, y := make([]float64, c.dim), make([]float64, c.dim)
			var sum func(k int) float64
			sum = func(k int) float64 {
				if k == c.dim {
					return math.Exp(m.logDensity(u, y))
				}
				var s float64
				for i, x := range node {
					u[k] = x
					s += weight[i] * sum(k+1)
				}
				return s
			}
			got := sum(0)
			t.Logf("%d dimensions, periodic %v, %d components, %g degrees: integral - 1 = %.2g", c.dim, periodic, len(m.components), m.freedom, got-1)
			if math.Abs(got-1) > c.tol {
				t.Errorf("%d dimensions, periodic %v: integral %.6f, want 1 ± %g", c.dim, periodic, got, c.tol)
			}
		}
	}
}

// pair is a density on the cube: of equal shares, truncated normals of the given
// width in each coordinate around either cluster of cloud, wrapped in
// coordinate 0.
type pair struct {
	dim   int
	width float64
}

func (p pair) centre(k int, second bool) float64 {
	switch {
	case second && k == 0:
		return 0
	case second && k == p.dim-1:
		return 0.02
	}
	return 0.35
}

func (p pair) logDensity(u []float64) float64 {
	var l [2]float64
	for i, second := range []bool{false, true} {
		for k, x := range u {
			c := p.centre(k, second)
			d, low, high := x-c, -c, 1-c
			if k == 0 {
				d, low, high = wrap(d+0.5)-0.5, -0.5, 0.5
			}
			inside := normalCDF(high/p.width) - normalCDF(low/p.width)
			l[i] -= 0.5*d*d/(p.width*p.width) + math.Log(math.Sqrt(2*math.Pi)*p.width*inside)
		}
	}
	return logAdd(l[0], l[1]) - math.Ln2
}

func (p pair) draw(rng *random.Rand, u []float64) {
	second := rng.Float64() < 0.5
	for k := range u {
		c := p.centre(k, second)
		for {
			u[k] = c + p.width*rng.NormFloat64()
			if k == 0 {
				if math.Abs(u[k]-c) >= 0.5 {
					continue
				}
				u[k] = wrap(u[k])
			}
			if u[k] >= 0 && u[k] <= 1 {
				break
			}
		}
	}
}

// TestMixtureMonteCarlo, in 6 dimensions, against densities of another form:
// the mean of q/p over draws from a wider p is the integral of q, and the mean
// of f/q over draws from q is that of a narrower f. Both are 1.
func TestMixtureMonteCarlo(t *testing.T) {
	const dim, n, prior = 6, 20000, 0.2
	m := fitted(t, dim, true)
	wide, narrow := pair{dim, 0.09}, pair{dim, 0.045}
	rng := random.New(1, "mixture test")
	y, z, u := make([]float64, dim), make([]float64, dim), make([]float64, dim)
	var forth, back []float64
	for range n {
		if rng.Float64() < prior {
			for k := range u {
				u[k] = rng.Float64()
			}
		} else {
			wide.draw(rng, u)
		}
		p := logAdd(math.Log(prior), math.Log1p(-prior)+wide.logDensity(u))
		forth = append(forth, math.Exp(m.logDensity(u, y)-p))
		m.draw(rng, u, y, z)
		if !insideCube(u) {
			t.Fatalf("draw %v is outside the cube", u)
		}
		back = append(back, math.Exp(narrow.logDensity(u)-m.logDensity(u, y)))
	}
	for i, v := range [][]float64{forth, back} {
		name := []string{"integral of q", "mean of f/q"}[i]
		mean, sd := meanSD(v)
		err := sd / math.Sqrt(n)
		t.Logf("%s: %.4f ± %.4f", name, mean, err)
		if math.Abs(mean-1) > 4*err || err > 0.05 {
			t.Errorf("%s: %.4f ± %.4f, want 1 within 4 errors of at most 0.05", name, mean, err)
		}
	}
}

// A posterior equal to the prior is one standard normal of the chart, so the
// fitted density is flat: for n points and p = dim + dim(dim+1)/2 parameters the
// mean of ln q over the cube is about -p/2n, with p = 14 and n = 4000 -0.002.
func TestMixtureOfFlatPosterior(t *testing.T) {
	const dim, n = 4, 4000
	rng := random.New(1, "flat")
	var points [][]float64
	var weight []float64
	for range 2 * n {
		u := make([]float64, dim)
		for k := range u {
			u[k] = rng.Float64()
		}
		points = append(points, u)
		weight = append(weight, 1)
	}
	m, err := fitMixture(newSample(points[:n], weight[:n]), []bool{true, false, false, false}, 8, 1)
	if err != nil {
		t.Fatal(err)
	}
	if got := m.meanLogDensity(newSample(points[n:], weight[n:])); got < -0.01 || len(m.components) != 1 {
		t.Errorf("mean ln q = %.4f with %d components, want above -0.01 with 1", got, len(m.components))
	}
}

func TestMixtureNeedsPoints(t *testing.T) {
	if _, err := fitMixture(cloud(3, 10), nil, 8, 1); err == nil {
		t.Error("10 points in 3 dimensions give no error")
	}
	s := cloud(3, 200)
	for _, u := range s.points {
		u[1] = u[2]
	}
	if _, err := fitMixture(s, nil, 8, 1); err == nil {
		t.Error("points in an oblique plane give no error")
	}
}
