package sampler

import (
	"bytes"
	"context"
	"encoding/gob"
	"errors"
	"reflect"
	"strings"
	"testing"
	"time"

	"knell/internal/random"
)

// memoryKeeper keeps all states it was ever given.
type memoryKeeper struct {
	states [][]byte
	fails  error
}

func (k *memoryKeeper) Load() ([]byte, error) {
	if len(k.states) == 0 {
		return nil, nil
	}
	return k.states[len(k.states)-1], nil
}

func (k *memoryKeeper) Save(state []byte) error {
	if k.fails != nil {
		return k.fails
	}
	k.states = append(k.states, state)
	return nil
}

var _ Keeper = (*memoryKeeper)(nil)

// keptRuns are runs that go through every kind of state: plateaus, modes,
// ellipsoids, slices, a periodic dimension, prior zeros, additions of both kinds.
func keptRuns() map[string]struct {
	problem *problem
	s       Settings
} {
	ring := &problem{dim: 2, logL: func(u []float64) float64 {
		x, y := u[0]-0.5, u[1]
		if y > 0.5 {
			y--
		}
		return max(-500, min(-1, -0.5*((x*x+y*y)-0.04)*((x*x+y*y)-0.04)/1e-5))
	}}
	return map[string]struct {
		problem *problem
		s       Settings
	}{
		"ellipsoids, grown for both": {gaussian(3, 0.5), Settings{LivePoints: 100, EvidenceError: 0.2, PosteriorSamples: 1500}},
		"slices":                     {gaussian(4, 0.5), Settings{LivePoints: 64, SliceSteps: 6, force: fromSlices}},
		"plateaus, periodic":         {ring, Settings{LivePoints: 80, Periodic: []bool{false, true}, PosteriorSamples: 600}},
		"call limit":                 {gaussian(3, 0.5), Settings{LivePoints: 100, MaxCalls: 2500}},
		"call limit, growing":        {gaussian(3, 0.5), Settings{LivePoints: 100, EvidenceError: 0.05, MaxCalls: 12000}},
	}
}

// A run that goes on from any state, on any number of workers, has the outcome
// of one that was never broken off.
func TestEveryStateLeadsToTheSameOutcome(t *testing.T) {
	for name, c := range keptRuns() {
		t.Run(name, func(t *testing.T) {
			t.Parallel()
			s := c.s
			s.Seed = 11
			want, err := Run(context.Background(), c.problem.target, s)
			if err != nil {
				t.Fatal(err)
			}
			keeper := &memoryKeeper{}
			s.Keeper, s.KeepEvery = keeper, 1
			all, err := Run(context.Background(), c.problem.target, s)
			if err != nil {
				t.Fatal(err)
			}
			if !reflect.DeepEqual(all, want) {
				t.Fatal("keeping the state changes the outcome")
			}
			states := keeper.states
			rng := random.New(5, name)
			for try := range 12 {
				// The last state is of the finished run.
				at := rng.IntN(len(states))
				if try == 0 {
					at = len(states) - 1
				}
				s.Keeper = &memoryKeeper{states: states[at : at+1 : at+1]}
				s.Workers = 1 + try%4
				got, err := Run(context.Background(), c.problem.target, s)
				if err != nil {
					t.Fatalf("from state %d of %d: %v", at, len(states), err)
				}
				if !reflect.DeepEqual(got, want) {
					t.Errorf("from state %d of %d: ln Z = %v ± %v of %d points with %d calls, want %v ± %v of %d with %d",
						at, len(states), got.LogEvidence, got.LogEvidenceError, len(got.Points), got.Calls,
						want.LogEvidence, want.LogEvidenceError, len(want.Points), want.Calls)
				}
			}
		})
	}
}

// Cancelled again and again, each time a little further on, the run still ends
// with the outcome of one that was left alone.
func TestCancelledAndGoneOnWith(t *testing.T) {
	for name, c := range keptRuns() {
		t.Run(name, func(t *testing.T) {
			t.Parallel()
			s := c.s
			s.Seed, s.Workers = 12, 2
			want, err := Run(context.Background(), c.problem.target, s)
			if err != nil {
				t.Fatal(err)
			}
			s.Keeper, s.KeepEvery = &memoryKeeper{}, time.Hour
			rng := random.New(6, name)
			for tries := 0; ; tries++ {
				ctx, cancel := context.WithCancel(context.Background())
				left := 3 + rng.IntN(60)
				s.Progress = func(Progress) {
					if left--; left == 0 {
						cancel()
					}
				}
				got, err := Run(ctx, c.problem.target, s)
				cancel()
				if err != nil {
					t.Fatal(err)
				}
				if got.Status == Interrupted {
					if !got.Partial || got.Verdict == "sound" {
						t.Fatalf("an interrupted run is %q, partial %v", got.Verdict, got.Partial)
					}
					checkWeights(t, got)
					continue
				}
				if !reflect.DeepEqual(got, want) {
					t.Errorf("after %d interruptions: ln Z = %v of %d points, want %v of %d", tries, got.LogEvidence, len(got.Points), want.LogEvidence, len(want.Points))
				}
				if tries < 2 {
					t.Errorf("only %d interruptions", tries)
				}
				return
			}
		})
	}
}

