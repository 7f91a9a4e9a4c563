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

// usualDepth is the compression, in nats, that memory for dead points is set
// aside for at first.
const usualDepth = 32

// begin draws from the prior until there are as many points of non-zero
// likelihood as the run has live points there, or patience ends.
func (r *runner) begin(ctx context.Context) error {
	n := r.out.LivePoints
	if n == 0 {
		return nil
	}
	limit := int64(n) * priorPatience
	if m := r.set.MaxCalls; m != 0 {
		limit = min(limit, max(m-r.before, int64(n)))
	}
	out := Outcome{}
	var order []int
	var u, l []float64
	var fresh slots
	block := n
	for len(l) < n && out.PriorDraws < limit {
		block = int(min(int64(block), limit-out.PriorDraws))
		fresh.resize(block, r.dim)
		base := uint64(out.PriorDraws)
		err := r.of.pool.each(ctx, block, func(w *worker, slot int) error {
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
		out.Calls += int64(block)
		for i, v := range fresh.l {
			if len(l) == n {
				break // draws beyond the last needed one do not count
			}
			out.PriorDraws++
			if math.IsInf(v, -1) {
				out.PriorZeros++
				continue
			}
			u = append(u, fresh.u[i*r.dim:(i+1)*r.dim]...)
			l = append(l, v)
		}
		// As many draws again as it took so far, so that few are in vain.
		block = int(min(out.PriorDraws, int64(64*n)))
	}
	r.out.Calls, r.out.PriorDraws, r.out.PriorZeros = out.Calls, out.PriorDraws, out.PriorZeros
	r.phase[fromPrior].Calls += out.Calls
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
	r.flat = make([]float64, 0, usualDepth*n*r.dim)
	for _, i := range order {
		r.u = append(r.u, u[i*r.dim:(i+1)*r.dim]...)
		r.l = append(r.l, l[i])
		r.birth = append(r.birth, math.Inf(-1))
		r.strand = append(r.strand, r.strands)
		r.strands++
	}
	return nil
}
