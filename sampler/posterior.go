package sampler

import (
	"cmp"
	"fmt"
	"math"
	"runtime"
	"slices"

	"knell/internal/random"
)

// coarse is the effective number of samples below which numbers of a
// posterior are coarse: a mean is then known to no better than a tenth of the
// posterior's width.
const coarse = 100

// Posterior is the weighted points of an outcome, as the run gave them or for
// another prior or likelihood (Outcome.Reweight). Its errors are standard
// deviations over resampled strands, which hold both what the simulated
// shrinkage knows of and that the points are a sample; they are NaN where the
// strands are not known. Each takes of the order of 10 ns per point and replica.
type Posterior struct {
	LogEvidence Quantity // ln Z, nats

	// LogRatio is ln of the posterior mean of the ratio that the outcome was
	// reweighted by, ln(Z/Z of the outcome), in nats. It is better known than
	// either evidence. 0 without reweighting.
	LogRatio Quantity

	LogWeight        []float64 // one per point of the outcome; the exponentials sum to 1
	EffectiveSamples float64   // (sum w)² / sum w²
	Warnings         []string

	outcome *Outcome
	shift   []float64 // ln of the ratio at each point, nil without
	runs    *resampling
}

// Quantity is a number and its standard error.
type Quantity struct{ Value, Error float64 }

// Posterior returns the posterior of the run itself.
func (o *Outcome) Posterior() *Posterior {
	return &Posterior{
		LogEvidence: Quantity{o.LogEvidence, o.LogEvidenceError},
		LogWeight:   o.LogWeight, EffectiveSamples: o.EffectiveSamples,
		outcome: o, runs: o.resample(nil),
	}
}

// Mean returns the posterior mean of x, one value per point of the outcome: a
// coordinate of the points, or any function of them.
func (p *Posterior) Mean(x []float64) (Quantity, error) {
	if err := p.check(x); err != nil {
		return Quantity{}, err
	}
	e := p.estimates(1, func(weight, out []float64) { out[0] = dot(weight, x) })
	return e[0], nil
}

// Covariance returns the means of d columns, one value per point of the outcome
// each, and their d×d covariance.
func (p *Posterior) Covariance(columns [][]float64) (mean []Quantity, covariance [][]Quantity, err error) {
	if err := p.check(columns...); err != nil {
		return nil, nil, err
	}
	d := len(columns)
	e := p.estimates(d+d*d, func(weight, out []float64) {
		for a, x := range columns {
			out[a] = dot(weight, x)
		}
		for a, x := range columns {
			for b := range a + 1 {
				var sum float64
				for i, w := range weight {
					if w != 0 {
						sum += w * (x[i] - out[a]) * (columns[b][i] - out[b])
					}
				}
				out[d+a*d+b], out[d+b*d+a] = sum, sum
			}
		}
	})
	for a := range d {
		covariance = append(covariance, e[d+a*d:d+(a+1)*d:d+(a+1)*d])
	}
	return e[:d:d], covariance, nil
}

// Quantiles returns the values of x, one per point of the outcome, below which
// the posterior has the given probabilities.
func (p *Posterior) Quantiles(x []float64, probabilities ...float64) ([]Quantity, error) {
	if err := p.check(x); err != nil {
		return nil, err
	}
	for _, q := range probabilities {
		if !(q > 0 && q < 1) {
			return nil, fmt.Errorf("sampler: quantile of probability %g, want above 0 and below 1", q)
		}
	}
	order := rising(x)
	return p.estimates(len(probabilities), func(weight, out []float64) {
		for k, q := range probabilities {
			out[k] = quantile(x, order, weight, q)
		}
	}), nil
}

// Interval holds a share of the posterior of one quantity.
type Interval struct{ Low, High Quantity }

// Central returns the interval of x that has the same probability outside on
// either side.
func (p *Posterior) Central(x []float64, probability float64) (Interval, error) {
	if !(probability > 0 && probability < 1) {
		return Interval{}, fmt.Errorf("sampler: interval of probability %g, want above 0 and below 1", probability)
	}
	e, err := p.Quantiles(x, (1-probability)/2, (1+probability)/2)
	if err != nil {
		return Interval{}, err
	}
	return Interval{e[0], e[1]}, nil
}

