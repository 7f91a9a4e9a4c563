package main

import (
	"context"
	"math"

	"knell/validation/trials"
)

// enough is the efficiency that recommended live points reach.
const enough = 0.9

// recommend returns the least number of live points, to 5 %, whose efficiency is
// enough, or 0 if mostSearched are too few. efficiency is taken for rising in live
// points from least on.
func recommend(ctx context.Context, least int, efficiency func(live int) float64) int {
	low := least
	if ctx.Err() != nil || efficiency(low) >= enough {
		return low
	}
	high := int(1.5 * float64(low))
	for ; efficiency(high) < enough; low, high = high, int(1.5*float64(high)) {
		if ctx.Err() != nil || high >= mostSearched {
			return 0
		}
	}
	for high > low+max(1, low/20) && ctx.Err() == nil {
		if middle := int(math.Sqrt(float64(low) * float64(high))); efficiency(middle) >= enough {
			high = middle
		} else {
			low = middle
		}
	}
	return high
}

// mostSearched ends the search.
const mostSearched = 1_000_000

// least is where the search can begin: with fewer slots in the air, workers have none.
// Where each batch has a slow call, batches of very few slots are nothing but slow calls,
// all alike and so no trouble, and are left out.
func least(s schedule, workers int, c callTimes) int {
	n := max(trials.LeastLive, int(enough*float64(workers*s.share)/float64(s.inFlight)))
	if c.onePerBatch {
		n = max(n, 8*s.share)
	}
	return n
}
