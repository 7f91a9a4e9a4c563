package main

import (
	"math"
	"testing"

	"knell/internal/random"
)

// want: n ln(1 + k/n), by hand: 500 ln 1.032 = 15.749, 500 ln 1.128 = 60.223, 500 ln 2 =
// 346.57.
func TestLawOfOneThreshold(t *testing.T) {
	for _, tc := range []struct {
		workers int
		want    float64
	}{{16, 15.749}, {64, 60.223}, {500, 346.574}} {
		if got := float64(tc.workers) * oneThreshold(500, tc.workers, slot{1, true}); math.Abs(got-tc.want) > 0.001 {
			t.Errorf("%d workers: %.3f points by the law, want %.3f", tc.workers, got, tc.want)
		}
		// Playing it has its own noise: the accepted of a round scatter by less than
		// √k, and the law is of the order 1/n off, as it is for many points.
		const rounds = 2000
		got := playThreshold(random.New(3, "test", uint64(tc.workers)).Rand, 500, tc.workers, rounds)
		most := 4*math.Sqrt(float64(tc.workers)/rounds) + tc.want/500
		if math.Abs(got-tc.want) > most {
			t.Errorf("%d workers: %.3f points as played, want %.3f ± %.3f", tc.workers, got, tc.want, most)
		}
	}
	// Rejection that takes m calls per point is k/m workers that need one.
	if got, want := oneThreshold(500, 60, slot{3, false}), oneThreshold(500, 20, slot{1, true}); math.Abs(got-want) > 1e-12 {
		t.Errorf("60 workers at 3 calls: %.4f, want %.4f as of 20 at one", got, want)
	}
}
