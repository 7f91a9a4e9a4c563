package sampler

import (
	"cmp"
	"context"
	"fmt"
	"math"
	"slices"

	"knell/internal/random"
)

// priorPatience bounds the draws for the first live points, in units of their
// number, where most of the prior has zero likelihood.
const priorPatience = 5000

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
	slices.SortStableFunc(order, func(a, b int) int { return cmp.Compare(l[a], l[b]) })
	for _, i := range order {
		r.u = append(r.u, u[i*r.dim:(i+1)*r.dim]...)
		r.l = append(r.l, l[i])
	}
	return nil
}
