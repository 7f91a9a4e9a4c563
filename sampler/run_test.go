package sampler

import (
	"context"
	"crypto/sha256"
	"encoding/binary"
	"errors"
	"fmt"
	"math"
	"strings"
	"sync/atomic"
	"testing"
)

// digest covers every number of an outcome that a seed must fix.
func digest(o *Outcome) [32]byte {
	h := sha256.New()
	put := func(v any) { _ = binary.Write(h, binary.LittleEndian, v) }
	for i, p := range o.Points {
		put(p)
		put(int64(o.LiveCount[i]))
	}
	put(o.LogLikelihood)
	put(o.LogWeight)
	put([]float64{o.LogEvidence, o.LogEvidenceError, o.Information, o.EffectiveSamples, o.InsertionRankP})
	put([]int64{o.Calls, int64(o.Iterations)})
	return [32]byte(h.Sum(nil))
}

func TestBitsDoNotDependOnWorkers(t *testing.T) {
	for _, tc := range []struct {
		p *problem
		s Settings
	}{
		{twoModes(3, 0.03), Settings{LivePoints: 150, EvidenceError: 0.15}},
		{ridge(), Settings{LivePoints: 100, force: fromSlices}},
		{hollow(), Settings{LivePoints: 100}},
		{steps(), Settings{LivePoints: 100}},
	} {
		var want [32]byte
		for _, workers := range []int{1, 2, 3, 8} {
			tc.s.Seed, tc.s.Workers, tc.s.Periodic = 11, workers, tc.p.periodic
			o, err := Run(context.Background(), tc.p.target, tc.s)
			if err != nil {
				t.Fatal(err)
			}
			if got := digest(o); workers == 1 {
				want = got
			} else if got != want {
				t.Errorf("%s: %d workers give other bits than 1", tc.p.name, workers)
			}
		}
	}
}

// cut is a target that cancels its context at a call.
type cut struct {
	Target
	calls  *atomic.Int64
	at     int64
	cancel context.CancelFunc
}

func (c *cut) LogLikelihood(u []float64) (float64, error) {
	if c.calls.Add(1) == c.at {
		c.cancel()
	}
	return c.Target.LogLikelihood(u)
}

func TestInterruptedRunIsPartialAndValid(t *testing.T) {
	p := gaussian(3, 0)
	s := Settings{Seed: 4, LivePoints: 200, Workers: 2}
	whole, err := Run(context.Background(), p.target, s)
	if err != nil {
		t.Fatal(err)
	}
	run := func(at int64) (*Outcome, error) {
		ctx, cancel := context.WithCancel(context.Background())
		defer cancel()
		var calls atomic.Int64
		return Run(ctx, func() (Target, error) { return &cut{p, &calls, at, cancel}, nil }, s)
	}
	o, err := run(1500)
	if err != nil {
		t.Fatal(err)
	}
	if o.Status != Interrupted || !o.Partial || len(o.Warnings) == 0 || o.Verdict == "sound" {
		t.Errorf("status %v, partial %v, warnings %q, verdict %q", o.Status, o.Partial, o.Warnings, o.Verdict)
	}
	if o.Calls > 1500 || o.Calls < 1200 {
		t.Errorf("%d calls counted, want those of whole batches before call 1500", o.Calls)
	}
	dead := len(o.Points) - s.LivePoints
	for i := range dead {
		if o.LogLikelihood[i] != whole.LogLikelihood[i] || o.LiveCount[i] != whole.LiveCount[i] {
			t.Fatalf("dead point %d differs from the uninterrupted run's", i)
		}
	}
	// The points in flight are dropped, up to InFlight batches of them, as many as
	// happen not to have landed. From there on nothing is replaced.
	most := InFlight * (s.LivePoints/BatchShare + 1)
	if n := o.LiveCount[dead]; n > s.LivePoints || n < s.LivePoints-most {
		t.Errorf("live number %d at the end, want at most %d and no more than %d below", n, s.LivePoints, most)
	}
	for i, n := range o.LiveCount[dead+most:] {
		if n != s.LivePoints-most-i {
			t.Fatalf("final live point %d has live number %d, want %d", i, n, s.LivePoints-most-i)
		}
	}
	checkWeights(t, o)

	// Before the first live points there is nothing to return.
	if _, err := run(50); !errors.Is(err, context.Canceled) {
		t.Errorf("interrupted at call 50: error %v, want context.Canceled", err)
	}
}

func checkWeights(t *testing.T, o *Outcome) {
	t.Helper()
	var sum float64
	for _, w := range o.LogWeight {
		sum += math.Exp(w)
	}
	// Each of n terms rounds to 2⁻⁵³; they sum to 1.
	if tol := float64(len(o.LogWeight)) * 0x1p-52; math.Abs(sum-1) > tol {
		t.Errorf("weights sum to 1%+.2g, want 1 within %.2g", sum-1, tol)
	}
	for i := 1; i < len(o.LogLikelihood); i++ {
		if o.LogLikelihood[i] < o.LogLikelihood[i-1] {
			t.Fatalf("dead point %d is below the one before", i)
		}
	}
}

func TestCallLimit(t *testing.T) {
	o, err := Run(context.Background(), gaussian(3, 0).target, Settings{LivePoints: 100, MaxCalls: 500})
	if err != nil {
		t.Fatal(err)
	}
	if o.Status != CallLimit || !o.Partial || len(o.Warnings) != 1 {
		t.Errorf("status %v, partial %v, warnings %q", o.Status, o.Partial, o.Warnings)
	}
	checkWeights(t, o)
}

