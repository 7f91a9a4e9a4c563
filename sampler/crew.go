package sampler

import (
	"context"
	"sync"
)

// crew is the goroutines that draw, one per worker of the pool. They take slots
// in order, of the oldest flight first, so that while one slot of a flight takes
// long the others go on with the next.
type crew struct {
	pool *pool
	ctx  context.Context

	mu      sync.Mutex
	work    sync.Cond // a flight was sent, or stopped was set
	flights []*flight // with slots not yet taken, oldest first
	stopped bool
	all     sync.WaitGroup
}

// newCrew starts the goroutines. stop ends them.
func newCrew(ctx context.Context, p *pool) *crew {
	c := &crew{pool: p, ctx: ctx}
	c.work.L = &c.mu
	for _, w := range p.workers {
		c.all.Add(1)
		go func() {
			defer c.all.Done()
			c.serve(w)
		}()
	}
	return c
}

// stop waits until the slots under way are over. No flight may be sent after.
func (c *crew) stop() {
	c.mu.Lock()
	c.stopped = true
	c.mu.Unlock()
	c.work.Broadcast()
	c.all.Wait()
}

// send has the slots of f drawn; wait tells when.
func (c *crew) send(f *flight) {
	f.landed = make(chan struct{})
	c.mu.Lock()
	c.flights = append(c.flights, f)
	c.mu.Unlock()
	c.work.Broadcast()
}

// wait returns once all slots of f are drawn, or with the error of its lowest
// slot that failed. Slots are taken in order and a failure lets those already
// taken finish, so that error is the same for any number of workers. A cancelled
// context wins over every other error.
func (c *crew) wait(f *flight) error {
	select {
	case <-f.landed:
	case <-c.ctx.Done():
		return c.ctx.Err()
	}
	if err := c.ctx.Err(); err != nil && f.err != nil {
		return err
	}
	return f.err
}

func (c *crew) serve(w *worker) {
	c.mu.Lock() // not held while a slot is drawn, so a panic there shows as it is
	for {
		for len(c.flights) == 0 && !c.stopped {
			c.work.Wait()
		}
		if c.stopped || c.ctx.Err() != nil {
			c.mu.Unlock()
			return
		}
		f := c.flights[0]
		slot := f.next
		if f.next++; f.next == f.count() {
			c.flights = append(c.flights[:0], c.flights[1:]...)
		}
		c.mu.Unlock()
		err := f.draw(c.ctx, w, slot)
		c.mu.Lock()
		f.done++
		if err != nil {
			if f.err == nil || slot < f.errSlot {
				f.err, f.errSlot = err, slot
			}
			// What was sent after it will not be asked for.
			f.last = f.next
			c.flights = c.flights[:0]
		}
		if f.done == f.count() || f.err != nil && f.done == f.last {
			close(f.landed)
		}
	}
}
