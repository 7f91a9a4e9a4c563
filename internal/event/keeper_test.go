package event

import (
	"context"
	"errors"
	"slices"
	"strings"
	"testing"

	"knell/sampler"
)

// drawer keeps a state in memory.
type drawer struct {
	state     []byte
	loadError error
	saveError error
}

func (d *drawer) Load() ([]byte, error) { return d.state, d.loadError }

func (d *drawer) Save(state []byte) error {
	if d.saveError != nil {
		return d.saveError
	}
	d.state = append([]byte(nil), state...)
	return nil
}

var _ sampler.Keeper = (*drawer)(nil)

func TestKeeper(t *testing.T) {
	d := &drawer{}
	of := identity{Hypothesis: "horizon", Version: "1"}
	k, err := newKeeper(d, of)
	if err != nil {
		t.Fatal(err)
	}
	if state, err := k.Load(); k.held() || state != nil || err != nil {
		t.Errorf("nothing kept: got %q, %v", state, err)
	}
	const state = "a state\nwith lines\x00"
	k.begin()
	k.calls = 1234
	if err := k.Save([]byte(state)); err != nil {
		t.Fatal(err)
	}
	next, err := newKeeper(d, of)
	if err != nil {
		t.Fatal(err)
	}
	if !next.held() || next.calls != 1234 || !(next.Seconds > 0) {
		t.Errorf("got %d calls, %g s", next.calls, next.Seconds)
	}
	// The time of both parts counts.
	next.begin()
	if s := next.seconds(); !(s > next.Seconds) {
		t.Errorf("%g s after a part of %g s", s, next.Seconds)
	}
	if got, err := next.Load(); string(got) != state || err != nil {
		t.Errorf("got %q, %v", got, err)
	}
	if next.held() {
		t.Error("still held after it was given away")
	}

	// A state that is not taken is heard of.
	var heard []string
	next.notKept = func(hypothesis string, err error) { heard = append(heard, hypothesis+": "+err.Error()) }
	before := string(d.state)
	d.saveError = errors.New("no room")
	if err := next.Save([]byte("x")); err != d.saveError || string(d.state) != before || !slices.Equal(heard, []string{"horizon: no room"}) {
		t.Errorf("got %v, heard %q", err, heard)
	}

	for why, tc := range map[string]struct {
		drawer
		of   identity
		want string
	}{
		"foreign":    {drawer{state: d.state}, identity{Hypothesis: "horizon", Version: "2"}, "version 1 began it"},
		"no line":    {drawer{state: []byte("{}")}, of, "does not begin"},
		"no JSON":    {drawer{state: []byte("hello\nstate")}, of, "does not begin"},
		"unreadable": {drawer{loadError: errors.New("the disk is gone")}, of, "the disk is gone"},
	} {
		_, err := newKeeper(&tc.drawer, tc.of)
		var e *StateError
		if !errors.As(err, &e) || e.Hypothesis != "horizon" || !strings.Contains(err.Error(), tc.want) {
			t.Errorf("%s: got %v, want a *StateError with %q", why, err, tc.want)
		}
		if !errors.Is(err, tc.loadError) && tc.loadError != nil {
			t.Errorf("%s: the cause is lost", why)
		}
	}
}

// TestForeignStateBeforeAnyWork: what is kept of the second hypothesis is looked at
// before the first is sampled.
func TestForeignStateBeforeAnyWork(t *testing.T) {
	drawers := map[string]*drawer{"horizon": {}, "surface": {state: []byte("who knows\n")}}
	sampled := false
	w, posteriors, err := mustLoad(t, brief).Weigh(context.Background(), Options{
		Keeper:   func(h string) sampler.Keeper { return drawers[h] },
		Progress: func(Progress) { sampled = true },
		Resumed:  func(h string, _ int64) { t.Errorf("goes on with %s", h) },
	})
	var e *StateError
	if !errors.As(err, &e) || e.Hypothesis != "surface" || !w.Partial || len(w.Hypotheses) != 0 || posteriors != nil || sampled {
		t.Errorf("got %v, %+v, sampled %t", err, w, sampled)
	}
}
