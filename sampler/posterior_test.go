package sampler

import (
	"context"
	"math"
	"reflect"
	"runtime"
	"slices"
	"testing"
)

// column is coordinate k of the points.
func column(o *Outcome, k int) []float64 {
	x := make([]float64, len(o.Points))
	for i, u := range o.Points {
		x[i] = u[k]
	}
	return x
}

// A Gaussian of width 0.05 and correlation 0.5 at the centre of the cube: mean,
// covariance, quantiles and intervals are known, and the errors must be theirs.
// By slices too, whose points have common starts.
func TestPosteriorIsCalibrated(t *testing.T) {
	t.Run("whatever is cheapest", func(t *testing.T) { calibratePosterior(t, gaussian(3, 0.5), 0) })
	t.Run("slices", func(t *testing.T) { calibratePosterior(t, gaussian(2, 0.5), fromSlices) })
}

func calibratePosterior(t *testing.T, p *problem, force method) {
	const n, sigmas, sigma = 20, 4, 0.05
	pulls := map[string][]float64{}
	add := func(name string, q Quantity, want float64) {
		pulls[name] = append(pulls[name], (q.Value-want)/q.Error)
	}
	for seed := range uint64(n) {
		o, err := Run(context.Background(), p.target, Settings{Seed: 300 + seed, LivePoints: 120, force: force})
		if err != nil {
			t.Fatal(err)
		}
		post := o.Posterior()
		x := [][]float64{column(o, 0), column(o, 1)}
		mean, cov, err := post.Covariance(x)
		if err != nil {
			t.Fatal(err)
		}
		one, err := post.Mean(x[0])
		if err != nil || one.Value != mean[0].Value || one.Error != mean[0].Error {
			t.Fatalf("mean %v alone, %v with the covariance, error %v", one, mean[0], err)
		}
		if cov[0][1] != cov[1][0] {
			t.Fatalf("covariance %v and %v", cov[0][1], cov[1][0])
		}
		add("mean", mean[0], 0.5)
		add("variance", cov[1][1], sigma*sigma)
		add("covariance", cov[0][1], 0.5*sigma*sigma)
		// Standard normal quantiles: Φ⁻¹(0.84134475) = 1, Φ⁻¹(0.025) = -1.9599640,
		// ISO 2854 tables, from memory.
		q, err := post.Quantiles(x[0], 0.5, 0.8413447460685429)
		if err != nil {
			t.Fatal(err)
		}
		add("median", q[0], 0.5)
		add("upper quantile", q[1], 0.5+sigma)
		in, err := post.Central(x[0], 0.95)
		if err != nil {
			t.Fatal(err)
		}
		add("central low", in.Low, 0.5-1.959963985*sigma)
		add("central high", in.High, 0.5+1.959963985*sigma)
		if in, err = post.HighestDensity(x[0], 0.6826894921370859); err != nil {
			t.Fatal(err)
		}
		add("highest density middle", Quantity{(in.Low.Value + in.High.Value) / 2, math.Max(in.Low.Error, in.High.Error)}, 0.5)
		// Shorter than the true one by the square of its relative error, about.
		if length := (in.High.Value - in.Low.Value) / (2 * sigma); math.Abs(length-0.95) > 0.2 {
			t.Errorf("seed %d: the shortest interval of 68 %% is %.2f of its length", seed, length)
		}
	}
	for _, name := range slices.Sorted(func(yield func(string) bool) {
		for k := range pulls {
			if !yield(k) {
				return
			}
		}
	}) {
		mean, sd := meanSD(pulls[name])
		t.Logf("%-22s pulls over %d seeds of mean %+.2f, sd %.2f", name, n, mean, sd)
		if name == "highest density middle" { // its ends move together, so the error is no less
			if math.Abs(mean) > sigmas/math.Sqrt(n) {
				t.Errorf("%s: mean pull %.2f", name, mean)
			}
			continue
		}
		tally{z: pulls[name]}.check(t, &problem{name: name}, sigmas)
	}
}

