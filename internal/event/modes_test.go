package event

import (
	"context"
	"math"
	"testing"

	"knell/sampler"
)

// twoPeaks has two Gaussians of width 0.03 and the given mass in the first
// coordinate of the unit cube, at a quarter and at three quarters of it, and one of
// width 0.05 in the others.
type twoPeaks struct {
	dim    int
	second float64
}

func (p twoPeaks) Dim() int { return p.dim }

func (p twoPeaks) LogLikelihood(u []float64) (float64, error) {
	const narrow, wide = 0.03, 0.05
	peak := func(at float64) float64 {
		return math.Exp(-0.5 * (u[0] - at) * (u[0] - at) / (narrow * narrow))
	}
	l := math.Log((1-p.second)*peak(0.25)+p.second*peak(0.75)) - math.Log(narrow*math.Sqrt(2*math.Pi))
	for _, x := range u[1:] {
		l -= 0.5*(x-0.5)*(x-0.5)/(wide*wide) + math.Log(wide*math.Sqrt(2*math.Pi))
	}
	return l, nil
}

// Two peaks of known mass, in the mass of the horizon's prior: 40 to 110 solar
// masses has 57.5 at a quarter and 92.5 at three quarters. The medians scatter by the
// peak's width, 2.1 solar masses, over the root of the effective samples, a hundred
// at least.
func TestPosteriorModes(t *testing.T) {
	h := mustLoad(t, tiny).hypotheses[0]
	const second = 0.7
	o, err := sampler.Run(context.Background(), func() (sampler.Target, error) { return twoPeaks{h.set.Dim(), second}, nil }, sampler.Settings{Seed: 3, LivePoints: 200})
	if err != nil {
		t.Fatal(err)
	}
	parameters := h.model.Parameters()
	columns, weights := newColumns(len(parameters), len(o.Points)), make([]float64, len(o.Points))
	theta := make([]float64, len(parameters))
	for i, u := range o.Points {
		h.place(u, theta)
		for j, v := range theta {
			columns[j][i] = v
		}
		weights[i] = math.Exp(o.LogWeight[i])
	}
	modes := posteriorModes(h, o, parameters, columns, weights)
	if len(modes) != 2 {
		t.Fatalf("%d modes, want 2: %+v", len(modes), modes)
	}
	points := 0
	for m, want := range []struct{ share, mass float64 }{{second, 92.5}, {1 - second, 57.5}} {
		got := modes[m]
		points += got.Points
		if d := math.Abs(float64(got.Share) - want.share); !(d < 4*float64(got.ShareError)) {
			t.Errorf("share %v +- %v, want %v", got.Share, got.ShareError, want.share)
		}
		if d := math.Abs(float64(got.LogEvidenceOver) - math.Log(want.share)); !(d < 4*float64(got.Error)) || got.Error > 0.5 {
			t.Errorf("ln evidence %v +- %v, want %v", got.LogEvidenceOver, got.Error, math.Log(want.share))
		}
		if len(got.Parameters) != h.set.Dim() || got.Parameters[0].Parameter != "mass" || math.Abs(float64(got.Parameters[0].Median)-want.mass) > 0.8 {
			t.Errorf("parameters %+v, want all free ones, mass first with median %v", got.Parameters, want.mass)
		}
	}
	if points != len(o.Points) {
		t.Errorf("modes of %d points, want %d", points, len(o.Points))
	}
	if one, err := sampler.Run(context.Background(), func() (sampler.Target, error) { return twoPeaks{2, 0}, nil }, sampler.Settings{Seed: 3, LivePoints: 200}); err != nil || posteriorModes(h, one, nil, nil, make([]float64, len(one.Points))) != nil {
		t.Errorf("one peak has modes, or error %v", err)
	}
}
