package sampler

import (
	"context"
	"errors"
	"runtime"
	"sync/atomic"
	"testing"
	"time"
)

// hooked is a problem that calls a function before each likelihood; an error of it is
// the likelihood's.
type hooked struct {
	*problem
	before func() error
}

func (h hooked) LogLikelihood(u []float64) (float64, error) {
	if err := h.before(); err != nil {
		return 0, err
	}
	return h.problem.LogLikelihood(u)
}

// settled waits until there are as few goroutines as before, and fails if they do not
// become so within a deadline: goroutines that have nothing left to do may still be on
// their way out when Run returns.
func settled(t *testing.T, before int) {
	t.Helper()
	for deadline := time.Now().Add(5 * time.Second); runtime.NumGoroutine() > before; time.Sleep(time.Millisecond) {
		if time.Now().After(deadline) {
			stacks := make([]byte, 1<<16)
			t.Fatalf("%d goroutines, %d before:\n%s", runtime.NumGoroutine(), before, stacks[:runtime.Stack(stacks, true)])
		}
	}
}

// However a run ends, its goroutines end too.
func TestNoGoroutinesAreLeft(t *testing.T) {
	bad := errors.New("no number here")
	p := gaussian(3, 0.95)
	for _, tc := range []struct {
		why    string
		before func(call int64, cancel func()) error
		// check says what is wrong with how the run ended.
		check func(o *Outcome, err error) string
	}{
		{"to the end", func(int64, func()) error { return nil },
			func(o *Outcome, err error) string {
				if err != nil || o.Status != Converged {
					return "want converged"
				}
				return ""
			}},
		{"cancelled", func(call int64, cancel func()) error {
			if call == 600 {
				cancel()
			}
			return nil
		}, func(o *Outcome, err error) string {
			if err != nil || o.Status != Interrupted {
				return "want an interrupted outcome"
			}
			return ""
		}},
		{"cancelled among the first points", func(call int64, cancel func()) error {
			if call == 20 {
				cancel()
			}
			return nil
		}, func(o *Outcome, err error) string {
			if !errors.Is(err, context.Canceled) {
				return "want the context's error"
			}
			return ""
		}},
		{"a likelihood that fails", func(call int64, _ func()) error {
			if call >= 600 {
				return bad
			}
			return nil
		}, func(o *Outcome, err error) string {
			var at *PointError
			if !errors.As(err, &at) || !errors.Is(err, bad) {
				return "want a point error"
			}
			return ""
		}},
		{"a likelihood that fails at once", func(int64, func()) error { return bad },
			func(o *Outcome, err error) string {
				if !errors.Is(err, bad) {
					return "want its error"
				}
				return ""
			}},
	} {
		t.Run(tc.why, func(t *testing.T) {
			for _, workers := range []int{1, 7} {
				before := runtime.NumGoroutine()
				ctx, cancel := context.WithCancel(context.Background())
				var calls atomic.Int64
				target := func() (Target, error) {
					return hooked{p, func() error { return tc.before(calls.Add(1), cancel) }}, nil
				}
				o, err := Run(ctx, target, Settings{Seed: 1, LivePoints: 100, Workers: workers})
				if what := tc.check(o, err); what != "" {
					t.Errorf("%d workers: outcome %v, error %v; %s", workers, o, err, what)
				}
				cancel()
				settled(t, before)
			}
		})
	}
}

// A target that a later worker cannot get, or settings that are refused, start nothing
// that stays.
func TestNoGoroutinesAreLeftByARunThatCannotBegin(t *testing.T) {
	before := runtime.NumGoroutine()
	p := gaussian(3, 0.95)
	made := 0
	if _, err := Run(context.Background(), func() (Target, error) {
		if made++; made > 3 {
			return nil, errors.New("no more targets")
		}
		return p, nil
	}, Settings{LivePoints: 100, Workers: 5}); err == nil {
		t.Error("no error of a target that could not be made")
	}
	if _, err := Run(context.Background(), p.target, Settings{LivePoints: 5}); err == nil {
		t.Error("no error of settings that cannot be used")
	}
	settled(t, before)
}
