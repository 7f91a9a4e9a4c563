package sampler

import (
	"math"
	"testing"

	"knell/internal/random"
)

func TestKolmogorovTail(t *testing.T) {
	// want: the usual critical values of the limit law, 5 and 1 percent, from
	// memory, and the theta-function form at small x: the lower tail is
	// (√2π/x) Σ exp(-(2j-1)² π²/8x²), one term of which is enough at x = 0.4.
	low := math.Sqrt(2*math.Pi) / 0.4 * math.Exp(-math.Pi*math.Pi/(8*0.16))
	for _, tc := range []struct{ x, want, tol float64 }{
		{1.3580986, 0.05, 1e-7},
		{1.6276236, 0.01, 1e-7},
		{0.4, 1 - low, 1e-12},
		{0, 1, 0},
		{30, 0, 0},
	} {
		if got := kolmogorovTail(tc.x); math.Abs(got-tc.want) > tc.tol {
			t.Errorf("kolmogorovTail(%g) = %.9g, want %.9g", tc.x, got, tc.want)
		}
	}
}

// insert plays batches of k of n points whose replacements are drawn as given
// from the volume above the threshold, and returns the ranks.
func playRanks(seed uint64, n, k, batches int, draw func(u float64) float64) []float64 {
	rng := random.New(seed, "ranks")
	live := make([]float64, n) // ranks need only an order: u is uniform above
	for i := range live {
		live[i] = rng.Float64()
	}
	var r ranks
	for range batches {
		r.begin(live)
		threshold := r.order[k-1]
		var next []float64
		for _, l := range live {
			if l > threshold {
				next = append(next, l)
			}
		}
		r.begin(next)
		for range k {
			l := threshold + (1-threshold)*draw(rng.Float64())
			r.enter(l, rng.Rand)
			next = append(next, l)
		}
		live = next
	}
	return r.u
}

func TestFairRanksAreUniform(t *testing.T) {
	// p-values of independent fair plays must be uniform themselves.
	var p, block []float64
	for seed := range uint64(200) {
		u := playRanks(seed, 64, 8, 40, func(u float64) float64 { return u })
		p = append(p, uniformP(u))
		block = append(block, blockP(u, 64))
	}
	// 1e-3: the seeds are fixed, so this fails for one choice in a thousand.
	if got := uniformP(p); got < 1e-3 {
		t.Errorf("p-values of fair ranks are not uniform: p = %g", got)
	}
	if got := uniformP(block); got < 1e-3 {
		t.Errorf("p-values of blocks of fair ranks are not uniform: p = %g", got)
	}
}

func TestUnfairRanksAreSeen(t *testing.T) {
	// Draws that miss the outer 5 % of the volume.
	u := playRanks(1, 500, 31, 300, func(u float64) float64 { return 0.05 + 0.95*u })
	if p := uniformP(u); p > 1e-6 {
		t.Errorf("p = %g for draws that miss a twentieth of the volume", p)
	}
	// The same in a tenth of the run only is for the blocks to see.
	i := 0
	u = playRanks(1, 500, 31, 300, func(u float64) float64 {
		if i++; i/31 >= 150 && i/31 < 180 {
			return 0.15 + 0.85*u
		}
		return u
	})
	if p := blockP(u, 500); p > 1e-3 {
		t.Errorf("block p = %g for a bad tenth of a run", p)
	}
}

func TestRanksOfEqualsAreRandom(t *testing.T) {
	rng := random.New(1, "ties")
	var r ranks
	for range 2000 {
		r.begin([]float64{1, 1, 1, 1, 1})
		r.enter(1, rng.Rand)
	}
	if p := uniformP(r.u); p < 1e-3 {
		t.Errorf("ranks among equals are not uniform: p = %g", p)
	}
}