func TestForeignStatesAreRefused(t *testing.T) {
	p := gaussian(3, 0.5)
	s := Settings{LivePoints: 50, Seed: 1, Keeper: &memoryKeeper{}, Problem: "a"}
	if _, err := Run(context.Background(), p.target, s); err != nil {
		t.Fatal(err)
	}
	for what, change := range map[string]func(*Settings){
		"seed":          func(s *Settings) { s.Seed++ },
		"problem":       func(s *Settings) { s.Problem = "b" },
		"LivePoints":    func(s *Settings) { s.LivePoints++ },
		"EvidenceError": func(s *Settings) { s.EvidenceError = 1 },
		"Periodic":      func(s *Settings) { s.Periodic = []bool{true, false, false} },
	} {
		other := s
		change(&other)
		_, err := Run(context.Background(), p.target, other)
		var refused *ResumeError
		if !errors.As(err, &refused) || refused.What != what {
			t.Errorf("%s changed: error %v, want a *ResumeError that names it", what, err)
		}
	}
	if _, err := Run(context.Background(), gaussian(4, 0).target, s); err == nil || !strings.Contains(err.Error(), "dimensions") {
		t.Errorf("a state of 3 dimensions in 4: error %v", err)
	}
	kept, _ := s.Keeper.Load()
	for name, spoil := range map[string]func(*state){
		"part short of likelihoods": func(s *state) { s.Parts[0].LogLikelihood = s.Parts[0].LogLikelihood[1:] },
		"strand below zero":         func(s *state) { s.Parts[0].Strand[0] = -3 },
		"method unknown":            func(s *state) { s.Parts[0].RankMethods[0] = 77 },
		"merged too many":           func(s *state) { s.Merged = 9 },
		"one setting more":          func(s *state) { s.Settings = append(s.Settings, setting{"x", "y"}) },
		"addition to nothing":       func(s *state) { s.Parts, s.Merged, s.Runner = nil, 0, &runnerState{Addition: true} },
		"runner of no phases":       func(s *state) { s.Runner = &runnerState{Addition: true} },
	} {
		var odd state
		if err := gob.NewDecoder(bytes.NewReader(kept)).Decode(&odd); err != nil {
			t.Fatal(err)
		}
		spoil(&odd)
		var b bytes.Buffer
		if err := gob.NewEncoder(&b).Encode(&odd); err != nil {
			t.Fatal(err)
		}
		s.Keeper = &memoryKeeper{states: [][]byte{b.Bytes()}}
		var refused *ResumeError
		if _, err := Run(context.Background(), p.target, s); !errors.As(err, &refused) {
			t.Errorf("%s: error %v, want a *ResumeError", name, err)
		}
	}
	for _, bad := range [][]byte{{}, []byte("no state"), {1, 2, 3}} {
		s.Keeper = &memoryKeeper{states: [][]byte{bad}}
		var refused *ResumeError
		if _, err := Run(context.Background(), p.target, s); !errors.As(err, &refused) {
			t.Errorf("state %q: error %v, want a *ResumeError", bad, err)
		}
	}
}

// A state that cannot be kept is a warning, and the run is none the worse.
func TestStateThatCannotBeKept(t *testing.T) {
	p := gaussian(3, 0.5)
	full := errors.New("no space left")
	told := false
	s := Settings{LivePoints: 50, Seed: 1, Keeper: &memoryKeeper{fails: full}, KeepEvery: 1}
	s.Progress = func(p Progress) { told = told || strings.Contains(p.Trouble, "no space left") }
	o, err := Run(context.Background(), p.target, s)
	if err != nil {
		t.Fatal(err)
	}
	s.Keeper = nil
	want, err := Run(context.Background(), p.target, s)
	if err != nil {
		t.Fatal(err)
	}
	if o.LogEvidence != want.LogEvidence || !told {
		t.Errorf("ln Z = %v, want %v; progress told: %v", o.LogEvidence, want.LogEvidence, told)
	}
	if n := len(o.Warnings); n == 0 || !strings.Contains(o.Warnings[n-1], "no space left") {
		t.Errorf("warnings %q, want one that says why", o.Warnings)
	}
}
