package sampler

import (
	"fmt"
	"slices"
)

// Merge joins outcomes of the same problem into the outcome of one run: dead
// points sorted by likelihood, and at any likelihood the live number the sum of
// those of the parts (Stat. Comput. 29, 891 (2019)). It is exact, and the parts
// are not changed. They must come from different seeds or run numbers; equal
// parts would count the same draws twice and are an error.
func Merge(outcomes ...*Outcome) (*Outcome, error) {
	return merge(outcomes, 1)
}

func merge(outcomes []*Outcome, workers int) (*Outcome, error) {
	if len(outcomes) == 0 {
		return nil, fmt.Errorf("sampler: Merge of 0 outcomes, want at least 1")
	}
	for i, o := range outcomes {
		if o == nil || len(o.Points) == 0 {
			return nil, fmt.Errorf("sampler: Merge: outcome %d has no points", i)
		}
	}
	first := outcomes[0]
	m := &Outcome{seed: first.seed, periodic: first.periodic}
	total := 0
	strands := joinStrands(outcomes)
	for i, o := range outcomes {
		if o.dim() != first.dim() {
			return nil, fmt.Errorf("sampler: Merge: outcome %d has %d dimensions, want %d as the first", i, o.dim(), first.dim())
		}
		for j, earlier := range outcomes[:i] {
			if o.LogLikelihood[0] == earlier.LogLikelihood[0] && slices.Equal(o.Points[0], earlier.Points[0]) {
				return nil, fmt.Errorf("sampler: Merge: outcomes %d and %d are the same run, want independent ones", j, i)
			}
		}
		total += len(o.Points)
		m.Calls += o.Calls
		m.Iterations += o.Iterations
		m.LivePoints += o.LivePoints
		m.Runs += o.Runs
		m.PriorDraws += o.PriorDraws
		m.PriorZeros += o.PriorZeros
		m.openEnded = m.openEnded || o.openEnded
		m.ranks = append(m.ranks, o.ranks...)
		m.rankMethods = append(m.rankMethods, o.rankMethods...)
		m.Status = max(m.Status, o.Status)
		m.Partial = m.Partial || o.Partial
		m.notes = append(m.notes, o.notes...)
		m.addPhases(o.Phases)
	}
	m.Points = make([][]float64, 0, total)
	m.LogLikelihood = make([]float64, 0, total)
	m.LiveCount = make([]int, 0, total)
	head := make([]int, len(outcomes))
	for range total {
		// The next point of each part says how many live points that part has
		// up to there; a part that has ended has none.
		next, live := -1, 0
		for i, o := range outcomes {
			if head[i] == len(o.Points) {
				continue
			}
			live += o.LiveCount[head[i]]
			if next < 0 || o.LogLikelihood[head[i]] < outcomes[next].LogLikelihood[head[next]] {
				next = i
			}
		}
		o, h := outcomes[next], head[next]
		m.Points = append(m.Points, o.Points[h])
		m.LogLikelihood = append(m.LogLikelihood, o.LogLikelihood[h])
		m.LiveCount = append(m.LiveCount, live)
		strands.take(m, next, h)
		head[next]++
	}
	// Where likelihoods tie across parts, the order of the ties is arbitrary and the
	// sum above depends on it; the births say which points were live.
	if m.hasStrands() {
		m.LiveCount = liveCounts(m.LogLikelihood, m.Birth)
	}
	m.weigh(workers)
	m.bootstrapError(workers)
	m.compareRuns(outcomes)
	m.judge()
	return m, nil
}

func (o *Outcome) addPhases(phases []Phase) {
	for _, p := range phases {
		i := slices.IndexFunc(o.Phases, func(q Phase) bool { return q.Name == p.Name })
		if i < 0 {
			o.Phases = append(o.Phases, p)
			continue
		}
		o.Phases[i].Calls += p.Calls
		o.Phases[i].Points += p.Points
	}
}
