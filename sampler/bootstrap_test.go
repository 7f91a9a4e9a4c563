package sampler

import (
	"context"
	"math"
	"slices"
	"testing"
)

// Over runs, resampled strands give the spread of ln Z that simulated shrinkage
// gives and that there is, and the tension is about a unit normal.
func TestBootstrapErrorIsCalibrated(t *testing.T) {
	const n, sigmas = 20, 4
	var z, tension []float64
	phaseP := map[string][]float64{}
	for _, p := range []*problem{gaussian(3, 0.5), twoModes(3, 0.03), plateau(), hollow()} {
		var own, linear []float64
		for seed := range uint64(n) {
			o, err := Run(context.Background(), p.target, Settings{Seed: 70 + seed, LivePoints: 120})
			if err != nil {
				t.Fatal(err)
			}
			own = append(own, (o.LogEvidence-p.want)/o.BootstrapError)
			tension = append(tension, o.ErrorTension)
			var ranks int64
			for _, ph := range o.Phases {
				ranks += ph.Ranks
				if ph.Ranks >= 100 {
					phaseP[ph.Name] = append(phaseP[ph.Name], ph.InsertionRankP)
				}
			}
			if ranks != int64(len(o.ranks)) {
				t.Errorf("%s: %d ranks in the phases, %d in all", p.name, ranks, len(o.ranks))
			}
			var sum, two float64
			for _, x := range o.strandInfluence() {
				sum += x
				two += x * x
			}
			// 1e4 terms of order one and rounding 2⁻⁵³ cancel.
			if math.Abs(sum) > 1e-11 {
				t.Errorf("%s: influences of the strands sum to %g, want 0", p.name, sum)
			}
			if _, b := o.priorShrinkage().a, o.priorShrinkage().b; b == 0 {
				linear = append(linear, o.BootstrapError/math.Sqrt(two))
			}
		}
		mean, sd := meanSD(own)
		t.Logf("%-12s (ln Z - truth)/bootstrap error: mean %+.2f, sd %.2f", p.name, mean, sd)
		tally{z: own}.check(t, &problem{name: p.name + " by bootstrap"}, sigmas)
		z = append(z, own...)
		// The first-order error is that of the bootstrap but for terms of
		// second order in an error of 0.17 nat, and the bootstrap's own 5 %/√20.
		if mean, _ := meanSD(linear); len(linear) > 0 && math.Abs(mean-1) > 0.05 {
			t.Errorf("%s: bootstrap error is %.3f of the first-order one", p.name, mean)
		}
	}
	tally{z: z}.check(t, &problem{name: "all problems by bootstrap"}, sigmas)
	for _, name := range methodNames[1:] {
		if p := phaseP[name]; len(p) > 0 {
			t.Logf("insertion ranks of %d phases of %s: KS p of their p-values %.3f", len(p), name, uniformP(p))
			if uniformP(p) < 1e-3 {
				t.Errorf("p-values of the ranks of %s are not uniform: p = %.2g", name, uniformP(p))
			}
		}
	}
	mean, sd := meanSD(tension)
	t.Logf("tension of the two errors over %d runs: mean %+.2f, sd %.2f, largest %.2f", len(tension), mean, sd, max(slices.Max(tension), -slices.Min(tension)))
	// A shift of half a standard error would let 2e-4 of runs beyond 4; the
	// allowance must neither be too small nor much too large.
	if math.Abs(mean) > 0.5 || sd > 1.3 || sd < 0.6 {
		t.Errorf("tension has mean %.2f and sd %.2f over %d runs, want about 0 and 1", mean, sd, len(tension))
	}
}

