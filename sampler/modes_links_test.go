package sampler

import (
	"math"
	"testing"

	"knell/internal/random"
)

// lineOf is n points spread uniformly along a line: where a sample of one piece
// is most easily taken for two.
func lineOf(n int, seed uint64) *links {
	rng := random.New(seed, "line")
	c := &links{dim: 1, of: make([]int, n), y: make([]float64, n)}
	for i := range c.y {
		c.y[i] = rng.Float64()
	}
	c.v = c.y
	return c
}

// n exp(-0.81 k) bounds the probability that a line comes apart, see Modes: it
// is checked where it is large enough to be seen.
func TestLinksOfALine(t *testing.T) {
	const n, trials = 300, 400
	for _, k := range []int{5, 7} {
		apart := 0
		for seed := range uint64(trials) {
			c := lineOf(n, seed)
			c.join(c.nearest(k), k)
			apart += c.count - 1
		}
		bound := trials * n * math.Exp(-0.81*float64(k))
		t.Logf("k = %d: %d partings in %d lines of %d points, bound %.0f", k, apart, trials, n, bound)
		if float64(apart) > bound || k == 5 && apart == 0 {
			t.Errorf("k = %d: %d partings in %d lines, want some, but at most %.0f", k, apart, trials, bound)
		}
	}
}

// Uniform points of shapes in one piece stay in one, those of two pieces do not,
// with the number of neighbours and the metric that are used.
func TestLinksOfShapes(t *testing.T) {
	arc := func(rng *random.Rand, u []float64) {
		phi := 1.9 * math.Pi * rng.Float64()
		u[0], u[1] = 0.5+0.4*math.Cos(phi), 0.5+0.4*math.Sin(phi)
		for k := 2; k < len(u); k++ {
			u[k] = 0.5 + 1e-4*rng.Float64()
		}
		u[0] += 1e-4 * rng.Float64()
	}
	ball := func(centre, radius float64) func(rng *random.Rand, u []float64) {
		return func(rng *random.Rand, u []float64) {
			var s float64
			for k := range u {
				u[k] = rng.NormFloat64()
				s += u[k] * u[k]
			}
			r := radius * math.Pow(rng.Float64(), 1/float64(len(u))) / math.Sqrt(s)
			for k := range u {
				u[k] = centre + r*u[k]
			}
		}
	}
	for _, tc := range []struct {
		name   string
		dim, n int
		first  func(*random.Rand, []float64)
		second func(*random.Rand, []float64)
		share  float64 // of the second
		want   int
	}{
		{"thin arc", 3, 400, arc, arc, 0, 1},
		{"ball", 10, 200, ball(0.5, 0.1), nil, 0, 1},
		{"ball of few points", 20, 80, ball(0.5, 0.1), nil, 0, 1},
		{"two balls", 5, 300, ball(0.3, 0.05), ball(0.6, 0.02), 0.2, 2},
		{"two balls of unequal number", 10, 600, ball(0.3, 0.05), ball(0.6, 0.05), 0.06, 2},
		{"too few in the second", 5, 300, ball(0.3, 0.05), ball(0.6, 0.02), 0.03, 1},
	} {
		for seed := range uint64(5) {
			rng := random.New(seed, tc.name)
			o := &Outcome{}
			var all []int
			for i := range tc.n {
				u := make([]float64, tc.dim)
				if float64(i) < tc.share*float64(tc.n) {
					tc.second(rng, u)
				} else {
					tc.first(rng, u)
				}
				o.Points = append(o.Points, u)
				all = append(all, i)
			}
			if c := newLinks(o, all); c == nil || c.count != tc.want {
				t.Errorf("%s, seed %d: %+v parts, want %d", tc.name, seed, c, tc.want)
			}
		}
	}
}