// By hand: weights 0.2, 0.5, 0.3 at 1, 2, 4 stand at 0.1, 0.45 and 0.85.
func TestQuantileAndShortest(t *testing.T) {
	x := []float64{4, 1, 9, 2}
	weight := []float64{0.3, 0.2, 0, 0.5}
	order := rising(x)
	for _, tc := range []struct{ q, want float64 }{
		{0.05, 1}, {0.1, 1}, {0.275, 1.5}, {0.45, 2}, {0.65, 3}, {0.85, 4}, {0.95, 4},
	} {
		if got := quantile(x, order, weight, tc.q); math.Abs(got-tc.want) > 1e-14 {
			t.Errorf("quantile %g = %g, want %g", tc.q, got, tc.want)
		}
	}
	for _, tc := range []struct{ share, low, high float64 }{
		{0.4, 2, 2}, {0.6, 1, 2}, {0.75, 2, 4}, {0.9, 1, 4},
	} {
		if low, high := shortest(x, order, weight, tc.share); low != tc.low || high != tc.high {
			t.Errorf("shortest interval of %g = [%g, %g], want [%g, %g]", tc.share, low, high, tc.low, tc.high)
		}
	}
}

// Draws of equal weight come as often as their weight says: systematic
// resampling is never off by one draw or more.
func TestEqualWeightCounts(t *testing.T) {
	o := runOf(t, gaussian(2, 0), 1, 100)
	for _, n := range []int{0, 1, 50, 5000} {
		points, index := o.EqualWeight(7, n)
		if want := n; n > 0 && len(index) != want || n == 0 && len(index) != int(o.EffectiveSamples) || len(points) != len(index) {
			t.Fatalf("%d draws and %d points, want %d", len(index), len(points), n)
		}
		times := make([]int, len(o.Points))
		for j, i := range index {
			times[i]++
			if &points[j][0] != &o.Points[i][0] {
				t.Fatalf("draw %d is not point %d", j, i)
			}
		}
		for i, c := range times {
			if want := math.Exp(o.LogWeight[i]) * float64(len(index)); math.Abs(float64(c)-want) >= 1+1e-9 {
				t.Errorf("point %d drawn %d times of %d, want %.2f", i, c, len(index), want)
			}
		}
	}
}

func TestPosteriorRefusesBadInput(t *testing.T) {
	o := runOf(t, gaussian(2, 0), 1, 100)
	p := o.Posterior()
	x := column(o, 0)
	bad := slices.Clone(x)
	bad[3] = math.NaN()
	for name, f := range map[string]func() error{
		"short":       func() error { _, err := p.Mean(x[1:]); return err },
		"NaN":         func() error { _, _, err := p.Covariance([][]float64{x, bad}); return err },
		"probability": func() error { _, err := p.Quantiles(x, 0.5, 1); return err },
		"interval":    func() error { _, err := p.HighestDensity(x, 0); return err },
		"central":     func() error { _, err := p.Central(x, math.NaN()); return err },
	} {
		if f() == nil {
			t.Errorf("%s: no error", name)
		}
	}
}

func TestPosteriorBitsDoNotDependOnProcessors(t *testing.T) {
	o := runOf(t, twoModes(3, 0.03), 1, 150)
	var want []any
	for _, n := range []int{1, 2, 5} {
		before := runtime.GOMAXPROCS(n)
		modes, of := o.Modes()
		q, err := o.Posterior().Quantiles(column(o, 0), 0.1, 0.5)
		if err != nil {
			t.Fatal(err)
		}
		p, err := o.ReweightBy(func(u []float64) float64 { return u[0] })
		if err != nil {
			t.Fatal(err)
		}
		runtime.GOMAXPROCS(before)
		got := []any{modes, of, q, p.LogEvidence, p.LogRatio}
		if want == nil {
			want = got
		} else if !reflect.DeepEqual(got, want) {
			t.Errorf("%d processors give other numbers than 1: %+v, %+v", n, got, want)
		}
	}
}
