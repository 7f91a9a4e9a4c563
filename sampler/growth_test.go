package sampler

import (
	"context"
	"math"
	"slices"
	"testing"

	"knell/internal/random"
)

// What the ranges hold must be what the outcome says by itself: the posterior
// probability, the volume, the variance of ln Z.
func TestRangesMakeUpTheOutcome(t *testing.T) {
	for name, p := range map[string]*problem{"gaussian": gaussian(3, 0.5), "half plateau": plateau(), "mostly zero": hollow()} {
		o, err := Run(context.Background(), p.target, Settings{LivePoints: 400, Seed: 4})
		if err != nil {
			t.Fatal(err)
		}
		g := o.ranges(growthStep)
		var compression float64
		for _, n := range o.LiveCount {
			compression += 1 / float64(n)
		}
		// Sums of up to 1e4 terms in another order.
		if got := sum(g.step); math.Abs(got-compression) > 1e-9*compression {
			t.Errorf("%s: compression %g, want %g", name, got, compression)
		}
		if got := sum(g.mass); math.Abs(got-1) > 1e-9 {
			t.Errorf("%s: probability %g, want 1", name, got)
		}
		if got := 1 / sum(g.squares); math.Abs(got-o.EffectiveSamples) > 1e-9*got {
			t.Errorf("%s: effective samples %g, want %g", name, got, o.EffectiveSamples)
		}
		if !slices.IsSorted(g.level) || len(slices.Compact(slices.Clone(g.level))) != len(g.level) {
			t.Errorf("%s: levels do not rise", name)
		}
		// To first order in the shrinkages; the simulated error is good to 6 % by its
		// 160 histories. The volume of the first draws is not among the ranges.
		if got := math.Sqrt(sum(g.variance) + o.zeroVariance()); math.Abs(got/o.LogEvidenceError-1) > 0.12 {
			t.Errorf("%s: error %g by the ranges, %g by simulation", name, got, o.LogEvidenceError)
		}
	}
}

// Grown runs must be as right as others: evidence, its error, the posterior and
// the insertion ranks, whichever target made them grow.
func TestGrownRunsAreRight(t *testing.T) {
	const n, sigmas = 24, 4
	for name, c := range map[string]struct {
		p *problem
		s Settings
	}{
		"for the evidence":   {gaussian(3, 0.5), Settings{LivePoints: 60, EvidenceError: 0.15}},
		"for the posterior":  {gaussian(3, 0.5), Settings{LivePoints: 60, PosteriorSamples: 1500}},
		"for both":           {gaussian(2, 0.9), Settings{LivePoints: 60, EvidenceError: 0.2, PosteriorSamples: 1000}},
		"by slices":          {gaussian(3, 0.5), Settings{LivePoints: 60, PosteriorSamples: 600, force: fromSlices}},
		"on a half plateau":  {plateau(), Settings{LivePoints: 60, EvidenceError: 0.08, PosteriorSamples: 400}},
		"where most is zero": {hollow(), Settings{LivePoints: 60, EvidenceError: 0.15, PosteriorSamples: 400}},
	} {
		t.Run(name, func(t *testing.T) {
			t.Parallel()
			var z, ranks []float64
			for seed := range uint64(n) {
				s := c.s
				s.Seed, s.Periodic = 100+seed, c.p.periodic
				o, err := Run(context.Background(), c.p.target, s)
				if err != nil {
					t.Fatal(err)
				}
				checkWeights(t, o)
				if !s.reached(o) {
					t.Errorf("seed %d: error %g, %g samples, warnings %q", seed, o.LogEvidenceError, o.EffectiveSamples, o.Warnings)
				}
				z = append(z, (o.LogEvidence-c.p.want)/o.LogEvidenceError)
				ranks = append(ranks, o.InsertionRankP)
			}
			tally{z: z}.check(t, c.p, sigmas)
			if p := uniformP(ranks); p < 1e-3 {
				t.Errorf("insertion ranks: p = %.2g over all runs", p)
			}
		})
	}
}

