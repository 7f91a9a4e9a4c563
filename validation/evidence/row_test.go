package main

import (
	"errors"
	"math"
	"strings"
	"testing"

	"knell/internal/random"
	"knell/sampler"
	"knell/validation/trials"
)

// madeRuns are runs of truth 5 and error 0.2 whose z is shift + wide times a unit
// normal, whose ranks have the p-value u^power and whose shrinkages are stretch
// times a unit exponential.
func madeRuns(n int, shift, wide, power, stretch float64) []oneRun {
	rng := random.New(3, "made runs")
	runs := make([]oneRun, n)
	for i := range runs {
		runs[i] = oneRun{
			finished: true, converged: true, sound: true,
			logZ: 5 + 0.2*(shift+wide*rng.NormFloat64()), logZError: 0.2,
			calls: 3000, points: 1000, seconds: 0.5,
			rankP:  math.Pow(rng.Float64(), power),
			phases: []sampler.Phase{{Name: "prior", Calls: 1000, Points: 600}, {Name: "slices", Calls: 2000, Points: 400}},
		}
		for range 200 {
			runs[i].shrinkages = append(runs[i].shrinkages, stretch*rng.ExpFloat64())
		}
	}
	return runs
}

func TestRowIsJudged(t *testing.T) {
	c := trials.Case{Choice: trials.Choice{Name: "made", Dim: 3}, Truth: 5, Source: "made up"}
	for _, tc := range []struct {
		why   string
		runs  []oneRun
		fault string // "" for none
	}{
		{"as it should be", madeRuns(400, 0, 1, 1, 1), ""},
		{"few but as they should be", madeRuns(10, 0, 1, 1, 1), ""},
		{"a bias of a third of an error", madeRuns(400, 0.33, 1, 1, 1), "mean z"},
		{"errors quoted too small", madeRuns(400, 0, 1.4, 1, 1), "deviation"},
		{"errors quoted too large", madeRuns(400, 0, 0.7, 1, 1), "deviation"},
		{"few, errors quoted at half", madeRuns(12, 0, 2.5, 1, 1), "deviation"},
		{"ranks that fail too often", madeRuns(100, 0, 1, 2, 1), "ranks"},
		{"volumes that shrink too fast", madeRuns(100, 0, 1, 1, 1.05), "shrinkages"},
		{"one run to judge by", madeRuns(1, 0, 1, 1, 1), "judge by: 1"},
		{"no run", nil, "judge by: 0"},
	} {
		r := newRow(c, options{}, tc.runs)
		faults := strings.Join(r.Faults, "; ")
		if r.Passed != (tc.fault == "") || !strings.Contains(faults, tc.fault) {
			t.Errorf("%s: passed %t with %q, want %q", tc.why, r.Passed, faults, tc.fault)
		}
	}
}

func TestRowCountsWork(t *testing.T) {
	runs := madeRuns(20, 0, 1, 1, 1)
	runs[3].finished = false
	runs[4].converged = false
	runs[5].err = errors.New("no likelihood")
	runs[6].sound = false
	r := newRow(trials.Case{Choice: trials.Choice{Name: "made", Dim: 3}, Truth: 5}, options{}, runs)
	if r.Seeds != 19 || r.Doubtful != 1 || len(r.Faults) != 2 {
		t.Errorf("%d seeds, %d doubtful, faults %q; want 19, 1 and two", r.Seeds, r.Doubtful, r.Faults)
	}
	if r.Calls != 3000 || r.IdealRatio != 3 || r.Seconds != 0.5 {
		t.Errorf("%g calls, ratio %g, %g s; want 3000, 3, 0.5", r.Calls, r.IdealRatio, r.Seconds)
	}
	// 17 runs are left: finished, converged, without an error.
	if len(r.Drawing) != 2 || r.Drawing[1] != (drawing{"slices", 17 * 2000, 17 * 400}) {
		t.Errorf("drawing %v, want the sums of 17 runs", r.Drawing)
	}
	if text := drawn(r); text != "prior 60% 1.7, slices 40% 5.0" {
		t.Errorf("drawn by %q", text)
	}
}
