package problems_test

import (
	"fmt"
	"math"
	"testing"

	"knell/internal/random"
	"knell/validation/problems"
)

func all(t *testing.T) []*problems.Problem {
	var ps []*problems.Problem
	for _, f := range problems.Families() {
		for _, dim := range f.Dims {
			ps = append(ps, problem(t, f.Name, dim))
		}
	}
	return ps
}

func TestProblemsAreTargets(t *testing.T) {
	rng := random.New(1, "targets")
	for _, p := range all(t) {
		t.Run(fmt.Sprintf("%s/%d", p.Name, p.Dim()), func(t *testing.T) {
			if p.Source == "" || math.IsNaN(p.Truth) || math.IsInf(p.Truth, 0) {
				t.Errorf("truth %v from %q, want a finite number and its source", p.Truth, p.Source)
			}
			if n := len(p.Periodic); n != 0 && n != p.Dim() {
				t.Errorf("%d values of Periodic, want none or %d", n, p.Dim())
			}
			u := make([]float64, p.Dim())
			for i := range 1000 {
				for k := range u {
					switch u[k] = rng.Float64(); i {
					case 0:
						u[k] = 0
					case 1:
						u[k] = 1
					case 2:
						u[k] = 0.5
					}
				}
				if l := logL(p, u); math.IsNaN(l) || math.IsInf(l, 1) {
					t.Fatalf("ln L = %v at %v", l, u)
				}
			}
			if n := testing.AllocsPerRun(100, func() { logL(p, u) }); n != 0 {
				t.Errorf("%g allocations per call, want 0", n)
			}
			for k, periodic := range p.Periodic {
				if !periodic {
					continue
				}
				u[k] = 0
				low := logL(p, u)
				u[k] = 1
				// Rounding of the phase, times the slope 2πκ of about 1300.
				near(t, "ln L on the other side of the cut", logL(p, u), low, 1e-10*math.Abs(low))
			}
		})
	}
}

// Volumes above a likelihood against the share of draws that lie there.
func TestLogVolumeIsTheShareOfDraws(t *testing.T) {
	const draws = 400000
	for _, tc := range []struct {
		name string
		dim  int
		at   float64 // every coordinate of the point whose likelihood is the threshold
	}{{"gaussian", 2, 0.75}, {"gaussian", 3, 0.75}, {"hypercube", 3, 0.7}, {"hypercube", 5, 0.85}} {
		p := problem(t, tc.name, tc.dim)
		u := make([]float64, tc.dim)
		for k := range u {
			u[k] = tc.at
		}
		threshold := logL(p, u)
		logV, known := p.LogVolume(threshold)
		if !known {
			t.Errorf("%s/%d: volume above %g is not known", tc.name, tc.dim, threshold)
			continue
		}
		rng := random.New(1, "volume", uint64(tc.dim))
		above := 0
		for range draws {
			for k := range u {
				u[k] = rng.Float64()
			}
			if logL(p, u) > threshold {
				above++
			}
		}
		v := math.Exp(logV)
		if sigma := math.Sqrt(v * (1 - v) / draws); math.Abs(float64(above)/draws-v) > 4*sigma {
			t.Errorf("%s/%d: %d of %d draws above %g, want a share %.5f ± %.5f", tc.name, tc.dim, above, draws, threshold, v, sigma)
		}
	}
	g := problem(t, "gaussian", 3)
	if v, known := g.LogVolume(logL(g, []float64{0, 0, 1})); known {
		t.Errorf("an ellipsoid that the walls cut has ln V = %g, want not known", v)
	}
	if _, known := problem(t, "eggbox", 2).LogVolume(200); known {
		t.Error("the eggbox has a known volume")
	}
}

func TestMostlyZeroIsZeroOutsideItsCorner(t *testing.T) {
	p := problem(t, "mostly-zero", 3)
	if l := logL(p, []float64{0.1, 0.1, 0.21}); !math.IsInf(l, -1) {
		t.Errorf("ln L = %g beside the corner, want -Inf", l)
	}
	if l := logL(p, []float64{0.1, 0.1, 0.19}); math.IsInf(l, -1) {
		t.Error("ln L = -Inf in the corner, want a number")
	}
}

// In 20 dimensions the volumes by a route of their own: the ball of radius r has
// π^10/10! r^20, and on its surface spike and slab are equal.
func TestSpikeNeedsToBeToldOf(t *testing.T) {
	r := math.Sqrt(2 * (math.Log(100) + 20*math.Log(10)) / (1e4 - 1e2))
	spike := math.Log(100) - 0.5*r*r/1e-4 - 20*math.Log(0.01)
	slab := -0.5*r*r/1e-2 - 20*math.Log(0.1)
	near(t, "spike over slab at their meeting", spike-slab, 0, 1e-9)
	volume := math.Pow(math.Pi, 10) / 3628800 * math.Pow(r, 20)
	want := volume / math.Pow(2*math.Pi*0.01, 10)
	got := problem(t, "spike-and-slab", 20).Remaining
	near(t, "ln Remaining", math.Log(got), math.Log(want), 1e-9)
	if low := problem(t, "spike-and-slab", 2).Remaining; low != 0 {
		t.Errorf("in 2 dimensions Remaining = %g, want the default, 0", low)
	}
}

func TestNewRefuses(t *testing.T) {
	for _, tc := range []struct {
		name string
		dim  int
	}{{"gauss", 2}, {"", 2}, {"eggbox", 3}, {"shells", 1}, {"gaussian", 0}, {"gaussian", 65}} {
		if _, err := problems.New(tc.name, tc.dim); err == nil {
			t.Errorf("New(%q, %d) gives no error", tc.name, tc.dim)
		}
	}
}

func BenchmarkLogLikelihood(b *testing.B) {
	p, err := problems.New("gaussian", 8)
	if err != nil {
		b.Fatal(err)
	}
	u := []float64{0.1, 0.2, 0.3, 0.4, 0.5, 0.6, 0.7, 0.8}
	b.ReportAllocs()
	for b.Loop() {
		_, _ = p.LogLikelihood(u)
	}
}
