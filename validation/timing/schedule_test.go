package main

import (
	"math"
	"testing"

	"knell/internal/random"
)

// fixed gives the times of the batches of a list, then ones.
func fixed(batches ...[]float64) func([]float64) {
	return func(slot []float64) {
		for i := range slot {
			slot[i] = 1
		}
		if len(batches) > 0 {
			copy(slot, batches[0])
			batches = batches[1:]
		}
	}
}

// Cases that can be played by hand on squared paper.
func TestSchedulesByHand(t *testing.T) {
	for _, tc := range []struct {
		why                    string
		inFlight               int
		own                    float64
		workers, size, batches int
		times                  func([]float64)
		busy, end              float64
	}{
		{"as many slots as workers", 1, 0, 8, 8, 10, fixed(), 80, 10},
		{"as many slots in the air as workers: the first 4 batches at once, then 4 by 4", 4, 0, 8, 2, 20, fixed(), 40, 5},
		{"one slot more than workers, one batch at a time: each takes two rounds", 1, 0, 8, 9, 10, fixed(), 90, 20},
		{"the same with 4 in the air: 90 slots on 8 workers fill up but the last round", 4, 0, 8, 9, 10, fixed(), 90, 12},
		{"half as many slots in the air as workers", 4, 0, 8, 1, 20, fixed(), 20, 5},
		{"one slow call, one batch at a time: 4 of one worker lost", 1, 0, 2, 2, 4, fixed([]float64{5, 1}), 12, 8},
		{"one slow call, 4 in the air: the other worker does 4 of the 6 slots, both the last 2", 4, 0, 2, 2, 4, fixed([]float64{5, 1}), 12, 6},
		{"a call slower than all that is in the air: the other worker does 7, waits until 50, then both do 6 more",
			4, 0, 2, 2, 7, fixed([]float64{50, 1}), 63, 53},
		{"a slow call in a later batch holds up no earlier one", 2, 0, 2, 2, 3, fixed(nil, []float64{1, 3}), 8, 4},
		{"own work between batches, workers idle meanwhile", 1, 0.5, 2, 2, 4, fixed(), 8, 6},
		{"own work beside the batches in the air", 2, 0.5, 2, 2, 4, fixed(), 8, 4.5},
		{"own work that is all there is time for", 4, 3, 4, 4, 5, fixed(), 20, 16},
	} {
		got := schedule{32, tc.inFlight, tc.own}.play(tc.workers, tc.size, tc.batches, tc.times)
		if want := tc.busy / (float64(tc.workers) * tc.end); math.Abs(got-want) > 1e-12 {
			t.Errorf("%s: efficiency %.6f, want %.6f", tc.why, got, want)
		}
	}
}

func TestBatchSizes(t *testing.T) {
	for _, tc := range []struct{ live, want int }{{500, 15}, {2000, 62}, {32, 1}, {20, 1}} {
		if got := (schedule{share: 32}).size(tc.live); got != tc.want {
			t.Errorf("%d live points: %d slots, want %d", tc.live, got, tc.want)
		}
	}
}

// What one slow call per batch costs is bounded: it holds a batch up for slow at most,
// and 4 batches are in the air, so that no four batches take longer than a slow call
// and their own work together, in turn.
func TestIdleIsBoundedWithOneSlowCallPerBatch(t *testing.T) {
	const workers, size, batches = 16, 62, 320
	rng := random.New(1, "test").Rand
	e := schedule{32, inFlight, 0}.play(workers, size, batches, batchTimes(rng, slot{1, true}, laws()[3]))
	work := float64(size + slow - 1)
	elapsed := batches * work / (workers * e)
	if most := batches / inFlight * (slow + inFlight*work/workers); elapsed > most {
		t.Errorf("%.0f elapsed, want %.0f at most", elapsed, most)
	}
	one := schedule{16, 1, 0}.play(workers, 2*size, batches/2, batchTimes(rng, slot{1, true}, laws()[3]))
	if e < 2*one {
		t.Errorf("efficiency %.3f, want twice the %.3f of one batch at a time or more", e, one)
	}
}

// The mean calls of a slot and the mean times are what their names say, within 5
// standard errors.
func TestSlotTimes(t *testing.T) {
	const n = 20_000
	for _, tc := range []struct {
		s              slot
		law            int
		mean, variance float64
	}{
		{slot{3, true}, 0, 3, 0},
		{slot{1, true}, 0, 1, 0},
		{slot{3, false}, 0, 3, 6},                                     // geometric: m² - m
		{slot{20, false}, 0, 20, 380},                                 // the same
		{slot{20, true}, 1, 20, 20},                                   // 20 unit exponentials
		{slot{3, false}, 1, 3, 9},                                     // a geometric sum of exponentials is one: m²
		{slot{20, true}, 2, 20 + 20*0.49, 20 * 49 * 49 * 0.01 * 0.99}, // binomial
		{slot{20, true}, 3, 20 + 49.0/10, 49 * 49 * 0.1 * 0.9},        // one of 10 slots
	} {
		rng := random.New(2, "test", uint64(tc.s.calls), uint64(tc.law)).Rand
		times := batchTimes(rng, tc.s, laws()[tc.law])
		batch := make([]float64, 10)
		var sum, square float64
		for range n / len(batch) {
			times(batch)
			for _, x := range batch {
				sum += x
				square += (x - tc.mean) * (x - tc.mean)
			}
		}
		mean, variance := sum/n, square/n
		if math.Abs(mean-tc.mean) > 5*math.Sqrt(tc.variance/n) {
			t.Errorf("%v, %s: mean %.3f, want %.3f", tc.s, laws()[tc.law].name, mean, tc.mean)
		}
		// The kurtosis of none of them is above 60 (the rare slow calls), so that the
		// relative error of the variance is at most √(60/n) = 5.5 %, most often a fifth.
		if math.Abs(variance-tc.variance) > 0.25*tc.variance {
			t.Errorf("%v, %s: variance %.3f, want %.3f", tc.s, laws()[tc.law].name, variance, tc.variance)
		}
	}
}