func TestEvidenceErrorIsReached(t *testing.T) {
	var last float64
	s := Settings{Seed: 2, LivePoints: 200, EvidenceError: 0.08, Progress: func(p Progress) {
		if p.Fraction < last || p.Fraction > 1 {
			t.Errorf("fraction went from %g to %g", last, p.Fraction)
		}
		last = p.Fraction
	}}
	p := gaussian(3, 0)
	o, err := Run(context.Background(), p.target, s)
	if err != nil {
		t.Fatal(err)
	}
	if o.LogEvidenceError > s.EvidenceError || o.LivePoints <= s.LivePoints {
		t.Errorf("error %g with %d live points", o.LogEvidenceError, o.LivePoints)
	}
	if z := (o.LogEvidence - p.want) / o.LogEvidenceError; math.Abs(z) > 4 {
		t.Errorf("z = %g", z)
	}
	s.Progress, s.MaxGrowth = nil, 2
	o, err = Run(context.Background(), p.target, s)
	if err != nil {
		t.Fatal(err)
	}
	// The live number is a mean over a batch, a little below LivePoints.
	if o.LivePoints < 2*s.LivePoints || o.LivePoints > 21*s.LivePoints/10 || o.Status != GrowthLimit || !strings.Contains(o.Verdict, "2 times its live points") {
		t.Errorf("%d live points, status %v, verdict %q, want %d and a doubt that says so", o.LivePoints, o.Status, o.Verdict, 2*s.LivePoints)
	}
}

// fails returns value and err at the points with u[0] > 0.9.
type fails struct {
	value float64
	err   error
}

func (fails) Dim() int { return 2 }
func (f fails) LogLikelihood(u []float64) (float64, error) {
	if u[0] > 0.9 {
		return f.value, f.err
	}
	return 0, nil
}

func TestBadLikelihoodIsNamed(t *testing.T) {
	broken := errors.New("broken")
	for _, f := range []fails{{math.NaN(), nil}, {math.Inf(1), nil}, {0, broken}} {
		var first *PointError
		for _, workers := range []int{1, 3} {
			_, err := Run(context.Background(), func() (Target, error) { return f, nil }, Settings{Workers: workers})
			var bad *PointError
			if !errors.As(err, &bad) || len(bad.Point) != 2 || bad.Point[0] <= 0.9 {
				t.Fatalf("value %g: error %v, want a *PointError with its point", f.value, err)
			}
			if f.err != nil && !errors.Is(err, broken) {
				t.Errorf("error %v hides its cause", err)
			}
			if first == nil {
				first = bad
			} else if bad.Point[0] != first.Point[0] {
				t.Errorf("value %g: %d workers fail at another point than 1", f.value, workers)
			}
		}
	}
}

func TestTargetsThatCannotBeUsed(t *testing.T) {
	broken := errors.New("broken")
	made := 0
	for name, newTarget := range map[string]func() (Target, error){
		"no target": func() (Target, error) { return nil, broken },
		"other dimension": func() (Target, error) {
			made++
			return gaussian(1+made, 0), nil
		},
		"zero everywhere": func() (Target, error) {
			return &problem{dim: 2, logL: func([]float64) float64 { return math.Inf(-1) }}, nil
		},
		"no dimension": func() (Target, error) { return &problem{dim: 0}, nil },
	} {
		if o, err := Run(context.Background(), newTarget, Settings{LivePoints: 32, Workers: 2}); err == nil {
			t.Errorf("%s: no error, outcome %+v", name, o)
		}
	}
}

// A likelihood of one value everywhere has that evidence, with no error at all.
func TestConstantLikelihood(t *testing.T) {
	p := &problem{dim: 2, logL: func([]float64) float64 { return -7 }}
	o, err := Run(context.Background(), p.target, Settings{LivePoints: 50})
	if err != nil {
		t.Fatal(err)
	}
	// 50 weights that sum to 1 round to 50·2⁻⁵³ of it.
	if math.Abs(o.LogEvidence+7) > 1e-13 || o.LogEvidenceError > 1e-13 || math.Abs(o.Information) > 1e-12 {
		t.Errorf("ln Z = %.17g ± %g, H = %g, want -7 ± 0, 0", o.LogEvidence, o.LogEvidenceError, o.Information)
	}
}

// One dimension without any spread, as a fixed parameter in disguise would be.
func TestDimensionThatNarrowsToAPoint(t *testing.T) {
	p := &problem{dim: 2, logL: func(u []float64) float64 {
		return -0.5 * (u[0] - 0.5) * (u[0] - 0.5) / 1e-24
	}}
	// ∫ = σ √2π with σ = 1e-12; doubles near ½ are 1e-16 apart.
	want := math.Log(1e-12 * math.Sqrt(2*math.Pi))
	o, err := Run(context.Background(), p.target, Settings{LivePoints: 200})
	if err != nil {
		t.Fatal(err)
	}
	if z := (o.LogEvidence - want) / o.LogEvidenceError; math.Abs(z) > 4 {
		t.Errorf("ln Z = %g ± %g, want %g", o.LogEvidence, o.LogEvidenceError, want)
	}
}

func Example() {
	// A circular Gaussian of width 0.1 around the centre of the unit square.
	newTarget := func() (Target, error) {
		return &problem{dim: 2, logL: func(u []float64) float64 {
			return -50 * ((u[0]-0.5)*(u[0]-0.5) + (u[1]-0.5)*(u[1]-0.5))
		}}, nil
	}
	o, err := Run(context.Background(), newTarget, Settings{Seed: 1})
	if err != nil {
		fmt.Println(err)
		return
	}
	exact := math.Log(2 * math.Pi * 0.01)
	fmt.Println(math.Abs(o.LogEvidence-exact) < 3*o.LogEvidenceError, o.Verdict)
	// Output: true sound
}
