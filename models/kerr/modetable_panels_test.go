package kerr

import (
	"math"
	"testing"
)

// TestAdapt tabulates functions with a known shape, one of which has a branch
// point 0.002 from the range, and evaluates them everywhere.
func TestAdapt(t *testing.T) {
	// √((u-1)² + 0.002²) and sin 3u.
	truth := []func(u float64) float64{
		func(u float64) float64 { return math.Hypot(u-1, 0.002) },
		func(u float64) float64 { return math.Sin(3 * u) },
	}
	calls := 0
	sample := func(last *float64, u []float64, values [][]float64) error {
		calls++
		for j, at := range u {
			if at < *last {
				t.Fatalf("u falls from %g to %g", *last, at)
			}
			*last = at
			for f := range truth {
				values[f][j] = truth[f](at)
			}
		}
		return nil
	}
	small := func(c chebyshev) bool {
		for _, f := range c {
			if math.Abs(f[panelNodes-1])+math.Abs(f[panelNodes-2]) > 1e-13 {
				return false
			}
		}
		return true
	}
	panels, series, err := adapt(0.0, []panel{{}}, len(truth), sample, small)
	if err != nil {
		t.Fatal(err)
	}
	if len(panels) > 60 {
		t.Errorf("%d panels, want the few around u = 1 to be small", len(panels))
	}
	x := newPanelIndex(panels)
	for i := range 10001 {
		u := panelRange * float64(i) / 10000
		p, at := x.locate(u)
		if from, to := panels[p].edges(); u < from || u > to {
			t.Fatalf("u=%g located on the panel from %g to %g", u, from, to)
		}
		for f := range truth {
			got := 0.0
			c := powers(series[p][f])
			for k := panelNodes - 1; k >= 0; k-- {
				got = got*at + c[k]
			}
			if math.Abs(got-truth[f](u)) > 1e-12 {
				t.Fatalf("function %d at u=%g: %.15g, want %.15g", f, u, got, truth[f](u))
			}
		}
	}
	if _, _, err := adapt(0.0, []panel{{}}, 1, func(_ *float64, u []float64, values [][]float64) error {
		for j := range u {
			values[0][j] = math.Copysign(1, u[j]-1)
		}
		return nil
	}, small); err == nil {
		t.Error("a step was tabulated")
	}
}