// A run that has lost a mode is merged with one that has not: their evidences
// tell, where the strands take it for chance.
func TestRunsThatDisagreeAreSeen(t *testing.T) {
	both := twoModes(3, 0.03)
	blind := &problem{dim: 3, logL: func(u []float64) float64 {
		l := both.logL(u)
		if u[0]+u[1]+u[2] > 1.9 { // the mode at 0.8, of 0.7 of the evidence
			return l - 1e3
		}
		return l
	}}
	var runs []*Outcome
	for i, p := range []*problem{both, blind, both} {
		o, err := Run(context.Background(), p.target, Settings{Seed: uint64(i), LivePoints: 200})
		if err != nil {
			t.Fatal(err)
		}
		if o.Verdict != "sound" || o.RunsP != 1 {
			t.Fatalf("run %d: %s, p = %g", i, o.Verdict, o.RunsP)
		}
		runs = append(runs, o)
	}
	m, err := Merge(runs[0], runs[1])
	if err != nil {
		t.Fatal(err)
	}
	// 0 and ln 0.3 with errors of 0.13: more than 6 standard errors apart.
	if m.RunsP > 1e-6 || m.Verdict == "sound" || len(m.Warnings) != 1 {
		t.Errorf("p = %g, verdict %q, warnings %q", m.RunsP, m.Verdict, m.Warnings)
	}
	again, err := Merge(m, runs[2])
	if err != nil {
		t.Fatal(err)
	}
	if again.RunsP > 1e-6 || again.Verdict == "sound" {
		t.Errorf("after one more merger p = %g, verdict %q", again.RunsP, again.Verdict)
	}
	good, err := Merge(runs[0], runs[2])
	if err != nil {
		t.Fatal(err)
	}
	if good.RunsP < doubtfulP || good.Verdict != "sound" {
		t.Errorf("of two good runs p = %g, verdict %q", good.RunsP, good.Verdict)
	}
}

// A likelihood that changed between runs makes strands of two kinds, further
// apart than shrinkage can put them.
func TestBootstrapSeesStrandsOfTwoKinds(t *testing.T) {
	a := syntheticRun(500, 10_000)
	b := syntheticRun(500, 10_000)
	for i := range b.LogLikelihood {
		b.LogLikelihood[i] += 30 + 1e-9
		b.Birth[i] += 30 + 1e-9
		b.Points[i] = []float64{1 - b.Points[i][0]}
	}
	m, err := Merge(a, b)
	if err != nil {
		t.Fatal(err)
	}
	if m.ErrorTension < doubtfulTension || m.Verdict == "sound" {
		t.Errorf("errors %.3f and %.3f, tension %.2f, verdict %q", m.LogEvidenceError, m.BootstrapError, m.ErrorTension, m.Verdict)
	}
}

func TestBootstrapBitsDoNotDependOnWorkers(t *testing.T) {
	p := hollow()
	var want *Outcome
	for _, workers := range []int{1, 2, 7} {
		o, err := Run(context.Background(), p.target, Settings{Seed: 3, LivePoints: 80, EvidenceError: 0.2, Workers: workers})
		if err != nil {
			t.Fatal(err)
		}
		if workers == 1 {
			want = o
			if o.LivePoints <= 80 || o.BootstrapError == 0 {
				t.Fatalf("%d live points, bootstrap error %g", o.LivePoints, o.BootstrapError)
			}
			continue
		}
		if o.BootstrapError != want.BootstrapError || o.ErrorTension != want.ErrorTension || !slices.Equal(o.Strand, want.Strand) || !slices.Equal(o.Birth, want.Birth) {
			t.Errorf("%d workers give other strands or another bootstrap error than 1", workers)
		}
	}
}

// syntheticRun is a run of n live points, each removed and replaced by itself,
// of a Gaussian in 4 dimensions, to the given number of dead points.
func syntheticRun(n, points int) *Outcome {
	o := &Outcome{seed: 1, LivePoints: n, Runs: 1, PriorDraws: int64(n)}
	for i := range points {
		birth := math.Inf(-1)
		if i >= n {
			birth = o.LogLikelihood[i-n]
		}
		o.Birth = append(o.Birth, birth)
		o.Strand = append(o.Strand, int32(i%n))
		o.LogLikelihood = append(o.LogLikelihood, -50*math.Exp(-float64(i+1)/float64(n)/2))
		o.LiveCount = append(o.LiveCount, min(n, points-i))
		o.Points = append(o.Points, []float64{float64(i) / float64(points)})
	}
	return o
}

func BenchmarkBootstrapError(b *testing.B) {
	o := syntheticRun(5000, 100_000)
	o.weigh(1)
	b.ReportAllocs()
	for b.Loop() {
		o.bootstrapError(1)
	}
	if o.BootstrapError == 0 {
		b.Fatal("no error")
	}
}
