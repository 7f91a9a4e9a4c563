package sampler

import (
	"testing"

	"knell/internal/random"
)

// Walkers that keep a given correlation with their start must make the number
// of steps rise; walkers that forget it must let it fall back to the least.
func TestStepsFollowTheMemory(t *testing.T) {
	const dim, n, least = 3, 400, 12
	rng := random.New(1, "memory")
	st := &stage{l: make([]float64, n)}
	for range n * dim {
		st.u = append(st.u, 0.5+0.05*rng.NormFloat64())
	}
	m := newMemory(dim, least)
	batch := func(keep float64) {
		var fresh slots
		fresh.resize(60, dim)
		for slot := range fresh.start {
			s := rng.IntN(n)
			fresh.start[slot] = s
			for k := range dim {
				// Only the last coordinate remembers.
				x := 0.05 * rng.NormFloat64()
				if k == dim-1 {
					x = keep*(st.u[s*dim+k]-0.5) + (1-keep)*x
				}
				fresh.u[slot*dim+k] = 0.5 + x
			}
		}
		m.learn(st, &fresh)
	}
	for range 60 {
		batch(0)
	}
	if m.steps > 2*least {
		t.Errorf("%g steps for walkers without memory, want about %d", m.steps, least)
	}
	for range 60 {
		batch(0.8)
	}
	// 0.8 is the correlation: variances are 1, covariance 0.8. The running mean
	// of 60 draws at rate 0.1 has sd √(0.1/2)/√60 = 0.03.
	if m.steps != mostSteps*least || m.worst() < 0.65 || m.worst() > 0.95 || m.peak < doubtfulMemory {
		t.Errorf("%g steps, correlation %.2f for walkers of correlation 0.8", m.steps, m.worst())
	}
	for range 200 {
		batch(0)
	}
	if m.steps > 2*least {
		t.Errorf("%g steps after the memory is gone, want about %d", m.steps, least)
	}
}

func TestOverlappingEllipsoidsAreOneMode(t *testing.T) {
	for _, tc := range []struct {
		region string
		modes  int
	}{{"ring", 1}, {"two discs", 2}} {
		for _, g := range regions() {
			if g.name != tc.region {
				continue
			}
			b := g.bound(1, g.draw(random.New(1, g.name).Rand, 500))
			seen := map[int]bool{}
			for _, m := range b.mode {
				seen[m] = true
			}
			if len(seen) != tc.modes {
				t.Errorf("%s: %d modes among %d ellipsoids, want %d", g.name, len(seen), len(b.ellipsoids), tc.modes)
			}
		}
	}
}
