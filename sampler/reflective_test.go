package sampler

import (
	"context"
	"errors"
	"math"
	"testing"

	"knell/internal/random"
)

// leaningNormal is exp(-½ Σ d²/σ²), with σ = 0.05 and d the distance from the
// low wall in the even ones of the first dimensions, from the high wall in the odd
// ones, and from the middle in the rest. Over the cube each of the first gives
// σ √(π/2) erf(1/(σ√2)), each of the rest σ √(2π) erf(1/(2σ√2)).
func leaningNormal(dim, walls int) *problem {
	const sigma = 0.05
	at := func(f, edge float64) float64 {
		return math.Log(sigma * math.Sqrt(f*math.Pi) * math.Erf(edge/(sigma*math.Sqrt2)))
	}
	return &problem{
		name: "leaning normal", dim: dim, live: 250, source: "closed form",
		want: float64(walls)*at(0.5, 1) + float64(dim-walls)*at(2, 0.5),
		logL: func(u []float64) float64 {
			var s float64
			for k, x := range u {
				d := x - 0.5
				if k < walls {
					d = x - float64(k%2)
				}
				s += d * d
			}
			return -0.5 * s / (sigma * sigma)
		},
	}
}

// leaningSeam is leaningNormal(4, 2) with the last dimension periodic and its
// normal across the seam, which changes nothing in the integral.
func leaningSeam() *problem {
	p := leaningNormal(4, 2)
	middle := p.logL
	p.name, p.periodic = "leaning on the seam", []bool{false, false, false, true}
	p.logL = func(u []float64) float64 { return middle([]float64{u[0], u[1], u[2], wrap(u[3] + 0.5)}) }
	return p
}

// cornerPeak is exp(-Σ u/s) with s = 0.05: each dimension gives s (1 - exp(-1/s)).
func cornerPeak(dim int) *problem {
	const s = 0.05
	return &problem{
		name: "corner peak", dim: dim, live: 250, source: "closed form",
		want: float64(dim) * math.Log(-s*math.Expm1(-1/s)),
		logL: func(u []float64) float64 {
			var sum float64
			for _, x := range u {
				sum += x
			}
			return -sum / s
		},
	}
}

// slantedWall is a half-normal of width 0.1 on the low wall of the first
// dimension times a normal of width 0.01 in the second whose mean rises with
// the first: a ridge that meets the wall at an angle. The mean stays ten
// widths from the walls of the second over the first five and a half of the
// half-normal, so the evidence is the product of the two integrals.
func slantedWall() *problem {
	const wide, narrow = 0.1, 0.01
	return &problem{
		name: "slanted wall", dim: 2, live: 250, source: "closed form",
		want: math.Log(wide*math.Sqrt(math.Pi/2)*math.Erf(1/(wide*math.Sqrt2))) + math.Log(narrow*math.Sqrt(2*math.Pi)),
		logL: func(u []float64) float64 {
			d := u[1] - 0.3 - u[0]
			return -0.5 * (u[0]*u[0]/(wide*wide) + d*d/(narrow*narrow))
		},
	}
}

func everyDimension(dim int) []bool {
	all := make([]bool, dim)
	for k := range all {
		all[k] = true
	}
	return all
}

// Evidences must be right and draws fair with reflective dimensions, by each
// way of drawing, and calls fewer where the likelihood is round on the wall. The
// limits on the ratio are half-way between the measured one, in brackets, and 1.
func TestReflectiveEvidence(t *testing.T) {
	const n, sigmas = 8, 4
	var all tally
	for _, tc := range []struct {
		p     *problem
		force method
		ratio float64 // most calls over those with hard walls; 0: not compared
	}{
		{leaningNormal(4, 1), automatic, 0.83}, // 0.66
		{leaningNormal(4, 4), automatic, 0.9},  // 0.80
		{leaningNormal(6, 3), automatic, 0.74}, // 0.45
		{leaningNormal(8, 8), automatic, 0.9},  // 0.77
		{cornerPeak(4), automatic, 1.15},       // 1.00
		{slantedWall(), automatic, 1.15},       // 1.01
		{leaningSeam(), fromUnion, 0},
		{leaningNormal(4, 2), fromSlices, 0},
	} {
		s := Settings{force: tc.force, Reflective: everyDimension(tc.p.dim)}
		for k, periodic := range tc.p.periodic {
			s.Reflective[k] = !periodic
		}
		y := calibrate(t, tc.p, n, s)
		t.Log(y.row(tc.p))
		y.check(t, tc.p, sigmas)
		all.z = append(all.z, y.z...)
		all.rankP = append(all.rankP, y.rankP...)
		if tc.ratio == 0 {
			continue
		}
		s.Reflective = nil
		hard := calibrate(t, tc.p, 2, s)
		t.Logf("%s/%d: %.2f of the calls with hard walls", tc.p.name, tc.p.dim, y.calls/hard.calls)
		if y.calls > tc.ratio*hard.calls {
			t.Errorf("%s/%d: %.2f of the calls with hard walls, want at most %.2f", tc.p.name, tc.p.dim, y.calls/hard.calls, tc.ratio)
		}
	}
	all.check(t, &problem{name: "all problems"}, sigmas)
}

