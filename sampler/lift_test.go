package sampler

import (
	"fmt"
	"math"
	"math/rand/v2"
	"slices"
	"testing"

	"knell/internal/random"
)

func TestWallImages(t *testing.T) {
	for _, tc := range []struct {
		w            wall
		u            float64
		lower, upper float64
	}{
		{lowWall, 0, 0.5, 0.5},
		{lowWall, 0.25, 0.375, 0.625},
		{lowWall, 1, 0, 1},
		{highWall, 1, 0.5, 0.5},
		{highWall, 0.25, 0.125, 0.875},
		{highWall, 0, 0, 1},
	} {
		if lower, upper := tc.w.unfold(tc.u, false), tc.w.unfold(tc.u, true); lower != tc.lower || upper != tc.upper {
			t.Errorf("wall %d: images of %g are %g and %g, want %g and %g", tc.w, tc.u, lower, upper, tc.lower, tc.upper)
		}
	}
	rng := random.New(1, "images")
	for range 1000 {
		u := math.Pow(rng.Float64(), 8)
		for _, w := range []wall{lowWall, highWall} {
			for _, upper := range []bool{false, true} {
				// v, up to 1, rounds by 2⁻⁵⁴ and 1 - u by as much; v counts twice.
				if back := w.fold(w.unfold(u, upper)); math.Abs(back-u) > 0x1p-52 {
					t.Fatalf("wall %d: %.17g comes back as %.17g", w, u, back)
				}
			}
		}
	}
}

// The lift of uniform points is uniform, with independent images in each
// dimension even where the coordinates are equal or next to each other, and
// so are the points back from uniform ones.
func TestLiftKeepsTheMeasure(t *testing.T) {
	const n = 20000
	f := frame{wall: []wall{lowWall, highWall}}
	rng := random.New(1, "measure")
	u, v := make([]float64, 2), make([]float64, 2)
	var to, back [2][]float64
	for range n {
		u[0], u[1] = rng.Float64(), rng.Float64()
		f.into(u, v)
		for k := range v {
			to[k] = append(to[k], v[k])
		}
		v[0], v[1] = rng.Float64(), rng.Float64()
		f.outOf(v, u)
		for k := range u {
			back[k] = append(back[k], u[k])
		}
	}
	for k := range 2 {
		if p := uniformP(to[k]); p < 1e-4 {
			t.Errorf("dimension %d: uniform points are not uniform once lifted, p = %.2g", k, p)
		}
		if p := uniformP(back[k]); p < 1e-4 {
			t.Errorf("dimension %d: uniform images are not of uniform points, p = %.2g", k, p)
		}
	}
	var count [4]float64
	for x := 0.3; count[0]+count[1]+count[2]+count[3] < n; x = math.Nextafter(x, 1) {
		f.into([]float64{x, x}, v)
		at := 0
		for k := range v {
			if v[k] > 0.5 {
				at += 1 + k
			}
		}
		count[at]++
	}
	for i, c := range count { // binomial, sd √(n 3/16); five of them
		if math.Abs(c-n/4) > 5*math.Sqrt(n*3.0/16) {
			t.Errorf("quadrant %d has %g of %d neighbouring points, want a quarter", i, c, n)
		}
	}
}

// leaning are regions on a wall, and those that must be left as they are.
func leaning() []struct {
	region
	walls []wall
} {
	half := func(u []float64, at ...float64) bool {
		var s float64
		for k, x := range u {
			s += (x - at[k]) * (x - at[k])
		}
		return s < 0.16
	}
	ball4 := math.Exp(logBall(4)) * math.Pow(0.4, 4)
	return []struct {
		region
		walls []wall
	}{
		{region{"half ball", 4, ball4 / 2, func(u []float64) bool { return half(u, 0, 0.5, 0.5, 0.5) }, nil},
			[]wall{lowWall, noWall, noWall, noWall}},
		{region{"other wall", 4, ball4 / 2, func(u []float64) bool { return half(u, 0.5, 0.5, 1, 0.5) }, nil},
			[]wall{noWall, noWall, highWall, noWall}},
		{region{"quarter of a ball across the seam", 4, ball4 / 4, func(u []float64) bool {
			return half([]float64{u[0], u[1], u[2] - math.Round(u[2]), u[3]}, 0, 1, 0, 0.5)
		}, []bool{false, false, true, false}}, []wall{lowWall, highWall, noWall, noWall}},
		{region{"ball", 4, ball4, func(u []float64) bool { return half(u, 0.5, 0.5, 0.5, 0.5) }, nil}, nil},
		{region{"cube", 2, 1, func(u []float64) bool { return true }, nil}, nil},
		{region{"simplex", 4, math.Pow(0.5, 4) / 24, func(u []float64) bool { return u[0]+u[1]+u[2]+u[3] < 0.5 }, nil}, nil},
		{region{"ridge into a corner", 2, 0.2, func(u []float64) bool {
			return math.Abs(u[0]-u[1]) < 0.2*(1-u[0]) && u[0] < 1
		}, nil}, nil},
		{region{"away from the wall", 2, 0.06, func(u []float64) bool { return u[0] > 0.15 && u[0] < 0.35 && u[1] > 0.5 && u[1] < 0.8 }, nil}, nil},
	}
}

