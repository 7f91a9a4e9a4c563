package main

import (
	"container/heap"
	"math/rand/v2"
)

// schedule is how work is handed out. Batch b replaces live/share points, one slot
// each. Workers take slots in order, the oldest batch's first, and do the calls of a
// slot one after another. Batch b is issued once batch b - inFlight is complete and the
// main goroutine has spent its own time on it.
//
// Not in it: a point that lands below what the threshold has become meanwhile is replaced
// by the next batch, so that real batches have up to a tenth more slots.
type schedule struct {
	share    int
	inFlight int
	own      float64 // in call times
}

// size is the slots of a batch.
func (s schedule) size(live int) int { return max(1, live/s.share) }

// play returns the efficiency of so many batches on so many workers. times fills in
// the times of the slots of one batch.
//
// Slots are taken in order and batches are issued in order, so that the next slot
// always goes to the worker that is free first: that is the whole simulation. It costs
// ln(workers) per slot.
func (s schedule) play(workers, size, batches int, times func(slot []float64)) float64 {
	var (
		free     = make(moments, workers)   // when each worker is free
		complete = make([]float64, batches) // when each batch is
		slot     = make([]float64, size)
		main     float64 // when the main goroutine is free
		busy     float64
	)
	for b := range batches {
		issued := main
		if b >= s.inFlight {
			issued = max(issued, complete[b-s.inFlight])
		}
		issued += s.own
		main = issued
		times(slot)
		for _, t := range slot {
			busy += t
			free[0] = max(free[0], issued) + t
			complete[b] = max(complete[b], free[0])
			heap.Fix(&free, 0)
		}
	}
	var end float64
	for _, t := range free {
		end = max(end, t)
	}
	return busy / (float64(workers) * end)
}

// batchTimes returns a function that draws the times of a batch's slots.
func batchTimes(rng *rand.Rand, s slot, c callTimes) func([]float64) {
	return func(slot []float64) {
		for i := range slot {
			slot[i] = c.sum(rng, s.draw(rng))
		}
		if c.onePerBatch {
			slot[rng.IntN(len(slot))] += slow - 1
		}
	}
}

// moments is a heap with the earliest on top.
type moments []float64

var _ heap.Interface = (*moments)(nil)

func (m moments) Len() int           { return len(m) }
func (m moments) Less(i, j int) bool { return m[i] < m[j] }
func (m moments) Swap(i, j int)      { m[i], m[j] = m[j], m[i] }
func (m *moments) Push(x any)        { *m = append(*m, x.(float64)) }
func (m *moments) Pop() any {
	old := *m
	x := old[len(old)-1]
	*m = old[:len(old)-1]
	return x
}
