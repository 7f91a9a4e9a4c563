package sampler

import (
	"context"
	"fmt"
	"math"

	"knell/internal/random"
)

// priorPatience bounds the draws for the first live points, in units of their
// number, where most of the prior has zero likelihood.
const priorPatience = 5000

// usualDepth is the compression, in nats, that memory for dead points is set
// aside for at first.
const usualDepth = 32

// begin draws a block from the prior, until there are as many points of non-zero
// likelihood as the run has live points there, or patience ends. Before, the live
// points stand in the order in which they were drawn.
func (r *runner) begin(ctx context.Context) error {
	n, o := r.out.LivePoints, r.out
	limit := int64(max(n, r.set.LivePoints)) * priorPatience
	if m := r.set.MaxCalls; m != 0 {
		limit = min(limit, max(m-r.before, int64(n)))
	}
	if len(r.l) == n || o.PriorDraws >= limit {
		return r.sorted()
	}
	// As many draws again as it took so far, so that few are in vain.
	block := int64(n)
	if o.PriorDraws > 0 {
		block = min(o.PriorDraws, int64(64*n))
	}
	block = min(block, limit-o.PriorDraws)
	var fresh slots
	fresh.resize(int(block), r.dim)
	base := uint64(o.PriorDraws)
	err := r.of.pool.each(ctx, int(block), func(w *worker, slot int) error {
		rng := random.New(r.set.Seed, "prior", r.run, base+uint64(slot))
		w.calls = 0
		for k := range w.cube {
			w.cube[k] = rng.Float64()
		}
		v, err := w.at(w.cube)
		copy(fresh.u[slot*r.dim:], w.cube)
		fresh.l[slot] = v
		return err
	})
	if err != nil {
		return err
	}
	before := len(r.l)
	for i, v := range fresh.l {
		if len(r.l) == n {
			break // draws beyond the last needed one do not count
		}
		o.PriorDraws++
		if math.IsInf(v, -1) {
			o.PriorZeros++
			continue
		}
		r.u = append(r.u, fresh.u[i*r.dim:(i+1)*r.dim]...)
		r.l = append(r.l, v)
	}
	o.Calls += block
	r.phase[fromPrior].Calls += block
	r.phase[fromPrior].Points += int64(len(r.l) - before)
	return nil
}

// sorted ends the draws from the prior.
func (r *runner) sorted() error {
	o := r.out
	if n := o.LivePoints; n > 0 {
		if len(r.l) == 0 && r.path == nil {
			return fmt.Errorf("sampler: the likelihood is zero at all %d points drawn from the prior, want some above zero", o.PriorDraws)
		}
		if len(r.l) < n/2 && r.path == nil {
			o.note("only %d of %d draws from the prior have non-zero likelihood: narrow the prior", len(r.l), o.PriorDraws)
		}
		o.openEnded = len(r.l) == n
		r.logX = o.priorShrinkage().mean
	}
	u, l := r.u, r.l
	r.flat = make([]float64, 0, usualDepth*len(l)*r.dim)
	r.u, r.l = make([]float64, 0, len(u)), make([]float64, 0, len(l))
	for _, i := range rising(l) {
		r.u = append(r.u, u[int(i)*r.dim:(int(i)+1)*r.dim]...)
		r.l = append(r.l, l[i])
		r.birth = append(r.birth, math.Inf(-1))
		r.strand = append(r.strand, r.strands)
		r.strands++
	}
	r.begun = true
	return nil
}
