package sampler

import (
	"context"
	"math"
	"testing"

	"knell/internal/random"
)

// A run that was grown for posterior samples has many strands that begin late. What
// is found from it must be as honest as from a plain run: the evidence by bridge
// sampling, the density ratio, a mean and a quantile. The Gaussian's quantile at Φ(1)
// is one width above its mean.
func TestRoutesOfAGrownRunAreCalibrated(t *testing.T) {
	n, sigmas := 10, 4.0
	if *long {
		n = *seeds
	}
	const mean, sigma, at = 0.4, 0.1, 0.5
	p := nestedPair(mean)
	pulls := map[string]*tally{}
	names := []string{"bridge", "density ratio", "mean", "quantile"}
	for _, name := range names {
		pulls[name] = &tally{}
	}
	for seed := range n {
		key := random.New(uint64(seed), "routes of a grown run").Uint64()
		o, err := Run(context.Background(), p.target, Settings{Seed: key, LivePoints: 60, PosteriorSamples: 800})
		if err != nil {
			t.Fatal(err)
		}
		late := 0
		for i, b := range o.Birth {
			if o.Strand[i] >= 60 && !math.IsInf(b, -1) {
				late++
			}
		}
		if late < len(o.Points)/4 {
			t.Fatalf("seed %d: %d of %d points are of later strands: the run did not grow", seed, late, len(o.Points))
		}
		add := func(name string, value, e, want float64) {
			y := pulls[name]
			y.z = append(y.z, (value-want)/e)
			y.err += e / float64(n)
		}
		b, err := o.Bridge(context.Background(), p.target, RouteSettings{Seed: key, Draws: 500})
		if err != nil {
			t.Fatal(err)
		}
		add("bridge", b.LogEvidence, b.Error, p.want)
		r, err := o.SavageDickey(0, at, RatioSettings{Seed: key})
		if err != nil {
			t.Fatal(err)
		}
		add("density ratio", r.LogBayesFactor, r.Error, p.at(mean, at)-p.want)
		post, x := o.Posterior(), column(o, 0)
		m, err := post.Mean(x)
		if err != nil {
			t.Fatal(err)
		}
		add("mean", m.Value, m.Error, mean)
		q, err := post.Quantiles(x, 0.8413447460685429)
		if err != nil {
			t.Fatal(err)
		}
		add("quantile", q[0].Value, q[0].Error, mean+sigma)
	}
	for _, name := range names {
		y := pulls[name]
		m, sd := meanSD(y.z)
		t.Logf("%-13s %d seeds: pull %+.2f ± %.2f, sd %.2f, error %.4f", name, n, m, 1/math.Sqrt(float64(n)), sd, y.err)
		y.check(t, &problem{name: name}, sigmas)
	}
}
