package sampler

import (
	"context"
	"fmt"
	"sync"
	"sync/atomic"
)

// pool is the workers of a run.
type pool struct {
	dim     int
	workers []*worker
}

func newPool(newTarget func() (Target, error), first Target, workers int) (*pool, error) {
	p := &pool{dim: first.Dim()}
	p.workers = append(p.workers, newWorker(first, p.dim))
	for len(p.workers) < workers {
		t, err := newTarget()
		if err != nil {
			return nil, fmt.Errorf("sampler: target of worker %d: %w", len(p.workers), err)
		}
		if d := t.Dim(); d != p.dim {
			return nil, fmt.Errorf("sampler: target of worker %d has %d dimensions, want %d as the first", len(p.workers), d, p.dim)
		}
		p.workers = append(p.workers, newWorker(t, p.dim))
	}
	return p, nil
}

// each calls f for the slots 0 to n-1 on the workers and returns the error of
// the lowest slot that failed. Slots are taken in order and a failure lets the
// slots already taken finish, so that error is the same for any number of
// workers. A cancelled context wins over every other error.
func (p *pool) each(ctx context.Context, n int, f func(w *worker, slot int) error) error {
	var (
		next   atomic.Int64
		failed atomic.Bool
		wg     sync.WaitGroup
		mu     sync.Mutex
		first  error
		at     int
	)
	work := func(w *worker) {
		for !failed.Load() && ctx.Err() == nil {
			slot := int(next.Add(1)) - 1
			if slot >= n {
				return
			}
			if err := f(w, slot); err != nil {
				failed.Store(true)
				mu.Lock()
				if first == nil || slot < at {
					first, at = err, slot
				}
				mu.Unlock()
			}
		}
	}
	for _, w := range p.workers[1:min(len(p.workers), max(n, 1))] {
		wg.Add(1)
		go func() {
			defer wg.Done()
			work(w)
		}()
	}
	work(p.workers[0])
	wg.Wait()
	if err := ctx.Err(); err != nil && (first != nil || int(next.Load()) < n) {
		return err
	}
	return first
}
