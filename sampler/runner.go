package sampler

import (
	"context"
	"math"

	"knell/internal/random"
)

// runner is the first run, or an addition to it, under way. Its live points are
// those known, in order of rising likelihood and all above the threshold, and
// those in flight. A point that lands below the threshold dies at once; the next
// batch replaces it.
//
// Everything here between two steps is kept by a checkpoint (snapshot.go), and
// what comes next follows from it alone.
type runner struct {
	of     *growing
	set    Settings
	dim    int
	run    uint64 // number of the part, from 0
	before int64  // likelihood calls of earlier parts
	path   *path  // what an addition follows, nil in the first run
	beside *companions

	u         []float64 // known live points, n×dim
	l         []float64
	birth     []float64 // as Outcome.Birth and Outcome.Strand
	strand    []int32
	threshold float64 // of the last batch sent
	freed     []int32 // strands without a live point, to be continued first
	strands   int32   // begun so far
	flights   []*flight
	pending   int    // points in flight
	batches   uint64 // sent
	level     int    // next level of the path
	ending    bool   // no further batch is sent
	begun     bool

	out   *Outcome
	flat  []float64 // dead points, n×dim
	phase [len(methodNames)]Phase

	// Expected values by the known live points alone, without those that landed
	// below the threshold: for choices on the way, not for the outcome.
	logX   float64 // ln of the volume above the threshold
	logZ   float64 // ln Z of the dead points
	moment float64 // sum of w L ln L / Z over the dead points, for the information

	bound      *bound
	boundX     float64 // logX when it was built
	shrunkX    float64 // and when it was last drawn in
	sliceCalls float64 // measured calls per point by slices
	memory     memory  // of slices, and how many steps they need
	ranks      ranks
	part       float64 // share of this run done, never falling

	// Memory used again.
	spare              []*flight
	stagingU, stagingL []float64
}

func newRunner(g *growing, path *path) *runner {
	s, dim := g.set, g.pool.dim
	r := &runner{
		of: g, set: s, dim: dim, run: uint64(len(g.parts)), before: g.calls(), path: path,
		out:        &Outcome{seed: s.Seed, periodic: s.Periodic},
		logZ:       math.Inf(-1),
		threshold:  math.Inf(-1),
		sliceCalls: sliceCallsGuess * float64(s.SliceSteps),
		memory:     newMemory(dim, s.SliceSteps),
	}
	if path == nil {
		r.out.Runs, r.out.LivePoints = 1, s.LivePoints
	} else {
		r.out.LivePoints = path.first
		r.beside = newCompanions(g.parts, random.New(s.Seed, "companions", r.run))
	}
	return r
}

// step goes from one state worth keeping to the next: it takes in the oldest
// batch if there are enough of them on their way, and sends another. It reports
// false once all is done. An error leaves the state as it was.
func (r *runner) step(ctx context.Context) (bool, error) {
	switch {
	case !r.begun:
		return true, r.begin(ctx)
	case len(r.flights) == InFlight || r.ending && len(r.flights) > 0 || r.overdue():
		if err := r.land(); err != nil {
			return false, err
		}
		return true, nil
	case r.ending:
		return false, nil
	case r.path == nil:
		return true, r.next()
	}
	r.follow()
	return true, nil
}

// next removes the lowest live points and sends a batch to replace them.
func (r *runner) next() error {
	if r.remaining() < r.set.Remaining {
		r.ending = true
		return nil
	}
	n := len(r.l)
	k := max(1, n/BatchShare)
	for k < n && r.l[k] == r.l[k-1] { // a plateau goes as a whole
		k++
	}
	if k >= n {
		// All that is known is one plateau. What is in flight may be above it.
		if len(r.flights) > 0 {
			return r.land()
		}
		r.ending = true
		return nil
	}
	r.threshold = r.l[k-1]
	r.bury(k)
	r.send(r.u, r.l, r.set.LivePoints-len(r.l)-r.pending)
	return nil
}
