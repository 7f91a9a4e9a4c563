package sampler

import (
	"context"
	"errors"
	"math"
	"math/rand/v2"
	"slices"

	"knell/internal/random"
)

const (
	// A batch removes LivePoints/BatchShare live points at once, and up to
	// InFlight batches of replacements are drawn at the same time.
	BatchShare, InFlight = 32, 4

	batchShare = 16

	// rebuildStep is the compression, in nats, after which the ellipsoids are
	// fitted anew. Until then they are too large by at most this much.
	rebuildStep = 0.1

	// slotPatience is how many times the expected calls a slot spends on
	// rejection before it turns to slices: e^-40 is never by chance.
	slotPatience = 40
)

// runner is one run under way.
type runner struct {
	pool *pool
	set  Settings
	dim  int
	run  uint64

	u []float64 // live points, n×dim, in order of rising likelihood
	l []float64

	birth   []float64 // of the live points, as Outcome.Birth and Outcome.Strand
	strand  []int32
	freed   []int32 // strands of the points removed last
	strands int32   // begun so far

	out   *Outcome
	flat  []float64 // dead points, n×dim
	phase [len(methodNames)]Phase

	logX       float64 // expected ln of the volume above the last removed point
	logZ       float64 // expected ln Z of the dead points
	moment     float64 // sum of w L ln L / Z over the dead points, for the information
	bound      *bound
	boundX     float64 // logX when it was built
	sliceCalls float64 // measured calls per point by slices
	memory     memory  // of slices, and how many steps they need

	ranks ranks
	fresh slots
	prior ledger
	part  float64 // share of this run done, never falling
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

func newRunner(p *pool, s Settings, run int, prior ledger) *runner {
	return &runner{
		pool: p, set: s, dim: p.dim, run: uint64(run), prior: prior,
		out:        &Outcome{seed: s.Seed, LivePoints: s.LivePoints, Runs: 1, periodic: s.Periodic},
		logZ:       math.Inf(-1),
		sliceCalls: sliceCallsGuess * float64(s.SliceSteps),
		memory:     newMemory(p.dim, s.SliceSteps),
	}
}

// whole goes from the first live points to a weighed outcome.
func (r *runner) whole(ctx context.Context) (*Outcome, error) {
	if err := r.begin(ctx); err != nil {
		return nil, err
	}
	for {
		if r.remaining() < r.set.Remaining {
			break
		}
		if most := r.set.MaxCalls; most != 0 && r.prior.calls+r.out.Calls >= most {
			r.out.Status, r.out.Partial = CallLimit, true
			r.out.note("the limit of %d calls was reached with ln(1 + Z'/Z) = %.3g nat remaining, %.3g wanted", most, r.remaining(), r.set.Remaining)
			break
		}
		again, err := r.batch(ctx)
		if err != nil {
			if ctx.Err() == nil || !errors.Is(err, ctx.Err()) {
				return nil, err
			}
			r.out.Status, r.out.Partial = Interrupted, true
			r.out.note("interrupted with ln(1 + Z'/Z) = %.3g nat remaining, %.3g wanted", r.remaining(), r.set.Remaining)
			break
		}
		if !again {
			break
		}
	}
	r.finish()
	return r.out, nil
}

// batch removes the lowest live points and replaces them. It reports false if
// all live points are on one plateau, and leaves the run unchanged on an error.
func (r *runner) batch(ctx context.Context) (bool, error) {
	n := len(r.l)
	k := max(1, min(r.set.LivePoints, n)/batchShare)
	for k < n && r.l[k] == r.l[k-1] { // a plateau goes as a whole
		k++
	}
	if k == n {
		return false, nil
	}
	st := &stage{threshold: r.l[k-1], u: r.u[k*r.dim:], l: r.l[k:], steps: int(r.memory.steps)}
	logX := r.logX
	for i := range k {
		logX -= 1 / float64(n-i)
	}
	r.prepare(st, logX)
	count := r.set.LivePoints - len(st.l)
	r.fresh.resize(count, r.dim)
	iteration := uint64(r.out.Iterations)
	err := r.pool.each(ctx, count, func(w *worker, slot int) error {
		rng := random.New(r.set.Seed, "draw", r.run, iteration, uint64(slot))
		w.calls, w.start = 0, -1
		l, err := w.draw(ctx, st, rng.Rand)
		copy(r.fresh.u[slot*r.dim:], w.cube)
		r.fresh.l[slot] = l
		r.fresh.calls[slot] = w.calls
		r.fresh.start[slot] = w.start
		return err
	})
	if err != nil {
		return false, err
	}
	var spent int64
	for _, c := range r.fresh.calls {
		spent += c
	}
	r.out.Calls += spent
	r.phase[st.method].Calls += spent
	r.phase[st.method].Points += int64(count)
	calls := float64(spent) / float64(count)
	if st.method == fromSlices {
		r.sliceCalls += 0.2 * (calls - r.sliceCalls)
		r.sliceCalls *= r.memory.learn(st, &r.fresh)
	}
	rng := random.New(r.set.Seed, "rank", r.run, iteration)
	r.ranks.begin(st.l)
	for _, l := range r.fresh.l {
		r.ranks.enter(l, rng.Rand)
	}
	r.ranks.mark(st.method)
	r.bury(k)
	r.insert(st.threshold)
	r.out.Iterations++
	r.report(st.method, 1/calls)
	return true, nil
}

// prepare chooses how the batch draws.
func (r *runner) prepare(st *stage, logX float64) {
	enough := 2*len(st.l) >= r.set.LivePoints
	if needs := math.Exp(-logX) > priorCalls; needs && enough && (r.bound == nil || r.boundX-logX > rebuildStep) {
		stream := func(i int) *rand.Rand {
			return random.New(r.set.Seed, "bound", r.run, uint64(r.out.Iterations), uint64(i)).Rand
		}
		if b := newBound(st.u, r.dim, logX, r.set.Periodic, r.bound, r.set.Workers, stream); b != nil {
			r.bound, r.boundX = b, logX
		}
	}
	slice := r.sliceCalls
	if float64(len(st.l)) < fewSurvivors*float64(r.set.LivePoints) {
		slice *= fewPenalty
	}
	var calls float64
	st.bound = r.bound
	st.method, calls = choose(logX, r.bound, slice, r.set.force)
	st.limit = int64(slotPatience*calls) + 200
}
