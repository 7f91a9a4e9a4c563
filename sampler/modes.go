package sampler

import (
	"math"
	"runtime"
	"slices"
)

const (
	// modePoints is the most live points looked at on one level. The cost of a
	// level is their square times the dimension.
	modePoints = 600

	// modeLevels are the likelihoods looked at, evenly apart in ln X from the
	// prior to where modeTail of the posterior is left above.
	modeLevels = 32
	modeTail   = 1e-3

	// leastShare is the posterior share below which a mode is not counted
	// apart from its neighbour.
	leastShare = 1e-3

	// modeChance is the probability, roughly, that one mode is taken for two.
	modeChance = 1e-4
)

// Mode is a part of the posterior that comes apart from the rest above some
// likelihood.
type Mode struct {
	LogEvidence Quantity // ln of the integral of L over its region, nats
	Share       Quantity // of the posterior
	Best        int      // index of its point of the highest likelihood
	Points      int      // dead points in it
	Parted      float64  // log-likelihood at which it was seen to part, -Inf for the only one
}

// Modes finds the separate modes of the outcome, those of more evidence first,
// and the mode of each point. Their evidences sum to that of the outcome. The
// errors come from resampled strands; they do not hold the chance that the run
// lost a mode, nor how the part of the prior below the parting is divided, which
// is by which mode's live points are nearest.
//
// At each of a row of likelihoods the live points are a uniform sample of the
// region above it. They are linked each to its k nearest, in the metric of how
// neighbours lie about one another; a region has come apart when the links do. For a uniform sample of
// a connected region this has a probability of about n exp(-0.81 k) even along a
// line, the worst case: that n Exp(1) gap be longer than the k gaps to its left,
// and than the k to its right, is at most the largest of
// exp(-g) P(Gamma(k) < g)² over g, at g = 2k/3. k is chosen so that all levels
// together have a probability of 1e-4. So a mode is found only if more than k,
// about 25, of up to 600 live points are in it at some level after it has
// parted; where in doubt there is one.
func (o *Outcome) Modes() (modes []Mode, of []int) {
	of = make([]int, len(o.LogLikelihood))
	if len(of) == 0 {
		return nil, of
	}
	parted := []float64{math.Inf(-1)}
	if o.hasStrands() {
		parted = o.part(of)
	}
	k := len(parted)
	share := make([]float64, k)
	for i, m := range of {
		share[m] += math.Exp(o.LogWeight[i])
	}
	// In order of share, and numbered so.
	order := make([]int, k)
	for m := range order {
		order[m] = m
	}
	slices.SortStableFunc(order, func(a, b int) int {
		if share[a] > share[b] {
			return -1
		}
		if share[a] < share[b] {
			return 1
		}
		return a - b
	})
	place := make([]int, k)
	modes = make([]Mode, k)
	for at, m := range order {
		place[m] = at
		modes[at] = Mode{LogEvidence: Quantity{o.LogEvidence + math.Log(share[m]), math.NaN()}, Share: Quantity{share[m], math.NaN()}, Parted: parted[m]}
	}
	for i, m := range of {
		of[i] = place[m]
		modes[of[i]].Points++
		modes[of[i]].Best = i // likelihoods rise
	}
	if k == 1 {
		modes[0].LogEvidence.Error, modes[0].Share.Error = o.LogEvidenceError, 0
		return modes, of
	}
	r := o.resample(nil)
	z, shares := make([]float64, k*r.most), make([]float64, k*r.most)
	r.each(runtime.GOMAXPROCS(0), func(at int, logZ float64, weight []float64) {
		mine := make([]float64, k)
		for i, w := range weight {
			mine[of[i]] += w
		}
		for m, s := range mine {
			shares[m*r.most+at] = s
			z[m*r.most+at] = logZ + math.Log(s)
		}
	})
	for m := range modes {
		modes[m].Share.Error = r.spread(shares[m*r.most : (m+1)*r.most])
		modes[m].LogEvidence.Error = r.spread(z[m*r.most : (m+1)*r.most])
	}
	return modes, of
}

// territory is a part of the outcome's points during the search.
type territory struct {
	points []int // indices of all its dead points
	level  int   // first level not yet looked at
	parted float64
}

// part sets of to the mode of each point and returns where each parted.
func (o *Outcome) part(of []int) (parted []float64) {
	levels := o.levels()
	all := make([]int, len(of))
	for i := range all {
		all[i] = i
	}
	rest := []territory{{all, 0, math.Inf(-1)}}
	for len(rest) > 0 {
		g := rest[len(rest)-1]
		rest = rest[:len(rest)-1]
		if parts := o.divide(g, levels); parts != nil {
			rest = append(rest, parts...)
			continue
		}
		for _, i := range g.points {
			of[i] = len(parted)
		}
		parted = append(parted, g.parted)
	}
	return parted
}

// divide looks for the lowest level on which a region comes apart into parts of
// enough posterior, and returns nil if there is none.
func (o *Outcome) divide(g territory, levels []int) []territory {
	for ; g.level < len(levels); g.level++ {
		at := levels[g.level]
		threshold := o.LogLikelihood[at]
		var live []int
		for _, i := range g.points {
			if i > at && o.LogLikelihood[i] > threshold && o.Birth[i] <= threshold {
				live = append(live, i)
			}
		}
		c := newLinks(o, thin(live, modePoints))
		if c == nil || c.count < 2 {
			continue
		}
		nearest := c.assign(o, g.points)
		share := make([]float64, c.count)
		for j, i := range g.points {
			share[nearest[j]] += math.Exp(o.LogWeight[i])
		}
		// Parts of too little posterior go to the largest.
		largest, counted := 0, 0
		for m, s := range share {
			if s > share[largest] {
				largest = m
			}
			if s >= leastShare {
				counted++
			}
		}
		if counted < 2 {
			continue
		}
		parts := make([]territory, c.count)
		for j, i := range g.points {
			m := nearest[j]
			if share[m] < leastShare {
				m = largest
			}
			parts[m].points = append(parts[m].points, i)
		}
		var kept []territory
		for m, p := range parts {
			if share[m] >= leastShare {
				p.level, p.parted = g.level+1, threshold
				kept = append(kept, p)
			}
		}
		return kept
	}
	return nil
}

// levels returns the dead points at whose likelihoods to look.
func (o *Outcome) levels() []int {
	n := len(o.LogLikelihood)
	last, above := n-1, 0.0
	for last > 0 && above < modeTail {
		above += math.Exp(o.LogWeight[last])
		last--
	}
	var depth, x float64
	for _, live := range o.LiveCount[:last+1] {
		depth += 1 / float64(live)
	}
	var at []int
	for i, live := range o.LiveCount[:last+1] {
		if x += 1 / float64(live); x >= depth*float64(len(at)+1)/(modeLevels+1) {
			at = append(at, i)
		}
	}
	return at
}

// thin returns at most n of the values, evenly apart.
func thin(v []int, n int) []int {
	if len(v) <= n {
		return v
	}
	out := make([]int, n)
	for i := range out {
		out[i] = v[i*len(v)/n]
	}
	return out
}
