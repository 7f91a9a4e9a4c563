package sampler

import (
	"fmt"
	"math"
	"slices"
)

// A strand is the thread of one live point: a point drawn from the prior, the
// point that replaced it when it was removed, and so on to the end of the run.
// Each is a run with one live point. A run of n live points is n of them, and
// they are independent, so that resampling them gives the sampling error
// (arXiv:1704.03459, arXiv:1703.09701).
//
// Points that are removed together are replaced together, above the highest of
// them: between its own likelihood and that threshold such a strand has no live
// point. A strand may also begin above a likelihood, and end before the run
// does. Birth keeps all this exactly. At every dead point i
//
//	LiveCount[i] = (number of points with Birth < LogLikelihood[i]) - i
//
// which holds on plateaus too, since nothing is drawn until all of a plateau is
// gone. The cost is 12 bytes per point.

// strandJoin carries the strands of several outcomes into their merger.
type strandJoin struct {
	outcomes []*Outcome
	offset   []int32 // added to the strand numbers of each; nil if some are not known
}

func joinStrands(outcomes []*Outcome) strandJoin {
	j := strandJoin{outcomes: outcomes}
	var offset []int32
	next := int32(0)
	for _, o := range outcomes {
		if o == nil || !o.hasStrands() {
			return j
		}
		offset = append(offset, next)
		next += slices.Max(o.Strand) + 1
	}
	j.offset = offset
	return j
}

// take appends what is known of point i of outcome number part to m.
func (j *strandJoin) take(m *Outcome, part, i int) {
	if j.offset == nil {
		return
	}
	o := j.outcomes[part]
	m.Birth = append(m.Birth, o.Birth[i])
	m.Strand = append(m.Strand, o.Strand[i]+j.offset[part])
}

// hasStrands reports whether the strands are known.
func (o *Outcome) hasStrands() bool {
	n := len(o.LogLikelihood)
	return n > 0 && len(o.Birth) == n && len(o.Strand) == n
}

// Strands returns the indices of the points of each strand, in rising order.
// Strands of the same start and end are independent runs of one live point each.
// nil where they are not known.
func (o *Outcome) Strands() [][]int {
	if !o.hasStrands() {
		return nil
	}
	all := make([][]int, slices.Max(o.Strand)+1)
	for i, s := range o.Strand {
		all[s] = append(all[s], i)
	}
	return all
}

// Subset returns the outcome of some of the strands alone, as a run of that many
// live points: halves of a run are independent of one another but for the first
// shrinkage where the likelihood is zero on a part of the prior, which they
// share. Points are shared with o. Calls, phases and ranks stay with o. The subsets
// of one run are not for Merge, which would count the first draws twice.
func (o *Outcome) Subset(strands []int) (*Outcome, error) {
	all := o.Strands()
	if all == nil {
		return nil, fmt.Errorf("sampler: Subset of an outcome whose strands are not known")
	}
	chosen := make([]bool, len(all))
	m := &Outcome{seed: o.seed, Runs: 1, PriorDraws: o.PriorDraws, PriorZeros: o.PriorZeros,
		openEnded: o.openEnded, periodic: o.periodic, Status: o.Status, Partial: o.Partial}
	for _, s := range strands {
		if s < 0 || s >= len(all) || chosen[s] {
			return nil, fmt.Errorf("sampler: Subset: strand %d, want each of 0 to %d at most once", s, len(all)-1)
		}
		chosen[s] = true
		m.LivePoints++
	}
	fromPrior := false
	for i, s := range o.Strand {
		if !chosen[s] {
			continue
		}
		fromPrior = fromPrior || math.IsInf(o.Birth[i], -1)
		m.Points = append(m.Points, o.Points[i])
		m.LogLikelihood = append(m.LogLikelihood, o.LogLikelihood[i])
		m.Birth = append(m.Birth, o.Birth[i])
		m.Strand = append(m.Strand, s)
	}
	if !fromPrior {
		return nil, fmt.Errorf("sampler: Subset of %d strands, none of which begins at the prior", len(strands))
	}
	m.LiveCount = liveCounts(m.LogLikelihood, m.Birth)
	m.weigh(1)
	m.bootstrapError(1)
	m.judge()
	return m, nil
}

// liveCounts returns the live numbers of dead points of rising likelihood.
func liveCounts(logL, birth []float64) []int {
	sorted := slices.Clone(birth)
	slices.Sort(sorted)
	live := make([]int, len(logL))
	born := 0
	for i, l := range logL {
		for born < len(sorted) && sorted[born] < l {
			born++
		}
		live[i] = born - i
	}
	return live
}
