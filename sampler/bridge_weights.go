package sampler

import (
	"math"
	"sync"

	"knell/internal/random"
)

// histories calls visit with the posterior weights of all points in each of n
// simulated shrinkage histories, r = 0 to n-1, from up to workers goroutines.
// The weights are not normalised and only borrowed.
//
// As in weigh a history draws t_i ~ Beta(n_i, 1), but point i stands for the
// whole volume X_(i-1) - X_i above it, not for that between midpoints. Of
// neighbouring points these volumes are then nearly independent exponential
// variates, the weights of a Bayesian bootstrap: besides the uncertain volumes
// the spread over histories has the chance of where on its contour each point
// fell. With midpoints, half the variance of the latter would be lost. It knows
// nothing of correlation between points, which slices leave.
func (o *Outcome) histories(seed uint64, n, workers int, visit func(r int, weight []float64)) {
	points := len(o.LogLikelihood)
	start := o.priorShrinkage()
	scale := make([]float64, points)
	up := make([]float64, points) // exp(1/n_i)
	mean, top := start.mean, math.Inf(-1)
	for i, l := range o.LogLikelihood {
		up[i] = math.Exp(1 / float64(o.LiveCount[i]))
		mean -= 1 / float64(o.LiveCount[i])
		scale[i] = l + mean
		top = max(top, scale[i])
	}
	for i := range scale {
		scale[i] = math.Exp(scale[i] - top)
	}
	var wg sync.WaitGroup
	workers = max(1, min(workers, n))
	for first := range workers {
		wg.Add(1)
		go func() {
			defer wg.Done()
			weight := make([]float64, points)
			for r := first; r < n; r += workers {
				rng := random.New(seed, "history", uint64(r))
				dev := start.draw(rng) - start.mean
				before := math.Exp(dev)
				for i, live := range o.LiveCount {
					dev -= (rng.ExpFloat64() - 1) / float64(live)
					here := math.Exp(dev)
					weight[i] = scale[i] * (before*up[i] - here)
					if i == points-1 {
						weight[i] += scale[i] * here // what is left inside
					}
					before = here
				}
				visit(r, weight)
			}
		}()
	}
	wg.Wait()
}
