package sampler

import (
	"context"
	"fmt"
	"math"

	"knell/internal/random"
)

// fewEffective is the effective number below which an estimate and its error
// are in doubt (common practice, no source).
const fewEffective = 50

// Bridge computes the evidence by bridge sampling from the posterior points of
// a finished run: half of its strands fit a normalised density q on the cube,
// the points of the others and s.Draws draws from q give Z as the root of
//
//	mean over draws of L/(a L + b Z q) = mean over posterior of q/(a L + b Z q),
//
// a = N₁/(N₁+N₂), b = 1 - a: the bridge of least error (Statistica Sinica 6, 831
// (1996)) if the N₁ posterior points and the N₂ draws were independent. N₁ is
// the effective size of the weighted half, (sum w)²/sum w². A wrong N₁ costs
// efficiency and nothing else.
//
// The halves are runs of their own, each with the live numbers of its own strands
// (see bridgeHalves), so that q does not follow the posterior it is compared
// with in what either has by chance.
//
// The error is the spread of the root over replicas of the second half, its
// strands drawn anew, each with Bayesian bootstrap weights of the draws. It holds
// the uncertain volumes and the finite number of points and draws. Where the
// strands are not known the halves are every second point and the replicas
// histories of simulated shrinkage (see histories).
//
// It costs s.Draws likelihood calls. A cancelled ctx gives its error, a
// likelihood that cannot be used a *PointError, a bad setting a *SettingError.
// Equal settings give equal bits, whatever the number of workers.
func (o *Outcome) Bridge(ctx context.Context, newTarget func() (Target, error), s RouteSettings) (Estimate, error) {
	e := Estimate{Route: "bridge"}
	r, err := o.newRoute(newTarget, s)
	if err != nil {
		return e, err
	}
	s = r.RouteSettings
	halves := o.bridgeHalves(s.Seed)
	if err := r.fit(halves.fitted); err != nil {
		return e, err
	}
	e.Components = len(r.q.components)
	d, err := r.draw(ctx, "bridge draw", s.Draws, 0)
	if err != nil {
		return e, err
	}
	e.Calls = int64(s.Draws)

	half := halves.compared
	b := bridge{a: half.effective / (half.effective + float64(s.Draws))}
	y := make([]float64, o.dim())
	for k, i := range halves.index {
		b.posterior = append(b.posterior, o.LogLikelihood[i]-r.q.logDensity(half.points[k], y))
	}
	even := make([]float64, s.Draws)
	for i := range even {
		even[i] = 1 / float64(s.Draws)
		b.drawn = append(b.drawn, d.logL[i]-d.logQ[i])
	}
	_, drawnSize, _ := summariseWeights(b.drawn)
	e.EffectiveSamples = min(half.effective, drawnSize)
	if drawnSize == 0 {
		return e, fmt.Errorf("sampler: bridge: the likelihood is zero at all %d draws of the fitted density", s.Draws)
	}
	e.LogEvidence = b.solve(half.weight, even, o.LogEvidence)

	// One Newton step from the root for each replica: the terms do not change.
	left, right, slope := b.terms(e.LogEvidence)
	step := make([]float64, halves.replicas.count)
	halves.replicas.each(s.Workers, func(h int, weight []float64) {
		rng := random.New(s.Seed, "bridge bootstrap", uint64(h))
		var sum, num, fall float64
		for i, t := range left {
			w := rng.ExpFloat64()
			sum += w
			num += w * t
			fall += w * slope[i]
		}
		num, fall = num/sum, fall/sum
		var all, den, rise float64
		for k, t := range right {
			w := weight[halves.index[k]]
			all += w
			den += w * t
			rise += w * slope[len(left)+k]
		}
		step[h] = (num - den/all) / (fall + rise/all)
	})
	e.Error = halves.replicas.spread(step)
	o.doubts(&e)
	return e, nil
}

// doubts adds the warnings that both routes share.
func (o *Outcome) doubts(e *Estimate) {
	if e.EffectiveSamples < fewEffective {
		e.warn("the %s estimate rests on %.0f effective samples, want at least %d: take more draws", e.Route, e.EffectiveSamples, fewEffective)
	}
	if o.Partial {
		e.warn("the run did not end by itself (%v): the density for the %s estimate was fitted to an unfinished posterior", o.Status, e.Route)
	}
}

// bridge is ln(L/q) at both kinds of points, and the posterior's share a.
type bridge struct {
	posterior, drawn []float64
	a                float64
}

// terms returns 1/(a + b Zq/L) at the draws, 1/(a L/(Zq) + b) at the posterior
// points, and for all in that order the size of the derivative by ln Z.
func (b *bridge) terms(logZ float64) (left, right, slope []float64) {
	rest := 1 - b.a
	for _, v := range b.drawn {
		x := math.Exp(logZ - v)
		t := 1 / (b.a + rest*x)
		left = append(left, t)
		slope = append(slope, t*(1-b.a*t))
	}
	for _, v := range b.posterior {
		t := 1 / (b.a*math.Exp(v-logZ) + rest)
		right = append(right, t)
		slope = append(slope, t*(1-rest*t))
	}
	return left, right, slope
}

// excess is the left minus the right mean of the bridge at logZ and its
// derivative. It falls everywhere, so it has one root.
func (b *bridge) excess(weight, even []float64, logZ float64) (gap, derivative float64) {
	left, right, slope := b.terms(logZ)
	for i, t := range left {
		gap += even[i] * t
		derivative -= even[i] * slope[i]
	}
	for i, t := range right {
		gap -= weight[i] * t
		derivative -= weight[i] * slope[len(left)+i]
	}
	return gap, derivative
}

// solve finds the root by Newton's method, kept within a bracket.
func (b *bridge) solve(weight, even []float64, start float64) float64 {
	low, high := start, start
	for step := 1.0; ; step *= 2 {
		if gap, _ := b.excess(weight, even, low); gap > 0 || step > 1e6 {
			break
		}
		low -= step
	}
	for step := 1.0; ; step *= 2 {
		if gap, _ := b.excess(weight, even, high); gap < 0 || step > 1e6 {
			break
		}
		high += step
	}
	z := 0.5 * (low + high)
	for range 200 {
		gap, derivative := b.excess(weight, even, z)
		if gap > 0 {
			low = z
		} else {
			high = z
		}
		next := z - gap/derivative
		if !(next > low && next < high) {
			next = 0.5 * (low + high)
		}
		if math.Abs(next-z) < 1e-12*(1+math.Abs(z)) {
			return next
		}
		z = next
	}
	return z
}

// summariseWeights returns ln of the mean of the weights exp(v), their effective
// number and the share of the largest in their sum; zeros if all are 0.
func summariseWeights(v []float64) (logMean, effective, largest float64) {
	top := math.Inf(-1)
	for _, x := range v {
		top = max(top, x)
	}
	if math.IsInf(top, -1) {
		return top, 0, 0
	}
	var sum, square float64
	for _, x := range v {
		w := math.Exp(x - top)
		sum += w
		square += w * w
	}
	return top + math.Log(sum/float64(len(v))), sum * sum / square, 1 / sum
}
