package trials

import (
	"context"
	"sync"
)

// Run makes runs of every case, one after another as workers come free: all of the
// first case, then all of the second, and so on, so that cases end in about that
// order. one is called by several goroutines at once with the numbers of the case and
// of the run, and with a function to tell the fraction done; it returns what is kept of
// the run and whether that is finished. ended is called with the runs of each case, in
// the order of the cases, by one goroutine at a time, as soon as the case and all
// before it are finished; after ctx is cancelled, with what there is of the others, so
// that it is called for each case exactly once.
//
// Results are kept by number, so they do not depend on the number of workers.
func Run[T any](ctx context.Context, m *Meter, one func(at, run int, tell func(fraction float64)) (result T, finished bool), ended func(at int, runs []T)) {
	var (
		mu      sync.Mutex // of next, left and told
		next    int
		told    int // cases that ended was called for
		results = make([][]T, len(m.cases))
		left    = make([]int, len(m.cases))
		wg      sync.WaitGroup
	)
	for i := range results {
		results[i] = make([]T, m.runs)
		left[i] = m.runs
	}
	take := func() (task int, ok bool) {
		mu.Lock()
		defer mu.Unlock()
		if ctx.Err() != nil || next == len(m.cases)*m.runs {
			return 0, false
		}
		next++
		return next - 1, true
	}
	for w := range m.workers() {
		wg.Add(1)
		go func() {
			defer wg.Done()
			for {
				task, ok := take()
				if !ok {
					return
				}
				at, run := task/m.runs, task%m.runs
				m.begin(w, at)
				r, finished := one(at, run, func(fraction float64) { m.update(w, fraction) })
				mu.Lock()
				results[at][run] = r
				if finished {
					left[at]--
				}
				m.end(w, finished)
				for told < len(left) && left[told] == 0 {
					ended(told, results[told])
					told++
				}
				mu.Unlock()
			}
		}()
	}
	wg.Wait()
	for ; told < len(left); told++ {
		ended(told, results[told])
	}
}
