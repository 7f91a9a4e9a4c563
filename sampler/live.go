package sampler

import "math"

// bury moves the k lowest known live points to the dead ones, with the live
// numbers n, n-1, ..., n-k+1 of those known.
func (r *runner) bury(k int) {
	n := len(r.l)
	for i := range k {
		live := float64(n - i)
		logW := r.logX + math.Log(-math.Expm1(-1/live)) + r.l[i]
		r.logX -= 1 / live
		if sum := logAdd(r.logZ, logW); !math.IsInf(sum, -1) {
			r.moment = r.moment*math.Exp(r.logZ-sum) + r.l[i]*math.Exp(logW-sum)
			r.logZ = sum
		}
		r.dies(r.u[i*r.dim:(i+1)*r.dim], r.l[i], r.birth[i], r.strand[i])
	}
	r.u = append(r.u[:0], r.u[k*r.dim:]...)
	r.l = append(r.l[:0], r.l[k:]...)
	r.birth = append(r.birth[:0], r.birth[k:]...)
	r.strand = append(r.strand[:0], r.strand[k:]...)
}

// dies adds a dead point.
func (r *runner) dies(u []float64, l, birth float64, strand int32) {
	r.flat = append(r.flat, u...)
	r.out.LogLikelihood = append(r.out.LogLikelihood, l)
	r.out.Birth = append(r.out.Birth, birth)
	r.out.Strand = append(r.out.Strand, strand)
	r.freed = append(r.freed, strand)
}

// liveMean is ln of the mean likelihood of the known live points.
func (r *runner) liveMean() float64 {
	if len(r.l) == 0 {
		return math.Inf(-1)
	}
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

// finish counts the known live points, each removed in turn, and puts the dead
// in order. What is still in flight is dropped: those strands end.
func (r *runner) finish() *Outcome {
	r.bury(len(r.l))
	o := r.out
	if m := r.memory; m.peak > doubtfulMemory {
		// A warning, not a doubt: walkers also stay where islands of likelihood part
		// within one cluster, which moves no evidence that the tests can see.
		o.note("slices of %.0f steps still remember their start (covariance of first and last place %.2f of the live points' own): use more live points and compare", mostSteps*m.least, m.peak)
	}
	n := len(o.LogLikelihood)
	l, birth, strand := o.LogLikelihood, o.Birth, o.Strand
	o.LogLikelihood, o.Birth, o.Strand = make([]float64, n), make([]float64, n), make([]int32, n)
	flat := make([]float64, n*r.dim)
	o.Points = make([][]float64, n)
	for at, i := range rising(l) {
		o.LogLikelihood[at], o.Birth[at], o.Strand[at] = l[i], birth[i], strand[i]
		o.Points[at] = flat[at*r.dim : (at+1)*r.dim : (at+1)*r.dim]
		copy(o.Points[at], r.flat[int(i)*r.dim:(int(i)+1)*r.dim])
	}
	o.LiveCount = liveCounts(o.LogLikelihood, o.Birth)
	for m, p := range r.phase {
		if p.Calls > 0 {
			p.Name = method(m).String()
			o.Phases = append(o.Phases, p)
		}
	}
	o.ranks, o.rankMethods = r.ranks.u, r.ranks.by
	return o
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