func TestLiftWhereItPays(t *testing.T) {
	for _, g := range leaning() {
		want := g.walls
		if want == nil {
			want = make([]wall, g.dim)
		}
		for seed := range uint64(5) {
			rng := random.New(seed, g.name).Rand
			points := g.draw(rng, 400)
			reflective := make([]bool, g.dim)
			for k := range reflective {
				reflective[k] = g.periodic == nil || !g.periodic[k]
			}
			f := newFrame(points, g.dim, g.periodic)
			f.lift(points, g.dim, reflective, rng)
			got := f.wall
			if got == nil {
				got = make([]wall, g.dim)
			}
			if !slices.Equal(got, want) {
				t.Errorf("%s: lifted at %v, want %v", g.name, got, want)
			}
			f = newFrame(points, g.dim, g.periodic)
			f.lift(points, g.dim, make([]bool, g.dim), rng)
			if f.wall != nil {
				t.Errorf("%s: lifted at %v without leave", g.name, f.wall)
			}
		}
	}
}

// Both images of the region must be covered, as in TestBoundCoversUnseenPoints,
// and draws from the bound that are in the region must be uniform in u.
func TestLiftedBoundCoversBothImages(t *testing.T) {
	const n, fresh, repeats = 500, 4000, 10
	for _, g := range leaning() {
		if g.walls == nil {
			continue
		}
		t.Run(g.name, func(t *testing.T) {
			missed, excess, hard := 0, 0.0, 0.0
			var upper, inner, drawn, tried float64
			for seed := range uint64(repeats) {
				rng := random.New(seed, g.name).Rand
				points := g.draw(rng, n)
				fit := func(reflective []bool) *bound {
					return newBound(nil, points, g.dim, math.Log(g.volume), g.periodic, reflective, nil, 2, func(i int) *rand.Rand {
						return random.New(seed, "bound", uint64(i)).Rand
					})
				}
				reflective := make([]bool, g.dim)
				for k, w := range g.walls {
					reflective[k] = w != noWall
				}
				b := fit(reflective)
				excess += b.logVolume - math.Log(g.volume)
				hard += fit(nil).logVolume - math.Log(g.volume)
				if !slices.Equal(b.frame.wall, g.walls) {
					t.Fatalf("lifted at %v, want %v", b.frame.wall, g.walls)
				}
				test := g.draw(rng, fresh)
				v := make([]float64, g.dim)
				for i := range fresh {
					u := test[i*g.dim : (i+1)*g.dim]
					b.frame.cut(u, v)
					for k, w := range g.walls {
						if w != noWall {
							v[k] = w.unfold(u[k], rng.IntN(2) == 0)
						}
					}
					if !b.held(v, -1) {
						missed++
					}
				}
				u, z := make([]float64, g.dim), make([]float64, g.dim)
				first := slices.IndexFunc(g.walls, func(w wall) bool { return w != noWall })
				for range fresh {
					if !b.propose(rng, v, z) {
						continue
					}
					tried++
					if b.frame.outOf(v, u); !g.inside(u) {
						continue
					}
					drawn++
					if v[first] > 0.5 {
						upper++
					}
					if g.walls[first].distance(u[first]) < 0.1 {
						inner++
					}
				}
			}
			share := float64(missed) / (fresh * repeats)
			t.Logf("misses %.2g of the region, volume ratio %.2f, %.2f not lifted", share, math.Exp(excess/repeats), math.Exp(hard/repeats))
			if share > 1.0/n {
				t.Errorf("misses %.2g of the region, want at most %.2g", share, 1.0/n)
			}
			if excess > hard-liftGain*repeats {
				t.Errorf("volume ratio %.2f, %.2f not lifted", math.Exp(excess/repeats), math.Exp(hard/repeats))
			}
			// The log-volume is that of the prior: 1/(acceptance) is the ratio.
			// measure's volumeTrial draws leave 1/√1000 each, these 1/√drawn.
			if got, want := tried/drawn, math.Exp(excess/repeats); math.Abs(got/want-1) > 5*math.Sqrt(1.0/(volumeTrial*repeats)+1/drawn) {
				t.Errorf("%.3f draws per point of the region, volume ratio %.3f", got, want)
			}
			if math.Abs(upper-drawn/2) > 5*math.Sqrt(drawn)/2 {
				t.Errorf("%g of %g draws from the upper image, want half", upper, drawn)
			}
			// The share of a 4-ball of radius 0.4 that is within 0.1 of a plane
			// through its centre.
			p := slab(0.25) / slab(1)
			if sd := math.Sqrt(p * (1 - p) / drawn); math.Abs(inner/drawn-p) > 5*sd {
				t.Errorf("share %.4f ± %.4f of the draws within 0.1 of the wall, want %.4f", inner/drawn, sd, p)
			}
		})
	}
}

