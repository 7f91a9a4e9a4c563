package sampler

import (
	"cmp"
	"fmt"
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

// family is nested sets: wider reports whether u is within the one that is wider
// by w in every direction, and the volume is that of w = 0.
type family struct {
	name     string
	dim      int
	volume   float64
	wider    func(u []float64, w float64) bool
	periodic []bool
}

// region is the set of w = 0.
func (f family) region() region {
	return region{f.name, f.dim, f.volume, func(u []float64) bool { return f.wider(u, 0) }, f.periodic}
}

func regions() []region {
	var rs []region
	for _, f := range families() {
		rs = append(rs, f.region())
	}
	return rs
}

func families() []family {
	ball := func(u []float64, at ...float64) float64 {
		var s float64
		for k, x := range u {
			s += (x - at[k%len(at)]) * (x - at[k%len(at)])
		}
		return math.Sqrt(s)
	}
	return []family{
		{"ball", 5, math.Exp(logBall(5)) * math.Pow(0.4, 5), func(u []float64, w float64) bool { return ball(u, 0.5) < 0.4+w }, nil},
		{"box", 6, math.Pow(0.5, 6), func(u []float64, w float64) bool { return slices.Max(u) < 0.75+w && slices.Min(u) > 0.25-w }, nil},
		{"two discs", 2, math.Pi * (0.01 + 0.0025), func(u []float64, w float64) bool { return ball(u, 0.2) < 0.1+w || ball(u, 0.7) < 0.05+w }, nil},
		{"ring", 2, math.Pi * (0.16 - 0.1225), func(u []float64, w float64) bool { d := ball(u, 0.5); return d < 0.4+w && d > 0.35-w }, nil},
		{"disc across the seam", 2, math.Pi * 0.01, func(u []float64, w float64) bool {
			return math.Hypot(u[0]-math.Round(u[0]), u[1]-0.5) < 0.1+w
		}, []bool{true, false}},
		{"cube corner", 3, 0.027, func(u []float64, w float64) bool { return max(u[0], u[1], u[2]) < 0.3+w }, nil},
	}
}

// draw returns n points of the set, uniformly.
func (g region) draw(rng *rand.Rand, n int) []float64 {
	return drawInside(rng, n, g.dim, g.inside)
}

func drawInside(rng *rand.Rand, n, dim int, inside func(u []float64) bool) []float64 {
	var points []float64
	u := make([]float64, dim)
	for len(points) < n*dim {
		for k := range u {
			u[k] = rng.Float64()
		}
		if inside(u) {
			points = append(points, u...)
		}
	}
	return points
}

// removed returns n points between the set and the one that is wider by w, those
// furthest outside first.
func (f family) removed(rng *rand.Rand, n int, w float64) []float64 {
	points := drawInside(rng, n, f.dim, func(u []float64) bool { return f.wider(u, w) && !f.wider(u, 0) })
	rows := slices.Collect(slices.Chunk(points, f.dim))
	slices.SortStableFunc(rows, func(a, b []float64) int { return cmp.Compare(f.level(b, w), f.level(a, w)) })
	return slices.Concat(rows...)
}

// level returns the least width of a set that holds u, which that of w does.
func (f family) level(u []float64, w float64) float64 {
	lo := 0.0
	for range 30 {
		if mid := (lo + w) / 2; f.wider(u, mid) {
			w = mid
		} else {
			lo = mid
		}
	}
	return w
}

func (g region) bound(seed uint64, points []float64) *bound {
	return g.boundAfter(seed, points, nil)
}

func (g region) boundAfter(seed uint64, points, recent []float64) *bound {
	return newBound(recent, points, g.dim, math.Log(g.volume), g.periodic, nil, nil, 2, func(i int) *rand.Rand {
		return random.New(seed, "bound", uint64(i)).Rand
	})
}

// The bound must hold points of the region that it was not built from, all but
// a share that cannot matter: it changes the log-evidence by that much per nat
// of compression. At 1/n and H = 20 it is 0.02 for 1000 live points, a seventh
// of sqrt(H/n). Boxes in several dimensions are not for ellipsoids to be tight
// around. That holds with points removed lately as well as without.
func TestBoundCoversUnseenPoints(t *testing.T) {
	const n, fresh, repeats = 437, 4000, 12
	for _, f := range families() {
		g := f.region()
		for _, removed := range []int{0, n} {
			t.Run(fmt.Sprintf("%s/%d", g.name, removed), func(t *testing.T) {
				missed, excess := 0, 0.0
				for seed := range uint64(repeats) {
					rng := random.New(seed, g.name).Rand
					// Twice the volume, or nearly.
					w := 0.2 * math.Pow(g.volume, 1/float64(g.dim))
					points, recent := g.draw(rng, n), f.removed(rng, removed, w)
					b := g.boundAfter(seed, points, recent)
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
				t.Logf("misses %.2g/n of the region, volume ratio %.2f", share*n, math.Exp(excess/repeats))
				if share > 1.0/n {
					t.Errorf("misses %.2g of the region, want at most %.2g", share, 1.0/n)
				}
				if r := math.Exp(excess / repeats); r > 4 && g.name != "box" {
					t.Errorf("volume %.2f times that of the region, want at most 4", r)
				}
			})
		}
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
