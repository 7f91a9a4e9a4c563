package sampler

import (
	"math"
	"slices"
	"strings"
	"testing"
)

// A Gaussian likelihood of width s around ½ under a uniform prior, reweighted to
// the Gaussian prior of mean m and width w. Far from the walls, in each of dim
// dimensions
//
//	Z' = N(m; ½, √(s² + w²)),  posterior mean (½/s² + m/w²)/(1/s² + 1/w²)
//
// (the product of two Gaussians).
func TestReweightToAGaussianPrior(t *testing.T) {
	const n, sigmas, dim, s, m, w = 20, 4, 3, 0.05, 0.53, 0.06
	p := gaussian(dim, 0)
	logNormal := func(x, at, width float64) float64 {
		return -0.5*(x-at)*(x-at)/(width*width) - math.Log(width*math.Sqrt(2*math.Pi))
	}
	want := dim * logNormal(m, 0.5, math.Hypot(s, w))
	wantMean := (0.5/(s*s) + m/(w*w)) / (1/(s*s) + 1/(w*w))
	var z, ratio, mean []float64
	for seed := range uint64(n) {
		o := runOf(t, p, 400+seed, 150)
		post, err := o.ReweightBy(func(u []float64) float64 {
			var sum float64
			for _, x := range u {
				sum += logNormal(x, m, w)
			}
			return sum
		})
		if err != nil {
			t.Fatal(err)
		}
		z = append(z, (post.LogEvidence.Value-want)/post.LogEvidence.Error)
		// The evidence of the run is exactly 1, so the ratio is that of Z'.
		ratio = append(ratio, (post.LogRatio.Value-want)/post.LogRatio.Error)
		if !(post.LogRatio.Error < 0.7*post.LogEvidence.Error) {
			t.Errorf("seed %d: the ratio is known to %.3g, the evidence to %.3g", seed, post.LogRatio.Error, post.LogEvidence.Error)
		}
		q, err := post.Mean(column(o, 0))
		if err != nil {
			t.Fatal(err)
		}
		mean = append(mean, (q.Value-wantMean)/q.Error)
		if len(post.Warnings) > 0 || post.EffectiveSamples >= o.EffectiveSamples*1.2 {
			t.Errorf("seed %d: %g effective samples of %g, warnings %q", seed, post.EffectiveSamples, o.EffectiveSamples, post.Warnings)
		}
	}
	for name, pull := range map[string][]float64{"ln Z'": z, "ln Z'/Z": ratio, "posterior mean": mean} {
		m, sd := meanSD(pull)
		t.Logf("%-14s pulls over %d seeds of mean %+.2f, sd %.2f", name, n, m, sd)
		tally{z: pull}.check(t, &problem{name: name}, sigmas)
	}
}

// A ratio of one value changes nothing but the evidence, by that value.
func TestReweightByAConstant(t *testing.T) {
	o := runOf(t, hollow(), 2, 100)
	ratio := make([]float64, len(o.Points))
	for i := range ratio {
		ratio[i] = 3
	}
	p, err := o.Reweight(ratio)
	if err != nil {
		t.Fatal(err)
	}
	// Rounding of sums of so many terms.
	tol := float64(len(ratio)) * 0x1p-50
	if math.Abs(p.LogRatio.Value-3) > tol || p.LogRatio.Error > tol || math.Abs(p.LogEvidence.Error/o.BootstrapError-1) > tol || math.Abs(p.EffectiveSamples/o.EffectiveSamples-1) > tol {
		t.Errorf("ratio %v, evidence error %g and %g, %g effective samples of %g", p.LogRatio, p.LogEvidence.Error, o.BootstrapError, p.EffectiveSamples, o.EffectiveSamples)
	}
	x := column(o, 0)
	a, _ := p.Quantiles(x, 0.1, 0.9)
	b, _ := o.Posterior().Quantiles(x, 0.1, 0.9)
	for k := range a {
		if math.Abs(a[k].Value-b[k].Value) > 1e-9 || math.Abs(a[k].Error-b[k].Error) > 1e-9 {
			t.Errorf("quantile %v, want %v", a[k], b[k])
		}
	}
}

func TestReweightOutOfThePosteriorIsWarnedOf(t *testing.T) {
	o := runOf(t, gaussian(2, 0), 1, 200)
	far := func(u []float64) float64 { return -0.5 * (u[0] - 0.72) * (u[0] - 0.72) / 1e-4 }
	p, err := o.ReweightBy(far)
	if err != nil {
		t.Fatal(err)
	}
	if p.EffectiveSamples > coarse || len(p.Warnings) != 1 || !strings.Contains(p.Warnings[0], "effective") {
		t.Errorf("%g effective samples, warnings %q", p.EffectiveSamples, p.Warnings)
	}
	// One point left: the replicas without it say that nothing is known.
	only := make([]float64, len(o.Points))
	for i := range only {
		only[i] = math.Inf(-1)
	}
	only[len(only)/2] = 0
	if p, err = o.Reweight(only); err != nil || !math.IsInf(p.LogEvidence.Error, 1) || p.EffectiveSamples != 1 {
		t.Errorf("one point left: %v, %g effective samples, error %v", p.LogEvidence, p.EffectiveSamples, err)
	}
}

func TestReweightRefusesBadRatios(t *testing.T) {
	o := runOf(t, gaussian(2, 0), 1, 100)
	good := make([]float64, len(o.Points))
	for name, change := range map[string]func(r []float64) []float64{
		"short":    func(r []float64) []float64 { return r[1:] },
		"NaN":      func(r []float64) []float64 { r[5] = math.NaN(); return r },
		"infinite": func(r []float64) []float64 { r[5] = math.Inf(1); return r },
		"nothing": func(r []float64) []float64 {
			for i := range r {
				r[i] = math.Inf(-1)
			}
			return r
		},
	} {
		if _, err := o.Reweight(change(slices.Clone(good))); err == nil {
			t.Errorf("%s: no error", name)
		}
	}
}
