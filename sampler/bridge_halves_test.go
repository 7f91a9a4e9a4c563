package sampler

import (
	"math"
	"slices"
	"testing"
)

// The two halves are runs of other strands: together all points, each with the
// weights that a run of its strands alone has, the compared one by the average over
// simulated histories. Relative weights scatter by 1/√500 over the histories that
// Subset averages, a total variation well below 0.05.
func TestBridgeHalvesAreRunsOfTheirStrands(t *testing.T) {
	for name, o := range strandRuns(t) {
		h := o.bridgeHalves(1)
		if got, want := len(h.fitted.points)+len(h.compared.points), len(o.Points); got != want || len(h.index) != len(h.compared.points) {
			t.Fatalf("%s: halves of %d and %d points, want %d in all", name, len(h.fitted.points), len(h.compared.points), want)
		}
		seen := map[int32]bool{}
		for k, i := range h.index {
			if &h.compared.points[k][0] != &o.Points[i][0] {
				t.Fatalf("%s: compared point %d is not point %d", name, k, i)
			}
			seen[o.Strand[i]] = true
		}
		var strands []int
		for s := range seen {
			strands = append(strands, int(s))
		}
		slices.Sort(strands)
		if d := 2*len(strands) - len(o.Strands()); d < -2 || d > 2 {
			t.Errorf("%s: %d of %d strands are compared", name, len(strands), len(o.Strands()))
		}
		for i, s := range o.Strand {
			if _, found := slices.BinarySearch(h.index, i); found != seen[s] {
				t.Fatalf("%s: strand %d is in both halves", name, s)
			}
		}
		alone, err := o.Subset(strands)
		if err != nil {
			t.Fatal(err)
		}
		var apart float64
		for k, w := range h.compared.weight {
			apart += math.Abs(w-math.Exp(alone.LogWeight[k])) / 2
		}
		if apart > 0.05 {
			t.Errorf("%s: weights differ from those of the strands' own run by %.3f in total variation", name, apart)
		}
		h.replicas.each(3, func(r int, weight []float64) {
			var inside, all float64
			for i, w := range weight {
				all += w
				if seen[o.Strand[i]] {
					inside += w
				}
			}
			if r == 7 && math.Abs(inside-all) > 1e-12*all {
				t.Errorf("%s: a replica has a share %.3g of its weight in the other half", name, 1-inside/all)
			}
		})
	}
}

// Without strands the routes fall back to every second point and to simulated
// histories.
func TestRoutesWithoutStrands(t *testing.T) {
	p := gaussian(3, 0.5)
	p.live = 150
	o := finished(t, p)
	o.Birth = nil
	e, err := o.Bridge(t.Context(), p.target, RouteSettings{Seed: 1, Draws: 500})
	if err != nil {
		t.Fatal(err)
	}
	if !(e.Error > 0 && e.Error < 0.03) || math.Abs(e.LogEvidence-p.want) > 4*e.Error {
		t.Errorf("ln Z = %.4f ± %.4f, want %.4f", e.LogEvidence, e.Error, p.want)
	}
	// The density of a normal of width 0.05 at its centre.
	want := -math.Log(0.05 * math.Sqrt(2*math.Pi))
	r, err := o.SavageDickey(0, 0.5, RatioSettings{Seed: 1})
	if err != nil || !(r.Error > 0 && r.Error < 0.3) || math.Abs(r.LogBayesFactor-want) > 4*r.Error {
		t.Errorf("density %.3f ± %.3f, error %v, want %.3f", r.LogBayesFactor, r.Error, err, want)
	}
}
