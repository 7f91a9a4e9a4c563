package sampler

import (
	"math"
	"math/rand/v2"
	"slices"
	"testing"

	"knell/internal/random"
)

// region is a set of known volume to draw from, bound and cover.
type region struct {
	name     string
	dim      int
	volume   float64
	inside   func(u []float64) bool
	periodic []bool
}

func regions() []region {
	ball := func(u []float64, at ...float64) float64 {
		var s float64
		for k, x := range u {
			s += (x - at[k%len(at)]) * (x - at[k%len(at)])
		}
		return s
	}
	return []region{
		{"ball", 5, math.Exp(logBall(5)) * math.Pow(0.45, 5), func(u []float64) bool { return ball(u, 0.5) < 0.45*0.45 }, nil},
		{"box", 6, math.Pow(0.5, 6), func(u []float64) bool { return slices.Max(u) < 0.75 && slices.Min(u) > 0.25 }, nil},
		{"two discs", 2, math.Pi * (0.01 + 0.0025), func(u []float64) bool { return ball(u, 0.2) < 0.01 || ball(u, 0.7) < 0.0025 }, nil},
		{"ring", 2, math.Pi * (0.16 - 0.1225), func(u []float64) bool { d := ball(u, 0.5); return d < 0.16 && d > 0.1225 }, nil},
		{"disc across the seam", 2, math.Pi * 0.01, func(u []float64) bool {
			x := u[0] - math.Round(u[0])
			return x*x+(u[1]-0.5)*(u[1]-0.5) < 0.01
		}, []bool{true, false}},
		{"cube corner", 3, 0.027, func(u []float64) bool { return max(u[0], u[1], u[2]) < 0.3 }, nil},
	}
}

func (g region) draw(rng *rand.Rand, n int) []float64 {
	var points []float64
	u := make([]float64, g.dim)
	for len(points) < n*g.dim {
		for k := range u {
			u[k] = rng.Float64()
		}
		if g.inside(u) {
			points = append(points, u...)
		}
	}
	return points
}

func (g region) bound(seed uint64, points []float64) *bound {
	return newBound(points, g.dim, math.Log(g.volume), g.periodic, nil, nil, 2, func(i int) *rand.Rand {
		return random.New(seed, "bound", uint64(i)).Rand
	})
}

// The bound must hold points of the region that it was not built from, all but
// a share that cannot matter: it changes the log-evidence by that much per nat
// of compression. At 1/n and H = 20 it is 0.02 for 1000 live points, a seventh
// of sqrt(H/n). Boxes in several dimensions are not for ellipsoids to be tight
// around.
func TestBoundCoversUnseenPoints(t *testing.T) {
	const n, fresh, repeats = 500, 4000, 12
	for _, g := range regions() {
		t.Run(g.name, func(t *testing.T) {
			missed, excess := 0, 0.0
			for seed := range uint64(repeats) {
				rng := random.New(seed, g.name).Rand
				b := g.bound(seed, g.draw(rng, n))
				excess += b.logVolume - math.Log(g.volume)
				test := g.draw(rng, fresh)
				v := make([]float64, g.dim)
				for i := range fresh {
					b.frame.into(test[i*g.dim:(i+1)*g.dim], v)
					if !b.held(v, -1) {
						missed++
					}
				}
			}
			share := float64(missed) / (fresh * repeats)
			t.Logf("misses %.2g of the region, volume ratio %.2f", share, math.Exp(excess/repeats))
			if share > 1.0/n {
				t.Errorf("misses %.2g of the region, want at most %.2g", share, 1.0/n)
			}
			if r := math.Exp(excess / repeats); r > 4 && g.name != "box" {
				t.Errorf("volume %.2f times that of the region, want at most 4", r)
			}
		})
	}
}

// Draws from overlapping ellipsoids, cut by the cube, must be uniform: counts in
// the cells of a grid that lie wholly inside are compared with each other.
func TestProposalsAreUniform(t *testing.T) {
	rng := random.New(1, "uniform").Rand
	disc := func(x, y, r float64) ellipsoid {
		s := newScatter(2)
		s.a[0], s.a[3] = 1, 1
		e, _ := s.ellipsoid([]float64{x, y})
		e.radius2 = r * r
		e.members = []int{0}
		return e
	}
	b := &bound{dim: 2, points: make([]float64, 6), ellipsoids: []ellipsoid{disc(0.4, 0.5, 0.3), disc(0.6, 0.5, 0.3), disc(0.5, 0.1, 0.2)}}
	b.measure(rng)
	const grid, n = 12, 200000
	var count [grid][grid]float64
	x, z := make([]float64, 2), make([]float64, 2)
	for kept := 0; kept < n; {
		if b.propose(rng, x, z) {
			count[int(x[0]*grid)][int(x[1]*grid)]++
			kept++
		}
	}
	var cells []float64
	for i := range grid {
		for j := range grid {
			full := false
			for c := range b.ellipsoids {
				in := true
				for corner := range 4 {
					p := []float64{float64(i+corner%2) / grid, float64(j+corner/2) / grid}
					in = in && b.ellipsoids[c].contains(p)
				}
				full = full || in
			}
			if full {
				cells = append(cells, count[i][j])
			}
		}
	}
	var mean, chi2 float64
	for _, c := range cells {
		mean += c / float64(len(cells))
	}
	for _, c := range cells {
		chi2 += (c - mean) * (c - mean) / mean
	}
	// Chi-squared of m-1 degrees: mean m-1, variance 2(m-1); five of its sds.
	m := float64(len(cells) - 1)
	if len(cells) < 30 || chi2 > m+5*math.Sqrt(2*m) {
		t.Errorf("chi-squared %.1f for %d cells", chi2, len(cells))
	}
}

func TestFrameCutsAtTheWidestGap(t *testing.T) {
	f := newFrame([]float64{0.95, 0.3, 0.05, 0.4, 0.1, 0.5}, 2, []bool{true, false})
	if s := f.shift[0]; math.Abs(s-0.525) > 1e-15 {
		t.Errorf("cut at %g, want 0.525, the middle of the gap from 0.1 to 0.95", s)
	}
	v, u := make([]float64, 2), make([]float64, 2)
	f.into([]float64{0.05, 0.4}, v)
	if math.Abs(v[0]-0.525) > 1e-15 || v[1] != 0.4 {
		t.Errorf("(0.05, 0.4) has frame coordinates %v, want (0.525, 0.4)", v)
	}
	f.outOf(v, u)
	if math.Abs(u[0]-0.05) > 1e-15 {
		t.Errorf("back at %g, want 0.05", u[0])
	}
	if w := wrap(-1e-18); w != 0 {
		t.Errorf("wrap(-1e-18) = %g, want 0: below 1", w)
	}
}
