package sampler

import (
	"context"
	"math"
	"math/rand/v2"
)

// method is a way to draw a point above a threshold.
type method int

const (
	automatic  method = iota
	fromPrior         // rejection from the whole cube
	fromUnion         // rejection from the union of ellipsoids
	fromSlices        // slice sampling from a live point
)

var methodNames = [...]string{"", "prior", "ellipsoids", "slices"}

func (m method) String() string { return methodNames[m] }

const (
	// priorCalls is the number of calls per point up to which the whole cube
	// is used: no fitted region can miss anything there.
	priorCalls = 2.5

	// sliceCallsGuess is the calls per slice step before any were counted.
	sliceCallsGuess = 4

	// fewSurvivors is the share of the live points below which slices, which
	// start from them, count as fewPenalty times as dear.
	fewSurvivors = 0.25
	fewPenalty   = 20
)

// stage is what the slots of one batch share and only read.
type stage struct {
	method    method
	threshold float64   // nats; a new point must lie above it
	u         []float64 // n×dim, the survivors in the cube
	l         []float64 // their log-likelihoods
	bound     *bound    // may be nil, except for fromUnion
	steps     int       // slice steps per point
	limit     int64     // calls after which a slot leaves rejection for slices
}

// choose returns the cheapest fair method and the calls it is expected to take
// per point. A region of volume V that holds the region above the threshold,
// of volume X, takes V/X calls; X is known from the shrinkage to a few parts in
// a hundred. sliceCalls is the measured cost of a point by slices.
func choose(logX float64, b *bound, sliceCalls float64, force method) (method, float64) {
	prior := math.Exp(-logX)
	union := math.Inf(1)
	if b != nil {
		union = math.Exp(b.logVolume - logX)
	}
	switch {
	case force == fromSlices && prior > 1:
		return fromSlices, sliceCalls
	case force == fromPrior, prior <= priorCalls, prior <= union && prior <= sliceCalls:
		return fromPrior, prior
	case force == fromUnion && b != nil, union <= sliceCalls:
		return fromUnion, union
	}
	return fromSlices, sliceCalls
}

// draw puts one draw from the prior above the stage's threshold into w.cube and
// returns its log-likelihood.
func (w *worker) draw(ctx context.Context, s *stage, rng *rand.Rand) (float64, error) {
	if s.method == fromSlices {
		return w.slice(ctx, s, rng)
	}
	for w.calls < s.limit || len(s.l) == 0 {
		if err := ctx.Err(); err != nil {
			return 0, err
		}
		if s.method == fromPrior {
			for k := range w.cube {
				w.cube[k] = rng.Float64()
			}
		} else {
			for try := 0; !s.bound.propose(rng, w.x, w.trial); try++ {
				if try%1024 == 1023 && ctx.Err() != nil {
					return 0, ctx.Err()
				}
			}
			s.bound.frame.outOf(w.x, w.cube)
		}
		l, err := w.at(w.cube)
		if err != nil {
			return 0, err
		}
		if l > s.threshold {
			return l, nil
		}
	}
	return w.slice(ctx, s, rng)
}
