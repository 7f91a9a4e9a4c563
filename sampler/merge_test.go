package sampler

import (
	"context"
	"math"
	"slices"
	"testing"
)

func TestMergeSumsLiveNumbers(t *testing.T) {
	part := func(x float64, l []float64, n []int) *Outcome {
		o := &Outcome{LogLikelihood: l, LiveCount: n, LivePoints: n[0], Runs: 1, PriorDraws: int64(n[0])}
		for i := range l {
			o.Points = append(o.Points, []float64{x + float64(i)/100})
		}
		return o
	}
	a := part(0.1, []float64{1, 3, 5, 5}, []int{2, 2, 2, 1})
	b := part(0.5, []float64{2, 3, 4}, []int{3, 2, 1})
	m, err := Merge(a, b)
	if err != nil {
		t.Fatal(err)
	}
	// By hand: at each likelihood, the live number a has up to its next dead
	// point plus that of b; b has ended after 4.
	wantL := []float64{1, 2, 3, 3, 4, 5, 5}
	wantN := []int{5, 5, 4, 4, 3, 2, 1}
	if !slices.Equal(m.LogLikelihood, wantL) || !slices.Equal(m.LiveCount, wantN) {
		t.Errorf("merged %v with live numbers %v, want %v with %v", m.LogLikelihood, m.LiveCount, wantL, wantN)
	}
	if m.LivePoints != 5 || m.Runs != 2 {
		t.Errorf("%d live points in %d runs, want 5 in 2", m.LivePoints, m.Runs)
	}
	for name, bad := range map[string][]*Outcome{
		"none": {}, "nil": {a, nil}, "twice": {a, b, a}, "empty": {{}},
		"dimensions": {a, {Points: [][]float64{{1, 2}}, LogLikelihood: []float64{0}, LiveCount: []int{1}}},
	} {
		if _, err := Merge(bad...); err == nil {
			t.Errorf("%s: no error", name)
		}
	}
}

// Four runs of 100 live points know as much as one of 400, and say so.
func TestMergedRunsAreOneRun(t *testing.T) {
	p := gaussian(3, 0)
	var parts []*Outcome
	for seed := range uint64(4) {
		o, err := Run(context.Background(), p.target, Settings{Seed: 40 + seed, LivePoints: 100})
		if err != nil {
			t.Fatal(err)
		}
		parts = append(parts, o)
	}
	m, err := Merge(parts...)
	if err != nil {
		t.Fatal(err)
	}
	checkWeights(t, m)
	if z := (m.LogEvidence - p.want) / m.LogEvidenceError; math.Abs(z) > 4 {
		t.Errorf("z = %g", z)
	}
	// Half of the error of a part; sds of 160 histories are good to 6 %, and
	// the information differs between parts.
	if r := 2 * m.LogEvidenceError / parts[0].LogEvidenceError; math.Abs(r-1) > 0.25 {
		t.Errorf("error falls from %g to %g, want half", parts[0].LogEvidenceError, m.LogEvidenceError)
	}
	again, err := Merge(m)
	if err != nil {
		t.Fatal(err)
	}
	if digest(again) != digest(m) {
		t.Error("merging one outcome changes it")
	}
}

// Runs that share a plateau die on it together, and each refills past it on its
// own: a live number that depends on the order of the ties would count too many.
func TestMergedPlateau(t *testing.T) {
	p := plateau()
	const merges, parts = 12, 4
	var z [merges]float64
	for i := range z {
		var list []*Outcome
		for j := range parts {
			o, err := Run(context.Background(), p.target, Settings{Seed: uint64(900 + i*parts + j), LivePoints: 100})
			if err != nil {
				t.Fatal(err)
			}
			list = append(list, o)
		}
		m, err := Merge(list...)
		if err != nil {
			t.Fatal(err)
		}
		z[i] = (m.LogEvidence - p.want) / m.LogEvidenceError
	}
	mean, sd := meanSD(z[:])
	t.Logf("z = %.2f, standard deviation %.2f over %d merges", mean, sd, merges)
	if math.Abs(mean) > 3.5/math.Sqrt(merges) {
		t.Errorf("mean z = %.2f, want 0 within %.2f", mean, 3.5/math.Sqrt(merges))
	}
}
