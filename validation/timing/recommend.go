package main

import (
	"context"
	"math"
)

// enough is the efficiency that recommended live points reach.
const enough = 0.9

// recommend returns the least number of live points, to 5 %, whose efficiency is
// enough, or 0 if mostSearched are too few. efficiency is taken for rising in live
// points.
func recommend(ctx context.Context, s schedule, workers int, efficiency func(live int) float64) int {
	// Fewer slots in the air than that leave workers without one.
	low := max(leastLive, int(enough*float64(workers*s.share)/float64(s.inFlight)))
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

const (
	leastLive    = 32
	mostSearched = 1_000_000
)
