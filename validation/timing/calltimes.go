package main

import (
	"math"
	"math/rand/v2"
)

const (
	// slow is how many times longer than the rest a slow call takes.
	slow = 50
	// rare is one over the share of slow calls where they come by chance.
	rare = 100
)

// callTimes says how long calls take.
type callTimes struct {
	name string
	// sum draws the time of so many calls, one after another.
	sum func(rng *rand.Rand, calls int) float64
	// onePerBatch makes one call of one slot of each batch, drawn at random, slow
	// times longer.
	onePerBatch bool
}

// laws are the call times that are simulated, in the order of the tables.
func laws() []callTimes {
	equal := func(_ *rand.Rand, calls int) float64 { return float64(calls) }
	return []callTimes{
		{name: "equal", sum: equal},
		{name: "exponential", sum: func(rng *rand.Rand, calls int) float64 {
			// -ln of a product of uniform numbers, which 16 at a time cannot underflow.
			var t float64
			for calls > 0 {
				product := 1.0
				for range min(calls, 16) {
					product *= 1 - rng.Float64()
				}
				t -= math.Log(product)
				calls -= 16
			}
			return t
		}},
		{name: "1 in 100 slow", sum: func(rng *rand.Rand, calls int) float64 {
			t := float64(calls)
			for at := geometric(rng, rare); at <= calls; at += geometric(rng, rare) {
				t += slow - 1
			}
			return t
		}},
		{name: "1 per batch slow", sum: equal, onePerBatch: true},
	}
}
