package main

import (
	"errors"
	"math"
	"strings"
	"testing"

	"knell/internal/random"
	"knell/validation/trials"
)

// madeRuns are n grown and n static runs of truth 5. The grown ones take grownCalls,
// reach the goal, and are shift errors off.
func madeRuns(use string, n int, grownCalls int64, shift float64) []oneRun {
	rng := random.New(4, "made runs", uint64(n))
	p := plan{goal: 2000, static: 800}
	if use == evidenceUse {
		p.goal = 0.1
	}
	runs := make([]oneRun, 2*n)
	for i := range runs {
		z := rng.NormFloat64()
		runs[i] = oneRun{
			finished: true, converged: true, sound: true, plan: p,
			calls: 40_000, logZError: 0.1, samples: 2000, rankP: rng.Float64(),
			meanZ: rng.NormFloat64(), varianceZ: rng.NormFloat64(),
		}
		if grows(i) {
			runs[i].calls = grownCalls
			z += shift
		}
		runs[i].calls += int64(1000 * rng.NormFloat64())
		runs[i].logZ = 5 + 0.1*z
	}
	return runs
}

func made(use string) job {
	return job{trials.Case{Choice: trials.Choice{Name: "made", Dim: 3}, Truth: 5, Source: "made up"}, use}
}

func TestRowCompares(t *testing.T) {
	for _, tc := range []struct {
		why       string
		use       string
		runs      []oneRun
		ratio, by float64
		fault     string // "" for none
	}{
		{"4 times fewer calls", posteriorUse, madeRuns(posteriorUse, 100, 10_000, 0), 4, 0.1, ""},
		{"2 times fewer calls", posteriorUse, madeRuns(posteriorUse, 100, 20_000, 0), 2, 0.05, "times fewer calls per sample, want 3"},
		{"half the calls", evidenceUse, madeRuns(evidenceUse, 100, 20_000, 0), 0.5, 0.01, ""},
		{"as many calls but for chance", evidenceUse, madeRuns(evidenceUse, 100, 40_000, 0), 1, 0.02, ""},
		{"a tenth more calls", evidenceUse, madeRuns(evidenceUse, 100, 44_000, 0), 1.1, 0.02, "calls × error² of a static run"},
		{"grown runs that are off", evidenceUse, madeRuns(evidenceUse, 100, 20_000, 0.5), 0.5, 0.01, "ln Z: mean z +0."},
		{"nothing finished", evidenceUse, make([]oneRun, 40), math.NaN(), 0, "judge by: 0"},
	} {
		r := newRow(made(tc.use), options{live: 200}, tc.runs)
		faults := strings.Join(r.Faults, "; ")
		if r.Passed != (tc.fault == "") || !strings.Contains(faults, tc.fault) {
			t.Errorf("%s: passed %t with %q, want %q", tc.why, r.Passed, faults, tc.fault)
		}
		if got := float64(r.Ratio); !(math.Abs(got-tc.ratio) <= tc.by) && !(math.IsNaN(got) && math.IsNaN(tc.ratio)) {
			t.Errorf("%s: ratio %.3f, want %g ± %g", tc.why, got, tc.ratio, tc.by)
		}
	}
}

// The error of a ratio of two means: relative errors of 1000/40000 and 1000/10000 over
// √100 each, in quadrature.
func TestErrorOfTheRatio(t *testing.T) {
	r := newRow(made(posteriorUse), options{}, madeRuns(posteriorUse, 100, 10_000, 0))
	want := 4 * math.Hypot(0.0025, 0.01)
	if got := float64(r.RatioError); math.Abs(got-want) > 0.3*want { // 4 standard errors of a deviation of 100
		t.Errorf("error %.4f, want %.4f", got, want)
	}
}

func TestRowSaysWhatWentWrong(t *testing.T) {
	runs := madeRuns(posteriorUse, 20, 10_000, 0)
	runs[0].err = errors.New("no likelihood")
	runs[3].converged = false
	runs[4].samples = 1999
	runs[6].sound = false
	for i := range runs {
		if grows(i) {
			runs[i].varianceZ += 2
		}
	}
	r := newRow(made(posteriorUse), options{live: 200}, runs)
	all := strings.Join(r.Faults, "\n")
	for _, s := range []string{"grown run 0 failed: no likelihood", "static run 1 did not converge", "fell short of the goal: 1", "the variance: mean z +"} {
		if !strings.Contains(all, s) {
			t.Errorf("no %q in\n%s", s, all)
		}
	}
	if len(r.Faults) != 4 || r.Doubtful != 1 || r.Seeds != 19 || r.Grown.LivePoints != 200 || r.Static.LivePoints != 800 {
		t.Errorf("%d faults, %d doubtful, %d seeds, %d and %d live points; want 4, 1, 19, 200 and 800",
			len(r.Faults), r.Doubtful, r.Seeds, r.Grown.LivePoints, r.Static.LivePoints)
	}
}
