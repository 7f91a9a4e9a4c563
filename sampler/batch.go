package sampler

import (
	"context"
	"errors"
	"fmt"
	"math"
	"math/rand/v2"
	"slices"

	"knell/internal/random"
)

const (
	// batchShare: a batch removes this share of the live points at once. Twice
	// as many leave workers idle half as often, and thresholds staler.
	batchShare = 16

	// rebuildStep is the compression, in nats, after which the ellipsoids are
	// fitted anew. Until then they are too large by at most this much.
	rebuildStep = 0.1

	// priorPatience bounds the draws for the first live points, in units of
	// their number, where most of the prior has zero likelihood.
	priorPatience = 5000

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

	out   *Outcome
	flat  []float64 // dead points, n×dim
	phase [len(methodNames)]Phase

	logX       float64 // expected ln of the volume above the last removed point
	logZ       float64 // expected ln Z of the dead points
	moment     float64 // sum of w L ln L / Z over the dead points, for the information
	bound      *bound
	boundX     float64 // logX when it was built
	sliceCalls float64 // measured calls per point by slices

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
}

func (s *slots) resize(n, dim int) {
	s.u = slices.Grow(s.u[:0], n*dim)[:n*dim]
	s.l = slices.Grow(s.l[:0], n)[:n]
	s.calls = slices.Grow(s.calls[:0], n)[:n]
}

