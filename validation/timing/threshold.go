package main

import (
	"container/heap"
	"math"
	"math/rand/v2"
)

// Another schedule, for comparison: all workers propose at one threshold, all are
// waited for, and their points are taken in turn if they still are above the threshold
// that the points before them have raised. What is not above it is wasted. With equal
// call times nobody waits, and what k workers are worth is known: the a-th accepted
// point leaves exp(-a/n) of the volume, so that da/dk = exp(-a/n) and of k proposals
//
//	a = n ln(1 + k/n)
//
// are accepted. Of proposals that are above their own threshold with probability 1/m,
// k are worth k/m.

// oneThreshold is the efficiency by that law: a over the k/m of workers that do not
// disturb one another.
func oneThreshold(live, workers int, s slot) float64 {
	k := float64(workers)
	if !s.fixed {
		k /= float64(s.calls)
	}
	n := float64(live)
	return n * math.Log1p(k/n) / k
}

// playThreshold plays the schedule for proposals that are all above their threshold,
// and returns the accepted points per round. The live points are kept as the prior
// volumes above their likelihoods: fair draws are uniform in them.
func playThreshold(rng *rand.Rand, live, workers, rounds int) float64 {
	volume := make(volumes, live-1)
	for i := range volume {
		volume[i] = rng.Float64()
	}
	heap.Init(&volume)
	accepted := 0
	for range rounds {
		threshold := 1.0
		for range workers {
			if v := rng.Float64(); v < threshold {
				heap.Push(&volume, v)
				threshold = heap.Pop(&volume).(float64)
				accepted++
			}
		}
		for i := range volume { // in units of the next round's volume
			volume[i] /= threshold
		}
	}
	return float64(accepted) / float64(rounds)
}

// volumes is a heap with the largest on top.
type volumes []float64

var _ heap.Interface = (*volumes)(nil)

func (v volumes) Len() int           { return len(v) }
func (v volumes) Less(i, j int) bool { return v[i] > v[j] }
func (v volumes) Swap(i, j int)      { v[i], v[j] = v[j], v[i] }
func (v *volumes) Push(x any)        { *v = append(*v, x.(float64)) }
func (v *volumes) Pop() any {
	old := *v
	x := old[len(old)-1]
	*v = old[:len(old)-1]
	return x
}