// At equal effective size, a run that grows where the posterior is needs a third
// of the likelihood calls of one that has as many live points everywhere.
func TestGrowthForThePosteriorSaves(t *testing.T) {
	p := gaussian(8, 0.95)
	run := func(s Settings) *Outcome {
		s.Seed = 3
		o, err := Run(context.Background(), p.target, s)
		if err != nil {
			t.Fatal(err)
		}
		return o
	}
	const wanted = 8000
	grown := run(Settings{LivePoints: 200, PosteriorSamples: wanted})
	static := run(Settings{LivePoints: 1100})
	saved := float64(static.Calls) / static.EffectiveSamples / (float64(grown.Calls) / grown.EffectiveSamples)
	t.Logf("%.0f samples with %d calls, static %.0f with %d: %.2f times fewer calls per sample",
		grown.EffectiveSamples, grown.Calls, static.EffectiveSamples, static.Calls, saved)
	if grown.EffectiveSamples < wanted || grown.EffectiveSamples > 1.2*wanted {
		t.Errorf("%g effective samples, want %d and not many more", grown.EffectiveSamples, wanted)
	}
	if saved < 2 {
		t.Errorf("%.2f times fewer calls, want at least 2", saved)
	}
}

// Companions are the points that are live at a level, by the definition.
func TestCompanionsAreTheLivePoints(t *testing.T) {
	o, err := Run(context.Background(), plateau().target, Settings{LivePoints: 60, Seed: 2, PosteriorSamples: 300})
	if err != nil {
		t.Fatal(err)
	}
	c := newCompanions([]*Outcome{o, o}, random.New(3, "lots"))
	rng := random.New(1, "levels")
	var levels []float64
	for range 40 {
		levels = append(levels, o.LogLikelihood[rng.IntN(len(o.LogLikelihood))])
	}
	slices.Sort(levels)
	for _, level := range levels {
		var want []float64
		for i, l := range o.LogLikelihood {
			if o.Birth[i] <= level && l > level {
				want = append(want, l)
			}
		}
		_, got := c.above(level, 1_000_000, nil, nil)
		if !slices.Equal(got, append(slices.Clone(want), want...)) {
			t.Fatalf("above %g: %d companions, want twice %d", level, len(got), len(want))
		}
		// By lot, 20 of them ± √20.
		u, few := c.above(level, 20, nil, nil)
		if all := 2 * len(want); len(few) > 20+5*5 || all >= 20 && len(few) == 0 || all < 20 && len(few) != all || len(u) != len(few)*o.dim() {
			t.Fatalf("above %g: thinned to %d of %d, want about 20", level, len(few), all)
		}
	}
}

// The limit of calls may be reached while several additions are still planned,
// and an addition may find no point of non-zero likelihood: what there is stands.
func TestGrowthThatIsCutShort(t *testing.T) {
	for _, most := range []int64{3000, 20000, 30000} {
		o, err := Run(context.Background(), gaussian(3, 0.5).target, Settings{LivePoints: 64, PosteriorSamples: 20000, MaxCalls: most})
		if err != nil {
			t.Fatal(err)
		}
		// Four batches of a sixteenth of the live points may be in flight.
		if o.Status != CallLimit || o.Partial && most > 3000 || o.Verdict == "sound" || o.Calls > 2*most {
			t.Errorf("limit %d: status %v, partial %v, %d calls, verdict %q", most, o.Status, o.Partial, o.Calls, o.Verdict)
		}
		checkWeights(t, o)
	}
	rare := &problem{dim: 2, logL: func(u []float64) float64 {
		if u[0] > 0.02 || u[1] > 0.01 { // 2e-4 of the prior is left
			return math.Inf(-1)
		}
		return -1e4 * (u[0]*u[0] + u[1]*u[1])
	}}
	for seed := range uint64(6) {
		s := Settings{LivePoints: 32, Seed: seed}
		base, err := Run(context.Background(), rare.target, s)
		if err != nil {
			t.Fatal(err)
		}
		s.EvidenceError = 0.9999 * base.LogEvidenceError
		if _, err := Run(context.Background(), rare.target, s); err != nil {
			t.Errorf("seed %d: a finished run is lost: %v", seed, err)
		}
	}
}
