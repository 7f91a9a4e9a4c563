package sampler

import "fmt"

// check finds what would make a state that decodes break the run later: slices
// that do not belong together and numbers out of their range.
func (s *state) check(dim int) error {
	bad := func(what string, got any, want string) error {
		return &ResumeError{what, fmt.Sprint(got), want}
	}
	for i := range s.Parts {
		if p := &s.Parts[i]; len(p.LogLikelihood) == 0 || !p.whole(dim) || len(p.Ranks) != len(p.RankMethods) {
			return bad(fmt.Sprintf("part %d", i), "not whole", "points, likelihoods, births and strands alike in number")
		}
	}
	if s.Merged < 0 || s.Merged > len(s.Parts) {
		return bad("number of merged parts", s.Merged, fmt.Sprintf("0 to %d", len(s.Parts)))
	}
	k := s.Runner
	if k == nil {
		return nil
	}
	known := len(k.L)
	// Before the first draws are complete, births and strands are not given yet.
	if len(k.U) != known*dim || k.Begun && (len(k.Birth) != known || len(k.Strand) != known) || !k.Out.whole(dim) || len(k.Out.Ranks) != len(k.Out.RankMethods) {
		return bad("run under way", "not whole", "points, likelihoods, births and strands alike in number")
	}
	if len(k.Phase) != len(methodNames) || len(k.Memory.Correlation) != dim || k.Level < 0 || len(k.Flights) > InFlight {
		return bad("run under way", "not whole", "phases, correlations and flights of this version")
	}
	if k.Addition != (len(s.Parts) > 0) || k.Addition && s.Merged == 0 {
		return bad("run under way", fmt.Sprintf("an addition: %v", k.Addition), "an addition after the first run, and only then")
	}
	for i, b := range k.Bounds {
		if !b.whole(dim) {
			return bad(fmt.Sprintf("bound %d", i), "not whole", fmt.Sprintf("ellipsoids in %d dimensions", dim))
		}
	}
	if k.Bound < 0 || k.Bound > len(k.Bounds) {
		return bad("number of the bound", k.Bound, fmt.Sprintf("0 to %d", len(k.Bounds)))
	}
	for i, f := range k.Flights {
		if f.Bound < 0 || f.Bound > len(k.Bounds) || f.Method < fromPrior || f.Method > fromSlices || f.Method == fromUnion && f.Bound == 0 ||
			len(f.L) == 0 || len(f.U) != len(f.L)*dim || len(f.Strand) == 0 {
			return bad(fmt.Sprintf("flight %d", i), "not whole", "a way to draw and the points to start from")
		}
	}
	return nil
}

// whole reports whether the slices of a part belong together.
func (p *partState) whole(dim int) bool {
	n := len(p.LogLikelihood)
	for _, s := range p.Strand {
		if s < 0 {
			return false
		}
	}
	for _, m := range p.RankMethods {
		if int(m) >= len(methodNames) {
			return false
		}
	}
	return len(p.Flat) == n*dim && len(p.Birth) == n && len(p.Strand) == n
}

// whole reports whether the parts of a bound belong together.
func (b *boundState) whole(dim int) bool {
	n := len(b.Ellipsoids)
	if b.Dim != dim || n == 0 || len(b.Points)%dim != 0 || len(b.Pooled) != dim*dim || b.Way < 0 || b.Way >= len(ways) ||
		len(b.Tight) != n || len(b.Cumulative) != n || len(b.Weight) != n || len(b.Mode) != n ||
		len(b.Shift) != 0 && len(b.Shift) != dim || len(b.Wall) != 0 && len(b.Wall) != dim {
		return false
	}
	points := len(b.Points) / dim
	for c, e := range b.Ellipsoids {
		if len(e.Mean) != dim || len(e.Factor) != dim*dim || len(e.Inverse) != dim*dim || b.Mode[c] < 0 || b.Mode[c] >= n {
			return false
		}
		for _, i := range e.Members {
			if i < 0 || i >= points {
				return false
			}
		}
	}
	return true
}
