package sampler

import (
	"cmp"
	"slices"
)

// path is what an addition to an outcome follows: levels of the likelihood, and
// how many live points the addition has above each. The levels come from the
// outcome alone, so the addition is a run of its own whose live number changes
// at thresholds that its draws have no part in.
type path struct {
	first int       // live points drawn from the prior
	level []float64 // nats, rising
	want  []int     // live points above each
	logX  []float64 // expected ln of the volume above each
}

// companions are the live points that finished parts have at a level.
// Ellipsoids are fitted to them and to the addition's own, and slices begin at
// either.
type companions struct {
	parts []*Outcome
	order [][]int32 // the points of each part as they were born
	born  []int     // of order, up to the level
	alive [][]int32 // live above the level, rising
}

func newCompanions(parts []*Outcome) *companions {
	c := &companions{parts: slices.Clone(parts), born: make([]int, len(parts)), alive: make([][]int32, len(parts))}
	for _, o := range parts {
		order := make([]int32, len(o.Birth))
		for i := range order {
			order[i] = int32(i)
		}
		slices.SortStableFunc(order, func(a, b int32) int { return cmp.Compare(o.Birth[a], o.Birth[b]) })
		c.order = append(c.order, order)
	}
	return c
}

// rise goes to a threshold and returns how many are live above it. Thresholds must
// not fall from call to call.
func (c *companions) rise(threshold float64) int {
	total := 0
	for p, o := range c.parts {
		keep := c.alive[p][:0]
		for _, i := range c.alive[p] {
			if o.LogLikelihood[i] > threshold {
				keep = append(keep, i)
			}
		}
		for order := c.order[p]; c.born[p] < len(order) && o.Birth[order[c.born[p]]] <= threshold; c.born[p]++ {
			if i := order[c.born[p]]; o.LogLikelihood[i] > threshold {
				keep = append(keep, i)
			}
		}
		slices.Sort(keep)
		c.alive[p] = keep
		total += len(keep)
	}
	return total
}

// above appends the live points above the threshold to u and l, thinned evenly
// in their likelihoods to about most.
func (c *companions) above(threshold float64, most int, u, l []float64) ([]float64, []float64) {
	total := c.rise(threshold)
	for p, o := range c.parts {
		keep := c.alive[p]
		n := len(keep)
		if total > most {
			n = n * most / total
		}
		for j := range n {
			i := keep[j*len(keep)/n]
			u = append(u, o.Points[i]...)
			l = append(l, o.LogLikelihood[i])
		}
	}
	return u, l
}

// likelihoods appends those of all live points above the threshold to l: thinned
// ones would not be like a new point.
func (c *companions) likelihoods(threshold float64, l []float64) []float64 {
	c.rise(threshold)
	for p, o := range c.parts {
		for _, i := range c.alive[p] {
			l = append(l, o.LogLikelihood[i])
		}
	}
	return l
}

// below returns the n points that died last at or below the threshold, in order.
func (c *companions) below(threshold float64, n int) []float64 {
	type place struct {
		l       float64
		part, i int
	}
	var last []place
	for p, o := range c.parts {
		end, _ := slices.BinarySearchFunc(o.LogLikelihood, threshold, upTo)
		for i := max(0, end-n); i < end; i++ {
			last = append(last, place{o.LogLikelihood[i], p, i})
		}
	}
	slices.SortStableFunc(last, func(a, b place) int { return cmp.Compare(a.l, b.l) })
	var u []float64
	for _, at := range last[max(0, len(last)-n):] {
		u = append(u, c.parts[at.part].Points[at.i]...)
	}
	return u
}

// upTo finds the first value above a threshold by binary search.
func upTo(l, threshold float64) int {
	if l <= threshold {
		return -1
	}
	return 1
}

// follow goes to the next level of the path.
func (r *runner) follow() {
	p := r.path
	if r.level == len(p.level) {
		r.ending = true
		return
	}
	r.threshold = p.level[r.level]
	k, _ := slices.BinarySearchFunc(r.l, r.threshold, upTo)
	r.bury(k)
	r.logX = p.logX[r.level]
	count := p.want[r.level] - len(r.l) - r.pending
	r.level++
	if count <= 0 {
		return
	}
	u, l := r.beside.above(r.threshold, max(r.set.LivePoints, DefaultLivePoints), r.stagingU[:0], r.stagingL[:0])
	u, l = append(u, r.u...), append(l, r.l...)
	r.stagingU, r.stagingL = u, l
	r.send(u, l, count)
}
