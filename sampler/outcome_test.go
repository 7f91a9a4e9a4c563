package sampler

import (
	"context"
	"math"
	"testing"
)

func TestEqualWeight(t *testing.T) {
	p := gaussian(3, 0)
	o, err := Run(context.Background(), p.target, Settings{Seed: 5})
	if err != nil {
		t.Fatal(err)
	}
	points, index := o.EqualWeight(7, 0)
	if len(points) != int(o.EffectiveSamples) || len(index) != len(points) {
		t.Fatalf("%d points, %d indices, want %d", len(points), len(index), int(o.EffectiveSamples))
	}
	// The posterior is a Gaussian of width 0.05 around ½. With n independent
	// draws the mean has sd 0.05/√n and the variance a relative sd of √(2/n);
	// five of each.
	n := float64(len(points))
	for k := range 3 {
		var v []float64
		for i, u := range points {
			if &u[0] != &o.Points[index[i]][0] {
				t.Fatalf("draw %d is not point %d", i, index[i])
			}
			v = append(v, u[k])
		}
		mean, sd := meanSD(v)
		if math.Abs(mean-0.5) > 5*0.05/math.Sqrt(n) || math.Abs(sd*sd/0.0025-1) > 5*math.Sqrt(2/n) {
			t.Errorf("coordinate %d: mean %g, sd %g, want 0.5, 0.05", k, mean, sd)
		}
	}
	again, _ := o.EqualWeight(7, 0)
	other, _ := o.EqualWeight(8, 0)
	same := 0
	for i := range points {
		if &again[i][0] != &points[i][0] {
			t.Fatal("equal seeds give other draws")
		}
		if &other[i][0] == &points[i][0] {
			same++
		}
	}
	if same == len(points) {
		t.Error("another seed gives equal draws")
	}
	if few, _ := o.EqualWeight(1, 10); len(few) != 10 {
		t.Errorf("%d draws, want 10", len(few))
	}
}

func TestVerdict(t *testing.T) {
	o := &Outcome{LivePoints: 100, Runs: 1, Points: [][]float64{{0}}}
	for i := range 1000 {
		o.ranks = append(o.ranks, (float64(i)+0.5)/1000)
	}
	// In order these fail by blocks, as a whole they are as uniform as can be.
	o.judge()
	if o.Verdict == "sound" || len(o.Warnings) != 1 || o.InsertionRankP < 0.9 {
		t.Errorf("sorted ranks: %q, warnings %q, p = %g", o.Verdict, o.Warnings, o.InsertionRankP)
	}
	for i := range o.ranks {
		o.ranks[i] = math.Mod(float64(i)*0.6180339887498949, 1)
	}
	o.judge()
	if o.Verdict != "sound" || len(o.Warnings) != 0 {
		t.Errorf("even ranks: %q, warnings %q", o.Verdict, o.Warnings)
	}
}
