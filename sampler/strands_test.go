package sampler

import (
	"cmp"
	"context"
	"math"
	"slices"
	"testing"

	"knell/internal/random"
)

// strandRuns are runs with plateaus, zeros, merged runs and strands that begin
// late.
func strandRuns(t *testing.T) map[string]*Outcome {
	t.Helper()
	rare := &problem{dim: 2, logL: func(u []float64) float64 {
		// A share 1e-4 of the prior, of which 160,000 draws find about 16.
		if u[0] > 0.01 || u[1] > 0.01 {
			return math.Inf(-1)
		}
		return -1e4 * (u[0]*u[0] + u[1]*u[1])
	}}
	runs := map[string]*Outcome{}
	for name, tc := range map[string]struct {
		p *problem
		s Settings
	}{
		"gaussian":     {gaussian(3, 0.5), Settings{LivePoints: 100}},
		"grown":        {twoModes(3, 0.03), Settings{LivePoints: 100, EvidenceError: 0.15}},
		"half plateau": {plateau(), Settings{LivePoints: 100}},
		"steps":        {steps(), Settings{LivePoints: 100}},
		"mostly zero":  {hollow(), Settings{LivePoints: 100}},
		"late strands": {rare, Settings{LivePoints: 32}},
	} {
		tc.s.Seed, tc.s.Periodic = 3, tc.p.periodic
		o, err := Run(context.Background(), tc.p.target, tc.s)
		if err != nil {
			t.Fatal(err)
		}
		runs[name] = o
	}
	return runs
}

// Strands taken apart and put together again have the run's live numbers: at
// each dead point, by the definition, as many as strands have a live point there.
func TestStrandsMakeUpTheRun(t *testing.T) {
	for name, o := range strandRuns(t) {
		strands := o.Strands()
		if grown := name == "grown"; len(strands) < o.LivePoints || !grown && len(strands) > o.LivePoints {
			t.Errorf("%s: %d strands of %d live points", name, len(strands), o.LivePoints)
		}
		late := 0
		type interval struct{ birth, death float64 }
		var pool []interval
		for s, points := range strands {
			if !math.IsInf(o.Birth[points[0]], -1) {
				late++
			}
			for j, i := range points {
				if j > 0 && o.Birth[i] < o.LogLikelihood[points[j-1]] {
					t.Fatalf("%s: strand %d has two live points at once", name, s)
				}
				if o.Birth[i] >= o.LogLikelihood[i] {
					t.Fatalf("%s: point %d is not above its birth", name, i)
				}
				pool = append(pool, interval{o.Birth[i], o.LogLikelihood[i]})
			}
		}
		if name != "grown" && (name == "late strands") != (late > 0) {
			t.Errorf("%s: %d strands begin late", name, late)
		}
		// Points that die together are told apart by nothing but their order.
		rng := random.New(1, name)
		rng.Shuffle(len(pool), func(i, j int) { pool[i], pool[j] = pool[j], pool[i] })
		slices.SortStableFunc(pool, func(a, b interval) int { return cmp.Compare(a.death, b.death) })
		for i, at := range pool {
			live := 0
			for _, p := range pool[i:] {
				if p.birth < at.death {
					live++
				}
			}
			if live != o.LiveCount[i] || at.death != o.LogLikelihood[i] {
				t.Fatalf("%s: %d strands live at dead point %d of %d, the run says %d", name, live, i, len(pool), o.LiveCount[i])
			}
		}
		all := make([]int, len(strands))
		for s := range all {
			all[s] = s
		}
		whole, err := o.Subset(all)
		if err != nil {
			t.Fatal(err)
		}
		if !slices.Equal(whole.LiveCount, o.LiveCount) || whole.LogEvidence != o.LogEvidence || whole.BootstrapError != o.BootstrapError {
			t.Errorf("%s: the subset of all strands is not the run", name)
		}
	}
}

// Two halves of one run are runs, and independent.
func TestHalvesAreIndependentRuns(t *testing.T) {
	const n, sigmas = 16, 4
	p := gaussian(3, 0.5)
	var z, apart []float64
	for seed := range uint64(n) {
		o, err := Run(context.Background(), p.target, Settings{Seed: seed, LivePoints: 100})
		if err != nil {
			t.Fatal(err)
		}
		var half [2]*Outcome
		for h := range half {
			var strands []int
			for s := h; s < o.LivePoints; s += 2 {
				strands = append(strands, s)
			}
			if half[h], err = o.Subset(strands); err != nil {
				t.Fatal(err)
			}
			checkWeights(t, half[h])
		}
		z = append(z, half[0].LogEvidence/half[0].LogEvidenceError)
		apart = append(apart, (half[0].LogEvidence-half[1].LogEvidence)/math.Hypot(half[0].LogEvidenceError, half[1].LogEvidenceError))
	}
	tally{z: z}.check(t, &problem{name: "half runs"}, sigmas)
	tally{z: apart}.check(t, &problem{name: "differences of halves"}, sigmas)
}

func TestSubsetRefusesWhatIsNoRun(t *testing.T) {
	o := &Outcome{LogLikelihood: []float64{1, 2, 3}, Birth: []float64{math.Inf(-1), math.Inf(-1), 1}, Strand: []int32{0, 1, 2},
		LiveCount: []int{2, 2, 1}, Points: [][]float64{{0}, {0}, {0}}, LivePoints: 2, PriorDraws: 2}
	for name, strands := range map[string][]int{"none": {}, "twice": {1, 1}, "out of range": {3}, "late only": {2}} {
		if _, err := o.Subset(strands); err == nil {
			t.Errorf("%s: no error", name)
		}
	}
	o.Birth = nil
	if _, err := o.Subset([]int{0}); err == nil || o.Strands() != nil {
		t.Error("strands of an outcome that does not know them")
	}
}
