package sampler

import (
	"fmt"
	"math"
	"math/rand/v2"
	"slices"
	"sort"
)

// ranks collects the insertion ranks of a run. The new points of a flight enter
// one after another; each takes its rank among the live points known when it
// landed and those that entered before it. If the draws are fair, all these ranks are independent and
// uniform (MNRAS 497, 5256 (2020)).
type ranks struct {
	order []float64 // sorted log-likelihoods of known and entered points
	u     []float64 // rank made continuous on [0, 1)
	by    []uint8   // method that drew each
}

// begin starts a flight with the log-likelihoods of the known live points.
func (r *ranks) begin(known []float64) {
	r.order = append(r.order[:0], known...)
	slices.Sort(r.order)
}

// enter adds a point. Its place among equals, and within its rank, is random.
func (r *ranks) enter(l float64, rng *rand.Rand) {
	lo := sort.SearchFloat64s(r.order, l)
	hi := lo
	for hi < len(r.order) && r.order[hi] == l {
		hi++
	}
	rank := lo + rng.IntN(hi-lo+1)
	r.u = append(r.u, (float64(rank)+rng.Float64())/float64(len(r.order)+1))
	r.order = slices.Insert(r.order, lo, l)
}

// mark says that the ranks since the last call are of points drawn by m.
func (r *ranks) mark(m method) {
	for len(r.by) < len(r.u) {
		r.by = append(r.by, uint8(m))
	}
}

// uniformP returns the p-value of the Kolmogorov-Smirnov test that u is drawn
// from the uniform distribution on [0, 1), or 1 for fewer than 8 values. u is
// left as it is.
func uniformP(u []float64) float64 {
	n := len(u)
	if n < 8 {
		return 1
	}
	s := slices.Clone(u)
	slices.Sort(s)
	var d float64
	for i, x := range s {
		d = max(d, x-float64(i)/float64(n), float64(i+1)/float64(n)-x)
	}
	// Finite-n correction of the limit law: J. R. Stat. Soc. B 32,
	// 115 (1970), from memory.
	root := math.Sqrt(float64(n))
	return kolmogorovTail((root + 0.12 + 0.11/root) * d)
}

// kolmogorovTail is the upper tail of the Kolmogorov distribution,
// 2 Σ (-1)^(j-1) exp(-2 j² x²).
func kolmogorovTail(x float64) float64 {
	if x < 0.2 { // 1 - 5e-13 there, and the series converges slowly
		return 1
	}
	var sum float64
	sign := 1.0
	for j := 1.0; j <= 100; j++ {
		term := math.Exp(-2 * j * j * x * x)
		sum += sign * term
		sign = -sign
		if term < 1e-18 {
			break
		}
	}
	return min(1, max(0, 2*sum))
}

// blockP tests blocks of about n consecutive ranks, which sees trouble confined
// to a part of the run, and returns the least p-value corrected for the number
// of blocks.
func blockP(u []float64, n int) float64 {
	blocks := max(1, len(u)/max(n, 1))
	least := 1.0
	for i := range blocks {
		least = min(least, uniformP(u[i*len(u)/blocks:(i+1)*len(u)/blocks]))
	}
	return -math.Expm1(float64(blocks) * math.Log1p(-min(least, 1-1e-16)))
}

// testRanks sets the p-values of the insertion ranks of the whole and of each
// phase.
func (o *Outcome) testRanks() {
	block := o.LivePoints / max(o.Runs, 1)
	o.InsertionRankP = uniformP(o.ranks)
	o.InsertionRankBlockP = blockP(o.ranks, block)
	known := len(o.rankMethods) == len(o.ranks)
	for i := range o.Phases {
		p := &o.Phases[i]
		var u []float64
		for j, x := range o.ranks {
			if known && methodNames[o.rankMethods[j]] == p.Name {
				u = append(u, x)
			}
		}
		p.Ranks = int64(len(u))
		p.InsertionRankP = uniformP(u)
		p.InsertionRankBlockP = blockP(u, block)
	}
}

// unfair warns of ranks that are not uniform, and returns the doubt, with the
// phase at fault if one shows it by itself. A phase's p-values are corrected for
// the number of phases.
func (o *Outcome) unfair() string {
	whole := min(o.InsertionRankP, o.InsertionRankBlockP)
	worst, least, tested := -1, 1.0, 0.0
	for i, p := range o.Phases {
		if p.Ranks == 0 {
			continue
		}
		tested++
		if q := min(p.InsertionRankP, p.InsertionRankBlockP); q < least {
			worst, least = i, q
		}
	}
	if least *= tested; worst >= 0 && least < doubtfulP {
		name := o.Phases[worst].Name
		o.Warnings = append(o.Warnings, fmt.Sprintf("insertion ranks are not uniform where points were drawn from %s: p = %.2g", name, min(whole, least)))
		return "new points were not drawn fairly from " + name + ": " + cure[name]
	}
	if whole < doubtfulP {
		o.Warnings = append(o.Warnings, fmt.Sprintf("insertion ranks are not uniform: p = %.2g", whole))
		return "new points were not drawn fairly: use more live points"
	}
	return ""
}

// cure says what helps against unfair draws of each phase. Draws from the whole
// cube cannot be unfair, unless the likelihood is not a function of the point.
var cure = map[string]string{
	fromPrior.String():  "see whether the likelihood gives the same value at the same point",
	fromUnion.String():  "use more live points",
	fromSlices.String(): "use more slice steps or more live points",
}
