package sampler

import (
	"math"
	"math/rand/v2"
	"slices"

	"knell/internal/random"
)

const (
	// A batch removes a share 1/BatchShare of the known live points, and up to InFlight
	// batches of replacements are drawn at the same time: a slow likelihood call
	// holds up nobody until that many batches wait for it. The points in flight
	// are not known yet, so more of them leave fewer to fit ellipsoids to.
	BatchShare, InFlight = 32, 4

	// shrinkStep is the compression, in nats, after which the ellipsoids are drawn
	// in; until then they are too large by at most this much. They are fitted anew
	// after rebuildStep, or fitsStep where one is all that is needed.
	shrinkStep, rebuildStep, fitsStep = 0.1, 0.15, 0.6

	// slotPatience is how many times the expected calls a slot spends on
	// rejection before it turns to slices: e^-40 is never by chance.
	slotPatience = 40
)

// send begins a batch of count points above the threshold, given the live
// points to start from.
func (r *runner) send(u, l []float64, count int) {
	f := r.newFlight()
	f.batch, f.seed, f.run = r.batches, r.set.Seed, r.run
	f.stage = stage{
		threshold: r.threshold, steps: int(r.memory.steps),
		u: append(f.stage.u[:0], u...), l: append(f.stage.l[:0], l...),
	}
	r.prepare(&f.stage)
	f.strand = f.strand[:0]
	for i := range count {
		if i < len(r.freed) {
			f.strand = append(f.strand, r.freed[i])
			continue
		}
		f.strand = append(f.strand, r.strands)
		r.strands++
	}
	r.freed = append(r.freed[:0], r.freed[min(count, len(r.freed)):]...)
	r.batches++
	r.pending += count
	r.launch(f)
	r.flights = append(r.flights, f)
}

func (r *runner) launch(f *flight) {
	f.next, f.done, f.last, f.err, f.errSlot = 0, 0, 0, nil, 0
	f.fresh.resize(f.count(), r.dim)
	r.of.crew.send(f)
}

func (r *runner) newFlight() *flight {
	if n := len(r.spare); n > 0 {
		f := r.spare[n-1]
		r.spare = r.spare[:n-1]
		return f
	}
	return &flight{}
}

// land takes in the oldest batch.
func (r *runner) land() error {
	f := r.flights[0]
	if err := r.of.crew.wait(f); err != nil {
		return err
	}
	count := f.count()
	var spent int64
	for _, c := range f.fresh.calls {
		spent += c
	}
	st := &f.stage
	r.out.Calls += spent
	r.phase[st.method].Calls += spent
	r.phase[st.method].Points += int64(count)
	calls := float64(spent) / float64(count)
	if st.method == fromSlices {
		r.sliceCalls += 0.2 * (calls - r.sliceCalls)
		r.sliceCalls *= r.memory.learn(st, &f.fresh)
	}
	r.rank(f)
	r.insert(f)
	r.pending -= count
	r.flights = append(r.flights[:0], r.flights[1:]...)
	r.out.Iterations++
	r.report(st.method, 1/calls)
	r.spare = append(r.spare, f)
	return nil
}

// rank notes the ranks of a flight's points among all live points that are known,
// as the points enter one after another. Those that the threshold has passed in
// the meantime have none: the others are uniform above it, as those they are
// compared with, whichever flights landed before.
func (r *runner) rank(f *flight) {
	rng := random.New(r.set.Seed, "rank", r.run, f.batch)
	r.stagingL = append(r.stagingL[:0], r.l...)
	if r.path != nil {
		r.stagingL = r.beside.likelihoods(r.threshold, r.set.companions(), r.stagingL)
	}
	r.ranks.begin(r.stagingL)
	for _, l := range f.fresh.l {
		if l > r.threshold {
			r.ranks.enter(l, rng.Rand)
		}
	}
	r.ranks.mark(f.stage.method)
}

// prepare chooses how a batch is drawn.
func (r *runner) prepare(st *stage) {
	n := len(st.l)
	enough := 2*n >= r.set.LivePoints
	stream := func(i int) *rand.Rand {
		return random.New(r.set.Seed, "bound", r.run, r.batches, uint64(i)).Rand
	}
	needs := math.Exp(-r.logX) > priorCalls && enough
	switch {
	case needs && (r.bound == nil || r.boundX-r.logX > r.bound.lasts()):
		if b := newBound(r.recent(n), st.u, r.dim, r.logX, r.set.Periodic, r.set.Reflective, r.bound, r.set.Workers, stream); b != nil {
			r.bound, r.boundX, r.shrunkX = b, r.logX, r.logX
		}
	case needs && r.shrunkX-r.logX > shrinkStep:
		r.bound, r.shrunkX = r.bound.shrunk(st.u), r.logX
	}
	slice := r.sliceCalls
	if float64(n) < fewSurvivors*float64(r.set.LivePoints) {
		slice *= fewPenalty
	}
	var calls float64
	st.bound = r.bound
	st.method, calls = choose(r.logX, r.bound, slice, r.set.force)
	st.limit = int64(slotPatience*calls) + 200
}

// lasts is the compression, in nats, after which a bound is fitted anew.
func (b *bound) lasts() float64 {
	if b.fits {
		return fitsStep
	}
	return rebuildStep
}

// recent returns the points that were removed last, as many as help n live ones.
func (r *runner) recent(n int) []float64 {
	if r.path != nil {
		return r.beside.below(r.threshold, lookBack(r.dim, n))
	}
	return r.flat[max(0, len(r.flat)-lookBack(r.dim, n)*r.dim):]
}

// insert merges the points of a flight into the sorted live ones. Those that the
// threshold has passed in the meantime are dead.
func (r *runner) insert(f *flight) {
	order := rising(f.fresh.l)
	d := r.dim
	late := 0
	for ; late < len(order) && f.fresh.l[order[late]] <= r.threshold; late++ {
		i := int(order[late])
		r.dies(f.fresh.u[i*d:(i+1)*d], f.fresh.l[i], f.stage.threshold, f.strand[i])
	}
	order = order[late:]
	old := len(r.l)
	n := old + len(order)
	r.u = slices.Grow(r.u, len(order)*d)[:n*d]
	r.l = slices.Grow(r.l, len(order))[:n]
	r.birth = slices.Grow(r.birth, len(order))[:n]
	r.strand = slices.Grow(r.strand, len(order))[:n]
	i, j := old-1, len(order)-1
	for at := n - 1; j >= 0; at-- { // from the top, so that nothing is overwritten
		if s := int(order[j]); i < 0 || f.fresh.l[s] >= r.l[i] {
			r.l[at], r.birth[at], r.strand[at] = f.fresh.l[s], f.stage.threshold, f.strand[s]
			copy(r.u[at*d:(at+1)*d], f.fresh.u[s*d:(s+1)*d])
			j--
		} else {
			r.l[at], r.birth[at], r.strand[at] = r.l[i], r.birth[i], r.strand[i]
			copy(r.u[at*d:(at+1)*d], r.u[i*d:(i+1)*d])
			i--
		}
	}
}
