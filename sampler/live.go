package sampler

import (
	"cmp"
	"math"
	"slices"
)

// bury moves the k lowest live points to the dead ones, with the live numbers
// n, n-1, ..., n-k+1.
func (r *runner) bury(k int) {
	n := len(r.l)
	r.beginStrands()
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
	r.buryStrands(k)
	r.u = append(r.u[:0], r.u[k*r.dim:]...)
	r.l = append(r.l[:0], r.l[k:]...)
}

// insert merges the fresh points, drawn above the threshold, into the sorted
// live ones.
func (r *runner) insert(threshold float64) {
	order := make([]int, len(r.fresh.l))
	for i := range order {
		order[i] = i
	}
	slices.SortStableFunc(order, func(a, b int) int { return cmp.Compare(r.fresh.l[a], r.fresh.l[b]) })
	old, d := len(r.l), r.dim
	n := old + len(order)
	r.u = slices.Grow(r.u, len(order)*d)[:n*d]
	r.l = slices.Grow(r.l, len(order))[:n]
	r.birth = slices.Grow(r.birth, len(order))[:n]
	r.strand = slices.Grow(r.strand, len(order))[:n]
	i, j := old-1, len(order)-1
	for at := n - 1; j >= 0; at-- { // from the top, so that nothing is overwritten
		if f := order[j]; i < 0 || r.fresh.l[f] >= r.l[i] {
			r.l[at] = r.fresh.l[f]
			r.birth[at], r.strand[at] = threshold, r.strandOf(f)
			copy(r.u[at*d:(at+1)*d], r.fresh.u[f*d:(f+1)*d])
			j--
		} else {
			r.l[at] = r.l[i]
			r.birth[at], r.strand[at] = r.birth[i], r.strand[i]
			copy(r.u[at*d:(at+1)*d], r.u[i*d:(i+1)*d])
			i--
		}
	}
	r.strands += int32(max(0, len(order)-len(r.freed)))
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
	if m := r.memory; m.peak > doubtfulMemory {
		// A warning, not a doubt: walkers also stay where islands of likelihood part
		// within one cluster, which moves no evidence that the tests can see.
		o.note("slices of %.0f steps still remember their start (correlation %.2f): use more live points and compare", mostSteps*m.least, m.peak)
	}
	for i := range o.LogLikelihood {
		o.Points = append(o.Points, r.flat[i*r.dim:(i+1)*r.dim:(i+1)*r.dim])
	}
	for m, p := range r.phase {
		if p.Calls > 0 {
			p.Name = method(m).String()
			o.Phases = append(o.Phases, p)
		}
	}
	o.ranks, o.rankMethods = r.ranks.u, r.ranks.by
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