// The image of a point is chosen by its bits, so no worker count can matter.
func TestReflectiveBitsDoNotDependOnWorkers(t *testing.T) {
	for _, way := range []method{automatic, fromSlices} {
		p := leaningNormal(3, 2)
		var want [32]byte
		for _, workers := range []int{1, 3} {
			o, err := Run(context.Background(), p.target, Settings{Seed: 5, LivePoints: 100, Workers: workers, force: way, Reflective: everyDimension(3)})
			if err != nil {
				t.Fatal(err)
			}
			if got := digest(o); workers == 1 {
				want = got
			} else if got != want {
				t.Errorf("%v: %d workers give other bits than 1", way, workers)
			}
		}
	}
}

// What is lifted is part of the state, and a state of other settings is refused.
func TestReflectiveStatesLeadToTheSameOutcome(t *testing.T) {
	p := leaningNormal(4, 2)
	for _, way := range []method{automatic, fromSlices} {
		s := Settings{Seed: 3, LivePoints: 80, SliceSteps: 6, force: way, Reflective: everyDimension(4)}
		want, err := Run(context.Background(), p.target, s)
		if err != nil {
			t.Fatal(err)
		}
		keeper := &memoryKeeper{}
		s.Keeper, s.KeepEvery = keeper, 1
		if _, err := Run(context.Background(), p.target, s); err != nil {
			t.Fatal(err)
		}
		for try := range 8 {
			at := (2*try + 1) * len(keeper.states) / 16
			s.Keeper = &memoryKeeper{states: keeper.states[at : at+1 : at+1]}
			got, err := Run(context.Background(), p.target, s)
			if err != nil {
				t.Fatal(err)
			}
			if digest(got) != digest(want) || got.Calls != want.Calls {
				t.Errorf("%v: from state %d of %d: ln Z = %v with %d calls, want %v with %d", way, at, len(keeper.states), got.LogEvidence, got.Calls, want.LogEvidence, want.Calls)
			}
		}
		s.Reflective = nil
		var refused *ResumeError
		if _, err := Run(context.Background(), p.target, s); !errors.As(err, &refused) || refused.What != "Reflective" {
			t.Errorf("not reflective any more: error %v, want a *ResumeError that names it", err)
		}
	}
}

// A peak on the wall is one mode, although it has two images in the frame; peaks
// on both walls are two.
func TestModesOnReflectiveWalls(t *testing.T) {
	for _, tc := range []struct {
		p     *problem
		modes int
	}{
		{leaningNormal(2, 1), 1},
		{&problem{name: "both walls", dim: 2, logL: func(u []float64) float64 {
			d := math.Min(u[0], 1-u[0])
			return -0.5 * (d*d + (u[1]-0.5)*(u[1]-0.5)) / (0.05 * 0.05)
		}}, 2},
	} {
		o, err := Run(context.Background(), tc.p.target, Settings{Seed: random.New(1, tc.p.name).Uint64(), LivePoints: 250, Reflective: everyDimension(2)})
		if err != nil {
			t.Fatal(err)
		}
		if modes, _ := o.Modes(); len(modes) != tc.modes {
			t.Errorf("%s: %d modes, want %d", tc.p.name, len(modes), tc.modes)
		}
	}
}
