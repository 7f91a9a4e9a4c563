package problems_test

import (
	"fmt"
	"math"
	"testing"

	"gonum.org/v1/gonum/integrate/quad"

	"knell/internal/random"
	"knell/sampler"
	"knell/validation"
	"knell/validation/problems"
)

var _ sampler.Target = (*problems.Problem)(nil)

func problem(t *testing.T, name string, dim int) *problems.Problem {
	t.Helper()
	p, err := problems.New(name, dim)
	if err != nil {
		t.Fatal(err)
	}
	return p
}

func logL(p *problems.Problem, u []float64) float64 {
	l, _ := p.LogLikelihood(u)
	return l
}

// rule is the Gauss-Legendre rule of eight nodes on each of n panels of [0, 1].
func rule(n int) validation.Rule {
	r := validation.Rule{Nodes: make([]float64, 8*n), Weights: make([]float64, 8*n)}
	for i := range n {
		quad.Legendre{}.FixedLocations(r.Nodes[8*i:8*i+8], r.Weights[8*i:8*i+8], float64(i)/float64(n), float64(i+1)/float64(n))
	}
	return r
}

func near(t *testing.T, what string, got, want, tol float64) {
	t.Helper()
	if !(math.Abs(got-want) <= tol) {
		t.Errorf("%s = %.9f, want %.9f within %.1g", what, got, want, tol)
	}
}

// Values from quadratures and sums made independently of this package, given to
// five or six decimals.
func TestTruthsAgainstIndependentValues(t *testing.T) {
	for _, tc := range []struct {
		name      string
		dim       int
		want, tol float64
	}{
		{"shells", 2, -1.745642, 1e-5}, {"shells", 3, -2.841757, 1e-5}, {"shells", 5, -5.673601, 1e-5},
		{"shells", 8, -10.801975, 1e-5}, {"shells", 10, -14.590491, 1e-5}, {"shells", 16, -27.088232, 1e-5},
		{"shells", 20, -36.086548, 1e-5}, {"shells", 30, -60.127767, 1e-5}, {"shells", 50, -112.415124, 1e-5},
		{"eggbox", 2, 235.85594, 1e-5},
		{"rosenbrock", 2, -5.804132, 1e-6}, {"rosenbrock", 3, -10.477029, 1e-6}, {"rosenbrock", 4, -15.101691, 1e-6},
		{"rosenbrock", 5, -19.732429, 1e-6}, {"rosenbrock", 10, -43.108355, 1e-6},
		{"log-gamma", 2, -8.18869, 1e-5}, {"log-gamma", 10, -40.94345, 1e-5}, {"log-gamma", 30, -122.83034, 1e-5},
		{"spike-and-slab", 20, 4.615120, 1e-6},
		{"gaussian", 5, -3.46574, 1e-5}, {"gaussian", 20, -13.86294, 1e-5},
		{"tiers", 2, -2.852361, 1e-6},
	} {
		near(t, fmt.Sprintf("truth of %s in %d dimensions", tc.name, tc.dim), problem(t, tc.name, tc.dim).Truth, tc.want, tc.tol)
	}
}

// In two and three dimensions the likelihood itself is integrated over the cube,
// walls and all.
func TestTruthsAgainstTensorQuadrature(t *testing.T) {
	for _, tc := range []struct {
		name   string
		dim    int
		panels int
		tol    float64
	}{
		{"gaussian", 2, 120, 1e-8},
		{"shells", 2, 150, 1e-6}, // what the wall cuts off
		{"eggbox", 2, 100, 1e-8},
		{"rosenbrock", 2, 250, 1e-6},
		{"log-gamma", 2, 60, 1e-8}, // exp(-20) of the tails
		{"spike-and-slab", 2, 60, 1e-8},
		{"two-modes", 2, 40, 1e-8},
		{"ridge", 2, 250, 1e-6},
		{"winding", 3, 22, 1e-5},
	} {
		t.Run(fmt.Sprintf("%s/%d", tc.name, tc.dim), func(t *testing.T) {
			p := problem(t, tc.name, tc.dim)
			rules := make([]validation.Rule, tc.dim)
			for k := range rules {
				rules[k] = rule(tc.panels)
			}
			got, err := validation.LogQuadrature(func() (sampler.Target, error) { return p, nil }, rules)
			if err != nil {
				t.Fatal(err)
			}
			near(t, "integral over the cube", got, p.Truth, tc.tol)
		})
	}
}

