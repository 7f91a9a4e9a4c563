package sampler

import (
	"math"

	"knell/internal/random"
)

// routeHistories is the number of simulated histories of an error, which it
// gives to 1/sqrt(400) = 5 %.
const routeHistories = 200

// replicas are other weights that the points of a run might have had.
type replicas struct {
	count int
	swell float64 // the variance over replicas is too small by it

	// each calls visit with every replica's number and weights of all points,
	// which are only lent, from up to so many goroutines.
	each func(workers int, visit func(r int, weight []float64))
}

// spread is the standard error of a statistic from its values in the replicas.
func (r replicas) spread(values []float64) float64 {
	_, sd := meanSD(values)
	return sd * math.Sqrt(r.swell)
}

// replicas draws the strands of the run anew, or where they are not known
// simulates histories of its shrinkage.
func (o *Outcome) replicas(seed uint64) replicas {
	if r := o.resample(nil); r != nil {
		return r.replicas()
	}
	return replicas{routeHistories, 1, func(workers int, visit func(r int, weight []float64)) {
		o.histories(seed, routeHistories, workers, visit)
	}}
}

func (r *resampling) replicas() replicas {
	return replicas{r.most, r.swell, func(workers int, visit func(r int, weight []float64)) {
		r.each(workers, func(at int, _ float64, weight []float64) { visit(at, weight) })
	}}
}

// bridgeHalves is the posterior in two halves: one that a density is fitted to
// and one that it is compared with.
type bridgeHalves struct {
	fitted, compared sample
	index            []int // of the points of compared in the outcome
	replicas         replicas
}

// bridgeHalves shares the strands out at random, those that begin at the prior
// and those that begin later each among themselves. Each half has the weights of
// a run of its strands alone, so the two have their volumes and their points by
// independent chance. (Were every second point taken, with the weights of the
// whole run, the volumes would move both alike, and ln Z would be low by the
// square of their relative error.)
func (o *Outcome) bridgeHalves(seed uint64) bridgeHalves {
	r := o.resample(nil)
	if r == nil || len(r.groups[0]) < 4 {
		return o.everySecond(seed)
	}
	rng := random.New(seed, "bridge halves")
	times := [2][]int32{make([]int32, r.count), make([]int32, r.count)}
	second := *r
	second.groups = make([][]int32, len(r.groups))
	for g, strands := range r.groups {
		for k, at := range rng.Perm(len(strands)) {
			s := strands[at]
			times[k%2][s] = 1
			if k%2 == 1 {
				second.groups[g] = append(second.groups[g], s)
			}
		}
	}
	n := float64(len(second.groups[0]))
	second.swell = n / (n - 1)
	h := bridgeHalves{replicas: second.replicas()}
	weight := make([]float64, len(o.Points))
	for k := range times {
		r.weigh(times[k], r.start.mean, weight)
		var points [][]float64
		var mine []float64
		for i, s := range o.Strand {
			if times[k][s] == 0 {
				continue
			}
			points = append(points, o.Points[i])
			mine = append(mine, weight[i])
			if k == 1 {
				h.index = append(h.index, i)
			}
		}
		if k == 0 {
			h.fitted = newSample(points, mine)
		} else {
			h.compared = newSample(points, mine)
		}
	}
	return h
}

// everySecond is bridgeHalves for a run whose strands are not known.
func (o *Outcome) everySecond(seed uint64) bridgeHalves {
	all := o.posterior()
	h := bridgeHalves{fitted: all.half(0), compared: all.half(1), replicas: o.replicas(seed)}
	for i := 1; i < len(o.Points); i += 2 {
		h.index = append(h.index, i)
	}
	return h
}
