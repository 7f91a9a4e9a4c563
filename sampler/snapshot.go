package sampler

import (
	"bytes"
	"encoding/gob"
	"fmt"
	"strings"
	"time"
)

// stateVersion changes whenever a state could not be gone on with to the same
// bits: with the form of the state, and with everything that decides how points
// are drawn.
const stateVersion = 1

// state is what is kept of a run between two steps: all that the rest of the run
// follows from, but for the settings, which are there to be compared.
type state struct {
	Settings []setting
	Elapsed  time.Duration
	Parts    []partState
	Merged   int
	Runner   *runnerState
}

// setting is one that decides the bits of a run, as text.
type setting struct{ Name, Value string }

// identity lists the settings that decide the bits of a run.
func (s Settings) identity(dim int) []setting {
	say := func(name string, v any) setting { return setting{name, fmt.Sprint(v)} }
	return []setting{
		say("version", stateVersion), say("problem", s.Problem), say("number of dimensions", dim), say("seed", s.Seed),
		say("LivePoints", s.LivePoints), say("EvidenceError", s.EvidenceError), say("PosteriorSamples", s.PosteriorSamples),
		say("MaxGrowth", s.MaxGrowth), say("Remaining", s.Remaining), say("MaxCalls", s.MaxCalls),
		say("Periodic", s.Periodic), say("Reflective", s.Reflective), say("SliceSteps", s.SliceSteps), say("way of drawing", s.force),
	}
}

// partState is a part that is over, before it is weighed.
type partState struct {
	Status                 Status
	Partial, OpenEnded     bool
	Calls                  int64
	Iterations             int
	LivePoints, Runs       int
	PriorDraws, PriorZeros int64
	Flat                   []float64 // points, in order
	LogLikelihood, Birth   []float64
	Strand                 []int32
	Phases                 []Phase
	Notes                  []string
	Ranks                  []float64
	RankMethods            []uint8
}

// runnerState is a runner between two steps. Its points in flight are drawn anew.
type runnerState struct {
	Addition                           bool // it follows the next planned one
	U, L, Birth                        []float64
	Strand, Freed                      []int32
	Threshold                          float64
	Strands                            int32
	Flights                            []flightState
	Batches                            uint64
	Level                              int
	Ending, Begun                      bool
	Out                                partState // LiveCount and order are for later
	Phase                              []Phase   // by method
	LogX, LogZ, Moment                 float64
	Bounds                             []boundState // that the runner and its flights use
	Bound                              int          // its own among them, from 1, or 0
	BoundX, ShrunkX, SliceCalls, Share float64
	Memory                             memoryState
}

// flightState is a batch to be drawn again.
type flightState struct {
	Batch     uint64
	Method    method
	Threshold float64
	U, L      []float64
	Bound     int // among the runner's, from 1, or 0
	Steps     int
	Limit     int64
	Strand    []int32
}

type memoryState struct {
	Steps, Least, Weight, Peak float64
	Correlation                []float64
}

func (g *growing) encode() ([]byte, error) {
	s := state{Settings: g.set.identity(g.pool.dim), Elapsed: g.earlier + time.Since(g.began), Merged: g.merged}
	for _, p := range g.parts {
		s.Parts = append(s.Parts, p.keep())
	}
	if g.current != nil {
		s.Runner = g.current.keep()
	}
	var b bytes.Buffer
	err := gob.NewEncoder(&b).Encode(&s)
	return b.Bytes(), err
}

// load goes back to the state that was kept, if there is one.
func (g *growing) load() error {
	if g.set.Keeper == nil {
		return nil
	}
	kept, err := g.set.Keeper.Load()
	if err != nil || kept == nil {
		return err
	}
	var s state
	if err := gob.NewDecoder(bytes.NewReader(kept)).Decode(&s); err != nil {
		return &ResumeError{"content", fmt.Sprintf("not readable (%v)", err), "a state kept by this version"}
	}
	if err := s.fits(g.set, g.pool.dim); err != nil {
		return err
	}
	if err := s.check(g.pool.dim); err != nil {
		return err
	}
	g.earlier = s.Elapsed
	for i := range s.Parts {
		g.parts = append(g.parts, s.Parts[i].outcome(g.set, g.pool.dim))
	}
	g.resumed = g.calls()
	if s.Merged > 0 && s.Merged <= len(g.parts) {
		// What was planned follows from what was merged.
		if _, err := g.plan(s.Merged); err != nil {
			return err
		}
		over := len(g.parts) - s.Merged
		if over > len(g.left) {
			return &ResumeError{"number of additions", fmt.Sprint(over), fmt.Sprintf("at most %d", len(g.left))}
		}
		g.left = g.left[over:]
	}
	if s.Runner != nil {
		if err := g.restore(s.Runner); err != nil {
			return err
		}
		g.resumed += g.current.out.Calls
	}
	return nil
}

// fits compares the settings of the state with those of the run.
func (s *state) fits(set Settings, dim int) error {
	wanted := set.identity(dim)
	if len(s.Settings) > len(wanted) {
		return &ResumeError{"list of settings", fmt.Sprintf("of %d", len(s.Settings)), fmt.Sprint(len(wanted))}
	}
	for i, w := range wanted {
		if i >= len(s.Settings) {
			return &ResumeError{w.Name, "not given", quote(w.Value)}
		}
		if got := s.Settings[i]; got != w {
			if got.Name != w.Name {
				return &ResumeError{"list of settings", got.Name, w.Name}
			}
			return &ResumeError{w.Name, quote(got.Value), quote(w.Value)}
		}
	}
	return nil
}