// HighestDensity returns the shortest interval of x with the probability: that
// of the highest density where there is one peak. It settles on where the points
// happen to lie close, so it is a little too short: by about the square of the
// error of its length over the length.
func (p *Posterior) HighestDensity(x []float64, probability float64) (Interval, error) {
	if err := p.check(x); err != nil {
		return Interval{}, err
	}
	if !(probability > 0 && probability < 1) {
		return Interval{}, fmt.Errorf("sampler: interval of probability %g, want above 0 and below 1", probability)
	}
	order := rising(x)
	e := p.estimates(2, func(weight, out []float64) {
		out[0], out[1] = shortest(x, order, weight, probability)
	})
	return Interval{e[0], e[1]}, nil
}

// EqualWeight draws points of equal weight, as Outcome.EqualWeight does.
func (p *Posterior) EqualWeight(seed uint64, n int) (points [][]float64, index []int) {
	if n <= 0 {
		n = max(1, int(p.EffectiveSamples))
	}
	return equalWeight(p.outcome.Points, p.LogWeight, seed, n)
}

// estimates evaluates m statistics with the posterior's weights and with those
// of each replica.
func (p *Posterior) estimates(m int, f func(weight, out []float64)) []Quantity {
	weight := make([]float64, len(p.LogWeight))
	for i, l := range p.LogWeight {
		weight[i] = math.Exp(l)
	}
	value := make([]float64, m)
	f(weight, value)
	e := make([]Quantity, m)
	for k, v := range value {
		e[k] = Quantity{v, math.NaN()}
	}
	if p.runs == nil {
		return e
	}
	out := make([]float64, m*p.runs.most)
	p.runs.each(runtime.GOMAXPROCS(0), func(at int, _ float64, weight []float64) {
		f(weight, out[at*m:(at+1)*m])
	})
	column := make([]float64, p.runs.most)
	for k := range e {
		for at := range column {
			column[at] = out[at*m+k]
		}
		e[k].Error = p.runs.spread(column)
	}
	return e
}

func (p *Posterior) check(columns ...[]float64) error {
	for _, x := range columns {
		if len(x) != len(p.LogWeight) {
			return fmt.Errorf("sampler: %d values, want one for each of %d points", len(x), len(p.LogWeight))
		}
		for i, v := range x {
			if math.IsNaN(v) || math.IsInf(v, 0) {
				return fmt.Errorf("sampler: value of point %d is %v, want a finite number", i, v)
			}
		}
	}
	return nil
}

// rising returns the order of rising x, equal ones as they stand. x without a NaN.
func rising(x []float64) []int32 {
	order := make([]int32, len(x))
	for i := range order {
		order[i] = int32(i)
	}
	// A stable sort would take longer where x nearly rises already, as it mostly does.
	slices.SortFunc(order, func(a, b int32) int { return cmp.Or(cmp.Compare(x[a], x[b]), cmp.Compare(a, b)) })
	return order
}

// quantile interpolates between the points' values, each at the middle of its
// own weight; the weights sum to 1.
func quantile(x []float64, order []int32, weight []float64, q float64) float64 {
	var below, lastX, lastAt float64
	first := true
	for _, i := range order {
		w := weight[i]
		if w == 0 {
			continue
		}
		at := below + w/2
		if at >= q {
			if first || at == lastAt {
				return x[i]
			}
			return lastX + (x[i]-lastX)*(q-lastAt)/(at-lastAt)
		}
		below += w
		lastX, lastAt, first = x[i], at, false
	}
	return lastX
}

// shortest returns the least interval from point to point that holds the share.
func shortest(x []float64, order []int32, weight []float64, share float64) (low, high float64) {
	best := math.Inf(1)
	var held float64
	to := 0
	for from, i := range order {
		for to < len(order) && held < share {
			held += weight[order[to]]
			to++
		}
		if held < share {
			if from == 0 { // the whole falls short by rounding
				return x[i], x[order[len(order)-1]]
			}
			break
		}
		if end := x[order[to-1]]; weight[i] > 0 && end-x[i] < best {
			best, low, high = end-x[i], x[i], end
		}
		held -= weight[i]
	}
	return low, high
}

// equalWeight draws n points by systematic resampling, in random order.
func equalWeight(all [][]float64, logWeight []float64, seed uint64, n int) (points [][]float64, index []int) {
	rng := random.New(seed, "equal weight")
	offset := rng.Float64()
	var sum float64
	for i, lw := range logWeight {
		sum += math.Exp(lw) * float64(n)
		for len(index) < n && offset+float64(len(index)) < sum {
			index = append(index, i)
		}
	}
	for last := len(logWeight) - 1; len(index) < n && last >= 0; { // rounding of the sum
		index = append(index, last)
	}
	rng.Shuffle(len(index), func(i, j int) { index[i], index[j] = index[j], index[i] })
	for _, i := range index {
		points = append(points, all[i])
	}
	return points, index
}