// Where L depends on r = max |2u - 1| alone, r has the density D r^(D-1).
func TestTruthsOfNestedCubes(t *testing.T) {
	const n = 20000
	for _, tc := range []struct {
		name string
		tol  float64
	}{{"half-plateau", 1e-6}, {"hypercube", 1e-8}, {"tiers", 1e-4}} { // jumps cost a panel each
		for _, dim := range []int{1, 2, 3, 10} {
			p := problem(t, tc.name, dim)
			r := rule(n)
			u := make([]float64, dim)
			for k := range u {
				u[k] = 0.5
			}
			var sum float64
			for i, x := range r.Nodes {
				u[dim-1] = 0.5 + x/2
				sum += r.Weights[i] * float64(dim) * math.Pow(x, float64(dim-1)) * math.Exp(logL(p, u))
			}
			near(t, fmt.Sprintf("integral of %s/%d over r", tc.name, dim), math.Log(sum), p.Truth, tc.tol)
		}
	}
}

// A product of functions of one coordinate each integrates to the product of
// the integrals along the axes through any point o, over L(o)^(D-1).
func TestTruthsOfProducts(t *testing.T) {
	for _, tc := range []struct {
		name string
		dims []int
		at   float64
	}{{"log-gamma", []int{3, 6, 10}, 2. / 3}, {"mostly-zero", []int{3, 8}, 0.09}} {
		for _, dim := range tc.dims {
			p := problem(t, tc.name, dim)
			r := rule(2000)
			u := make([]float64, dim)
			for k := range u {
				u[k] = tc.at
			}
			at := logL(p, u)
			got := at
			for k := range u {
				var sum float64
				for i, x := range r.Nodes {
					u[k] = x
					sum += r.Weights[i] * math.Exp(logL(p, u)-at)
				}
				u[k] = tc.at
				got += math.Log(sum)
			}
			// exp(-20) of the log-gamma's tail, and the panel at the edge of zero.
			near(t, fmt.Sprintf("product of the integrals of %s/%d", tc.name, dim), got, p.Truth, 1e-7)
		}
	}
}

// The last coordinate of a ridge, and any but the first three of a winding one,
// integrates to one whatever the others are: one dimension fewer is left.
func TestLastCoordinateIntegratesAway(t *testing.T) {
	r := rule(1000)
	rng := random.New(1, "last coordinate")
	for _, tc := range []struct {
		name string
		dims []int
	}{{"ridge", []int{3, 4, 7}}, {"winding", []int{4, 5, 9}}} {
		for _, dim := range tc.dims {
			p, fewer := problem(t, tc.name, dim), problem(t, tc.name, dim-1)
			u := make([]float64, dim)
			for range 20 {
				for k := range u {
					u[k] = 0.3 + 0.4*rng.Float64()
				}
				want := logL(fewer, u[:dim-1])
				var sum float64
				for i, x := range r.Nodes {
					u[dim-1] = x
					sum += r.Weights[i] * math.Exp(logL(p, u)-want)
				}
				near(t, fmt.Sprintf("integral of %s/%d over the last coordinate", tc.name, dim), math.Log(sum), 0, 1e-9)
			}
			near(t, "truth", p.Truth, fewer.Truth, 1e-8) // tails of 6 widths
		}
	}
}

// e^-κ I₀(κ) at κ = 200 by its asymptotic series, whose next term is 3e-10.
func TestTruthOfWindingRidge(t *testing.T) {
	const k = 200.0
	want := -0.5*math.Log(2*math.Pi*k) + math.Log(1+1/(8*k)+9/(128*k*k)+75/(1024*k*k*k))
	near(t, "truth", problem(t, "winding", 5).Truth, want, 1e-9)
}

// Two balls in five dimensions: each is a product, whose integral is that of the
// integrals along the axes through its own middle.
func TestTruthOfTwoModesInFiveDimensions(t *testing.T) {
	p := problem(t, "two-modes", 5)
	r := rule(2000)
	var total float64
	for _, at := range []float64{0.4, 0.8} {
		// At its own middle the other ball is below exp(-19) of either.
		u := []float64{at, at, at, at, at}
		top := logL(p, u)
		var sum float64
		for i, x := range r.Nodes {
			u[2] = x
			sum += r.Weights[i] * math.Exp(logL(p, u)-top)
		}
		total += math.Exp(top + 5*math.Log(sum))
	}
	near(t, "sum of the modes", math.Log(total), p.Truth, 1e-6)
}