func quote(s string) string {
	if s == "" || strings.ContainsAny(s, " \n") {
		return fmt.Sprintf("%q", s)
	}
	return s
}

func (o *Outcome) keep() partState {
	p := partState{
		Status: o.Status, Partial: o.Partial, OpenEnded: o.openEnded, Calls: o.Calls, Iterations: o.Iterations,
		LivePoints: o.LivePoints, Runs: o.Runs, PriorDraws: o.PriorDraws, PriorZeros: o.PriorZeros,
		LogLikelihood: o.LogLikelihood, Birth: o.Birth, Strand: o.Strand, Phases: o.Phases, Notes: o.notes,
		Ranks: o.ranks, RankMethods: o.rankMethods,
	}
	for _, u := range o.Points {
		p.Flat = append(p.Flat, u...)
	}
	return p
}

func (p *partState) outcome(s Settings, dim int) *Outcome {
	o := &Outcome{
		Status: p.Status, Partial: p.Partial, openEnded: p.OpenEnded, Calls: p.Calls, Iterations: p.Iterations,
		LivePoints: p.LivePoints, Runs: p.Runs, PriorDraws: p.PriorDraws, PriorZeros: p.PriorZeros,
		LogLikelihood: p.LogLikelihood, Birth: p.Birth, Strand: p.Strand, Phases: p.Phases, notes: p.Notes,
		ranks: p.Ranks, rankMethods: p.RankMethods, seed: s.Seed, periodic: s.Periodic,
	}
	for i := range len(p.Flat) / dim {
		o.Points = append(o.Points, p.Flat[i*dim:(i+1)*dim:(i+1)*dim])
	}
	if len(o.Points) > 0 {
		o.LiveCount = liveCounts(o.LogLikelihood, o.Birth)
	}
	return o
}

func (r *runner) keep() *runnerState {
	k := &runnerState{
		Addition: r.path != nil, U: r.u, L: r.l, Birth: r.birth, Strand: r.strand, Freed: r.freed, Threshold: r.threshold, Strands: r.strands,
		Batches: r.batches, Level: r.level, Ending: r.ending, Begun: r.begun,
		Out: r.out.keep(), Phase: r.phase[:], LogX: r.logX, LogZ: r.logZ, Moment: r.moment,
		BoundX: r.boundX, ShrunkX: r.shrunkX, SliceCalls: r.sliceCalls, Share: r.part,
		Memory: memoryState{r.memory.steps, r.memory.least, r.memory.weight, r.memory.peak, r.memory.correlation},
	}
	k.Out.Flat, k.Out.Ranks, k.Out.RankMethods = r.flat, r.ranks.u, r.ranks.by
	var bounds []*bound
	number := func(b *bound) int {
		if b == nil {
			return 0
		}
		for i, x := range bounds {
			if x == b {
				return i + 1
			}
		}
		bounds = append(bounds, b)
		k.Bounds = append(k.Bounds, b.keep())
		return len(bounds)
	}
	k.Bound = number(r.bound)
	for _, f := range r.flights {
		st := &f.stage
		k.Flights = append(k.Flights, flightState{
			Batch: f.batch, Method: st.method, Threshold: st.threshold, U: st.u, L: st.l,
			Bound: number(st.bound), Steps: st.steps, Limit: st.limit, Strand: f.strand,
		})
	}
	return k
}

// restore makes the runner under way from its state. Its flights are sent when
// the crew is there.
func (g *growing) restore(k *runnerState) error {
	var p *path
	if k.Addition {
		if len(g.left) == 0 {
			return &ResumeError{"addition under way", "one more", "none, by its own plan"}
		}
		p, g.left = g.left[0], g.left[1:]
	}
	if p != nil && k.Level > len(p.level) {
		return &ResumeError{"level", fmt.Sprint(k.Level), fmt.Sprintf("at most %d", len(p.level))}
	}
	r := newRunner(g, p)
	r.u, r.l, r.birth, r.strand, r.freed = k.U, k.L, k.Birth, k.Strand, k.Freed
	r.threshold, r.strands, r.batches, r.level = k.Threshold, k.Strands, k.Batches, k.Level
	r.ending, r.begun = k.Ending, k.Begun
	r.flat, r.ranks.u, r.ranks.by = k.Out.Flat, k.Out.Ranks, k.Out.RankMethods
	k.Out.Flat, k.Out.Ranks, k.Out.RankMethods = nil, nil, nil
	r.out = k.Out.outcome(g.set, r.dim)
	copy(r.phase[:], k.Phase)
	r.logX, r.logZ, r.moment = k.LogX, k.LogZ, k.Moment
	r.boundX, r.shrunkX, r.sliceCalls, r.part = k.BoundX, k.ShrunkX, k.SliceCalls, k.Share
	m := k.Memory
	r.memory = memory{steps: m.Steps, least: m.Least, weight: m.Weight, peak: m.Peak, correlation: m.Correlation}
	bounds := []*bound{nil}
	for i := range k.Bounds {
		bounds = append(bounds, k.Bounds[i].bound(g.set))
	}
	r.bound = bounds[k.Bound]
	for _, f := range k.Flights {
		r.flights = append(r.flights, &flight{
			batch: f.Batch, seed: g.set.Seed, run: r.run, strand: f.Strand,
			stage: stage{method: f.Method, threshold: f.Threshold, u: f.U, l: f.L, bound: bounds[f.Bound], steps: f.Steps, limit: f.Limit},
		})
		r.pending += len(f.Strand)
	}
	if p != nil && r.begun {
		r.beside.rise(r.threshold)
	}
	g.current = r
	return nil
}
