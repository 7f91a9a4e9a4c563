package sampler

import (
	"context"
	"slices"

	"knell/internal/random"
)

// flight is a batch of draws on its way. Its stage is a copy: the live points go
// on changing while it is drawn.
type flight struct {
	batch  uint64 // its number in the run
	seed   uint64
	run    uint64
	stage  stage
	strand []int32 // that each slot's point continues or begins
	fresh  slots

	// Owned by the crew.
	next, done int // slots taken, slots finished
	last       int // slots taken when one failed
	err        error
	errSlot    int
	landed     chan struct{}
}

func (f *flight) count() int { return len(f.strand) }

// draw fills a slot. Its random stream is its own, so it does not matter when or
// by which worker it is drawn.
func (f *flight) draw(ctx context.Context, w *worker, slot int) error {
	rng := random.New(f.seed, "draw", f.run, f.batch, uint64(slot))
	w.calls, w.start = 0, -1
	l, err := w.draw(ctx, &f.stage, rng.Rand)
	copy(f.fresh.u[slot*len(w.cube):], w.cube)
	f.fresh.l[slot] = l
	f.fresh.calls[slot] = w.calls
	f.fresh.start[slot] = w.start
	return err
}

// slots are the results of a batch.
type slots struct {
	u     []float64
	l     []float64
	calls []int64
	start []int // see worker.start
}

func (s *slots) resize(n, dim int) {
	s.u = slices.Grow(s.u[:0], n*dim)[:n*dim]
	s.l = slices.Grow(s.l[:0], n)[:n]
	s.calls = slices.Grow(s.calls[:0], n)[:n]
	s.start = slices.Grow(s.start[:0], n)[:n]
}
