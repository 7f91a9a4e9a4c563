package main

import (
	"fmt"
	"math"
	"math/rand/v2"
)

// slot says how many calls draw one new point.
type slot struct {
	calls int  // mean
	fixed bool // always as many, as slices take; else a geometric number, as rejection does
}

// slots are those of the numbers of calls asked for. With one call both ways are the
// same.
func slots(calls []int) []slot {
	var all []slot
	for _, c := range calls {
		if c > 1 {
			all = append(all, slot{c, false})
		}
		all = append(all, slot{c, true})
	}
	return all
}

// draw returns the calls of one slot.
func (s slot) draw(rng *rand.Rand) int {
	if s.fixed || s.calls == 1 {
		return s.calls
	}
	return geometric(rng, s.calls)
}

// geometric draws the number of the first success of trials with probability 1/mean
// each, by inversion; mean is 2 at least.
func geometric(rng *rand.Rand, mean int) int {
	u := 1 - rng.Float64() // above 0
	return 1 + int(math.Log(u)/math.Log1p(-1/float64(mean)))
}

// drawing is the name of the way of drawing.
func (s slot) drawing() string {
	switch {
	case s.calls == 1:
		return "any"
	case s.fixed:
		return "slices"
	}
	return "rejection"
}

func (s slot) String() string {
	switch {
	case s.calls == 1:
		return "1 call"
	case s.fixed:
		return fmt.Sprintf("%d calls, slices", s.calls)
	}
	return fmt.Sprintf("%d calls on average, rejection", s.calls)
}
