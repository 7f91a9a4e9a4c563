package sampler

import (
	"cmp"
	"slices"

	"knell/internal/random"
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
	lot   [][]float64 // of each point: where there are too many, the low ones stay
	order [][]int32   // the points of each part as they were born
	born  []int       // of order, up to the level
	alive [][]int32   // live above the level, rising
}

func newCompanions(parts []*Outcome, rng *random.Rand) *companions {
	c := &companions{parts: slices.Clone(parts), born: make([]int, len(parts)), alive: make([][]int32, len(parts))}
	for _, o := range parts {
		c.order = append(c.order, rising(o.Birth))
		lot := make([]float64, len(o.Birth))
		for i := range lot {
			lot[i] = rng.Float64()
		}
		c.lot = append(c.lot, lot)
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

// above appends about most of the live points above the threshold to u and l, by
// lot: a choice by their order would not be like new points.
func (c *companions) above(threshold float64, most int, u, l []float64) ([]float64, []float64) {
	c.choose(threshold, most, func(o *Outcome, i int32) {
		u = append(u, o.Points[i]...)
		l = append(l, o.LogLikelihood[i])
	})
	return u, l
}

// likelihoods appends those of the same points to l.
func (c *companions) likelihoods(threshold float64, most int, l []float64) []float64 {
	c.choose(threshold, most, func(o *Outcome, i int32) { l = append(l, o.LogLikelihood[i]) })
	return l
}

func (c *companions) choose(threshold float64, most int, visit func(o *Outcome, i int32)) {
	share := float64(most) / float64(max(1, c.rise(threshold)))
	for p, o := range c.parts {
		for _, i := range c.alive[p] {
			if c.lot[p][i] < share {
				visit(o, i)
			}
		}
	}
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

// companions is the number of them that bounds are fitted to, and the most strands
// of one addition.
func (s Settings) companions() int { return max(s.LivePoints, DefaultLivePoints) }

// overdue reports whether the oldest flight has been in the air for as much
// compression as InFlight levels. Where nothing needs replacing until it lands, it
// would otherwise stay there to the end.
func (r *runner) overdue() bool {
	if r.path == nil || len(r.flights) == 0 || r.level == 0 {
		return false
	}
	at, _ := slices.BinarySearch(r.path.level, r.flights[0].stage.threshold)
	return r.path.logX[min(at, len(r.path.logX)-1)]-r.logX >= InFlight*growthStep*(1-1e-9)
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
	u, l := r.beside.above(r.threshold, r.set.companions(), r.stagingU[:0], r.stagingL[:0])
	u, l = append(u, r.u...), append(l, r.l...)
	r.stagingU, r.stagingL = u, l
	r.send(u, l, count)
}
