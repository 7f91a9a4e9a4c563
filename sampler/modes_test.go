package sampler

import (
	"context"
	"math"
	"slices"
	"testing"
)

func runOf(t *testing.T, p *problem, seed uint64, live int) *Outcome {
	t.Helper()
	o, err := Run(context.Background(), p.target, Settings{Seed: seed, LivePoints: live, Periodic: p.periodic})
	if err != nil {
		t.Fatal(err)
	}
	return o
}

// Two normalised Gaussians of weights 0.3 and 0.7, eleven widths of the wider
// one apart: the evidences of the modes are ln 0.3 and ln 0.7.
func TestEvidencesOfTwoModes(t *testing.T) {
	const n, sigmas = 16, 4
	p := twoModes(3, 0.03)
	var z [2][]float64
	var share []float64
	for seed := range uint64(n) {
		o := runOf(t, p, 200+seed, 150)
		modes, of := o.Modes()
		if len(modes) != 2 {
			t.Fatalf("seed %d: %d modes, want 2: %+v", seed, len(modes), modes)
		}
		wide := 0 // the mode around 0.4
		if o.Points[modes[0].Best][0] > 0.6 {
			wide = 1
		}
		for i, want := range []float64{0.3, 0.7} {
			m := modes[wide^i]
			z[i] = append(z[i], (m.LogEvidence.Value-math.Log(want))/m.LogEvidence.Error)
		}
		share = append(share, (modes[wide].Share.Value-0.3)/modes[wide].Share.Error)
		checkModes(t, o, modes, of)
	}
	for i, name := range []string{"the wide mode", "the narrow mode"} {
		mean, sd := meanSD(z[i])
		t.Logf("ln Z of %s: pulls over %d seeds of mean %+.2f, sd %.2f", name, n, mean, sd)
		tally{z: z[i]}.check(t, &problem{name: "ln Z of " + name}, sigmas)
	}
	mean, sd := meanSD(share)
	t.Logf("share: pulls of mean %+.2f, sd %.2f", mean, sd)
	tally{z: share}.check(t, &problem{name: "share of the wide mode"}, sigmas)
}

// checkModes: the evidences add up, and the shares and points are those of the
// labels.
func checkModes(t *testing.T, o *Outcome, modes []Mode, of []int) {
	t.Helper()
	sum, points := math.Inf(-1), 0
	for m, mode := range modes {
		sum = logAdd(sum, mode.LogEvidence.Value)
		points += mode.Points
		if of[mode.Best] != m {
			t.Errorf("the best point of mode %d is of mode %d", m, of[mode.Best])
		}
		if m > 0 && mode.Share.Value > modes[m-1].Share.Value {
			t.Errorf("mode %d has more evidence than the one before", m)
		}
	}
	// Weights sum to 1 but for rounding, see checkWeights.
	if tol := float64(len(of)) * 0x1p-51; math.Abs(sum-o.LogEvidence) > tol || points != len(o.Points) {
		t.Errorf("modes of %d points sum to ln Z = %.15g, want %d and %.15g", points, sum, len(o.Points), o.LogEvidence)
	}
}

// Whatever is in one piece must be found to be: round, skewed, curved, thin,
// flat, or hollow.
func TestOneModeWhereThereIsOne(t *testing.T) {
	for _, tc := range []struct {
		p    *problem
		live int
	}{
		{gaussian(2, 0.95), 100}, {gaussian(3, 0), 300}, {gaussian(8, 0.95), 200}, {gaussian(12, 0), 130},
		{rosenbrock(2, -5.804132), 200}, {ridge(), 200}, {plateau(), 200}, {steps(), 200}, {hollow(), 200},
	} {
		for seed := range uint64(2) {
			o := runOf(t, tc.p, seed, tc.live)
			modes, of := o.Modes()
			if len(modes) != 1 || modes[0].LogEvidence.Value != o.LogEvidence+math.Log(modes[0].Share.Value) || modes[0].Best != len(of)-1 {
				t.Errorf("%s/%d, seed %d: %d modes %+v, want 1", tc.p.name, tc.p.dim, seed, len(modes), modes)
			}
		}
	}
}

// Two rings that enclose nothing of one another, by symmetry of half the
// evidence each, and the eighteen peaks of the eggbox.
func TestModesOfManyKinds(t *testing.T) {
	o := runOf(t, shells(2, -1.745642), 1, 300)
	modes, of := o.Modes()
	checkModes(t, o, modes, of)
	if len(modes) != 2 || math.Abs(modes[0].Share.Value-0.5) > 4*modes[0].Share.Error {
		t.Errorf("shells: %+v, want two modes of share 0.5", modes)
	}
	o = runOf(t, eggbox(), 1, 1000)
	modes, of = o.Modes()
	checkModes(t, o, modes, of)
	if len(modes) != 18 {
		t.Errorf("eggbox: %d modes, want 18", len(modes))
	}
}

// A mode that lies across the ends of a periodic dimension is one.
func TestModeAcrossThePeriod(t *testing.T) {
	p := &problem{name: "across", dim: 2, periodic: []bool{true, false}, logL: func(u []float64) float64 {
		d := math.Min(u[0], 1-u[0])
		return -0.5 * (d*d + (u[1]-0.5)*(u[1]-0.5)) / (0.05 * 0.05)
	}}
	if modes, _ := runOf(t, p, 1, 200).Modes(); len(modes) != 1 {
		t.Errorf("%d modes, want 1", len(modes))
	}
	p.periodic = nil
	if modes, _ := runOf(t, p, 1, 200).Modes(); len(modes) != 2 {
		t.Errorf("%d modes without the period, want 2", len(modes))
	}
}

func TestModesWithoutStrands(t *testing.T) {
	o := runOf(t, gaussian(2, 0), 1, 100)
	o.Birth = nil
	modes, of := o.Modes()
	if len(modes) != 1 || slices.Max(of) != 0 {
		t.Errorf("%d modes", len(modes))
	}
}