func newRunner(p *pool, s Settings, run int, prior ledger) *runner {
	return &runner{
		pool: p, set: s, dim: p.dim, run: uint64(run), prior: prior,
		out:        &Outcome{seed: s.Seed, LivePoints: s.LivePoints, Runs: 1},
		logZ:       math.Inf(-1),
		sliceCalls: sliceCallsGuess * float64(s.SliceSteps),
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
			r.out.note("MaxCalls = %d reached with ln(1 + Z'/Z) = %.3g nat remaining, %.3g wanted", most, r.remaining(), r.set.Remaining)
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

// begin draws from the prior until there are LivePoints points of non-zero
// likelihood, or patience ends.
func (r *runner) begin(ctx context.Context) error {
	n := r.set.LivePoints
	limit := int64(n) * priorPatience
	if m := r.set.MaxCalls; m != 0 {
		limit = min(limit, max(m-r.prior.calls, int64(n)))
	}
	var order []int
	var u, l []float64
	block := n
	for len(l) < n && r.out.PriorDraws < limit {
		block = int(min(int64(block), limit-r.out.PriorDraws))
		r.fresh.resize(block, r.dim)
		base := uint64(r.out.PriorDraws)
		err := r.pool.each(ctx, block, func(w *worker, slot int) error {
			rng := random.New(r.set.Seed, "prior", r.run, base+uint64(slot))
			w.calls = 0
			for k := range w.cube {
				w.cube[k] = rng.Float64()
			}
			v, err := w.at(w.cube)
			copy(r.fresh.u[slot*r.dim:], w.cube)
			r.fresh.l[slot] = v
			return err
		})
		if err != nil {
			return err
		}
		r.out.Calls += int64(block)
		for i, v := range r.fresh.l {
			if len(l) == n {
				break // draws beyond the last needed one do not count
			}
			r.out.PriorDraws++
			if math.IsInf(v, -1) {
				r.out.PriorZeros++
				continue
			}
			u = append(u, r.fresh.u[i*r.dim:(i+1)*r.dim]...)
			l = append(l, v)
		}
		// As many draws again as it took so far, so that few are in vain.
		block = int(min(r.out.PriorDraws, int64(64*n)))
	}
	r.phase[fromPrior].Calls += r.out.Calls
	r.phase[fromPrior].Points += int64(len(l))
	if len(l) == 0 {
		return fmt.Errorf("sampler: the likelihood is zero at all %d points drawn from the prior, want some above zero", r.out.PriorDraws)
	}
	if len(l) < n/2 {
		r.out.note("only %d of %d draws from the prior have non-zero likelihood: narrow the prior", len(l), r.out.PriorDraws)
	}
	r.out.openEnded = len(l) == n
	r.logX = r.out.priorShrinkage().mean
	for i := range l {
		order = append(order, i)
	}
	slices.SortStableFunc(order, func(a, b int) int { return compare(l[a], l[b]) })
	for _, i := range order {
		r.u = append(r.u, u[i*r.dim:(i+1)*r.dim]...)
		r.l = append(r.l, l[i])
	}
	return nil
}

func compare(a, b float64) int {
	switch {
	case a < b:
		return -1
	case a > b:
		return 1
	}
	return 0
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
	st := &stage{threshold: r.l[k-1], u: r.u[k*r.dim:], l: r.l[k:], steps: r.set.SliceSteps}
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
		w.calls = 0
		l, err := w.draw(ctx, st, rng.Rand)
		copy(r.fresh.u[slot*r.dim:], w.cube)
		r.fresh.l[slot] = l
		r.fresh.calls[slot] = w.calls
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
	}
	rng := random.New(r.set.Seed, "rank", r.run, iteration)
	r.ranks.begin(st.l)
	for _, l := range r.fresh.l {
		r.ranks.enter(l, rng.Rand)
	}
	r.bury(k)
	r.insert()
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

// bury moves the k lowest live points to the dead ones, with the live numbers
// n, n-1, ..., n-k+1.
func (r *runner) bury(k int) {
	n := len(r.l)
	for i := range k {
		live := n - i
		r.out.LogLikelihood = append(r.out.LogLikelihood, r.l[i])
		r.out.LiveCount = append(r.out.LiveCount, live)
		logW := r.logX + math.Log(-math.Expm1(-1/float64(live))) + r.l[i]
		r.logX -= 1 / float64(live)
		sum := logAdd(r.logZ, logW)
		r.moment = r.moment*math.Exp(r.logZ-sum) + r.l[i]*math.Exp(logW-sum)
		r.logZ = sum
	}
	r.flat = append(r.flat, r.u[:k*r.dim]...)
	r.u = append(r.u[:0], r.u[k*r.dim:]...)
	r.l = append(r.l[:0], r.l[k:]...)
}

// insert merges the fresh points into the sorted live ones.
func (r *runner) insert() {
	order := make([]int, len(r.fresh.l))
	for i := range order {
		order[i] = i
	}
	slices.SortStableFunc(order, func(a, b int) int { return compare(r.fresh.l[a], r.fresh.l[b]) })
	old, d := len(r.l), r.dim
	n := old + len(order)
	r.u = slices.Grow(r.u, len(order)*d)[:n*d]
	r.l = slices.Grow(r.l, len(order))[:n]
	i, j := old-1, len(order)-1
	for at := n - 1; j >= 0; at-- { // from the top, so that nothing is overwritten
		if f := order[j]; i < 0 || r.fresh.l[f] >= r.l[i] {
			r.l[at] = r.fresh.l[f]
			copy(r.u[at*d:(at+1)*d], r.fresh.u[f*d:(f+1)*d])
			j--
		} else {
			r.l[at] = r.l[i]
			copy(r.u[at*d:(at+1)*d], r.u[i*d:(i+1)*d])
			i--
		}
	}
}

// liveMean is ln of the mean likelihood of the live points.
func (r *runner) liveMean() float64 {
	top := r.l[len(r.l)-1]
	var sum float64
	for _, l := range r.l {
		sum += math.Exp(l - top)
	}
	return top + math.Log(sum/float64(len(r.l)))
}

// remaining is ln(1 + Z'/Z).
func (r *runner) remaining() float64 {
	if math.IsInf(r.logZ, -1) {
		return math.Inf(1)
	}
	return logAdd(0, r.liveMean()+r.logX-r.logZ)
}

// finish counts the live points, each removed in turn, and weighs the run.
func (r *runner) finish() {
	r.bury(len(r.l))
	o := r.out
	for i := range o.LogLikelihood {
		o.Points = append(o.Points, r.flat[i*r.dim:(i+1)*r.dim:(i+1)*r.dim])
	}
	for m, p := range r.phase {
		if p.Calls > 0 {
			p.Name = method(m).String()
			o.Phases = append(o.Phases, p)
		}
	}
	o.ranks = r.ranks.u
}

func logAdd(a, b float64) float64 {
	if a < b {
		a, b = b, a
	}
	if math.IsInf(a, -1) {
		return a
	}
	return a + math.Log1p(math.Exp(b-a))
}