// slab is the integral of (1-y²)^(3/2), the cross-section of a 4-ball, from 0 to s.
func slab(s float64) float64 {
	const m = 1000
	var sum float64
	for i := range m + 1 {
		y := s * float64(i) / m
		w := float64(2 + 2*(i%2))
		if i == 0 || i == m {
			w = 1
		}
		sum += w * math.Pow(1-y*y, 1.5)
	}
	return sum * s / (3 * m)
}

// Slices that do not move must be seen although each place has its image chosen
// by its bits.
func TestMemorySeesThroughTheLift(t *testing.T) {
	const dim, n = 2, 400
	rng := random.New(1, "memory").Rand
	st := &stage{l: make([]float64, n)}
	for range n {
		st.u = append(st.u, 0.1*math.Abs(rng.NormFloat64()), 0.5+0.1*rng.NormFloat64())
	}
	b := newBound(nil, st.u, dim, math.Inf(-1), nil, []bool{true, false}, nil, 1, func(i int) *rand.Rand { return random.New(1, "bound", uint64(i)).Rand })
	if b.frame.wall == nil {
		t.Fatal("not lifted")
	}
	st.bound = b
	m := newMemory(dim, 8)
	for range 40 {
		var fresh slots
		fresh.resize(60, dim)
		for slot := range fresh.start {
			s := rng.IntN(n)
			fresh.start[slot] = s
			// Almost where it was; the bits differ.
			fresh.u[slot*dim] = st.u[s*dim] * (1 + 1e-9*rng.Float64())
			fresh.u[slot*dim+1] = st.u[s*dim+1]
		}
		m.learn(st, &fresh)
	}
	for k, c := range m.correlation {
		if c/m.weight < 0.7 {
			t.Errorf("correlation %.2f in dimension %d for walkers that stay, want about 1", c/m.weight, k)
		}
	}
}

func TestLiftDoesNotAllocate(t *testing.T) {
	f := frame{wall: []wall{lowWall, noWall, highWall}}
	u, v := []float64{0.1, 0.2, 0.3}, make([]float64, 3)
	if a := testing.AllocsPerRun(100, func() { f.into(u, v); f.outOf(v, u) }); a != 0 {
		t.Errorf("%g allocations, want 0", a)
	}
}

// BenchmarkLift is what a bound pays for the decision, with every dimension a
// candidate.
func BenchmarkLift(b *testing.B) {
	for _, dim := range []int{8, 40} {
		b.Run(fmt.Sprint(dim), func(b *testing.B) {
			rng := random.New(1, "lift").Rand
			points, reflective := make([]float64, 1000*dim), make([]bool, dim)
			for i := range points {
				points[i] = 0.05 * math.Abs(rng.NormFloat64())
			}
			for k := range reflective {
				reflective[k] = true
			}
			for b.Loop() {
				f := newFrame(points, dim, nil)
				f.lift(points, dim, reflective, rng)
			}
		})
	}
}
