package event

import (
	"bytes"
	"encoding/json"
	"fmt"
	"time"

	"knell/sampler"
)

// StateError is a kept state that cannot be gone on with: it belongs to another
// weighing, or it is not whole.
type StateError struct {
	Hypothesis string
	Reason     string
	Err        error // the cause; nil for a state of another weighing
}

func (e *StateError) Error() string {
	return fmt.Sprintf("the kept state of hypothesis %s cannot be gone on with: %s", e.Hypothesis, e.Reason)
}

// Unwrap gives the cause.
func (e *StateError) Unwrap() error { return e.Err }

// keeper puts a line of JSON before the sampler's state: whose state it is, and how far
// it had come. It is for the goroutine that calls Weigh. The zero value, without a
// place, keeps nothing and only counts the time.
type keeper struct {
	place sampler.Keeper
	label
	loaded []byte // the sampler's state, until the sampler asks for it
	calls  int64  // so far, as the sampler last told
	began  time.Time
	// notKept, if not nil, hears of states that place did not take.
	notKept func(hypothesis string, err error)
}

var _ sampler.Keeper = (*keeper)(nil)

// label is the line before a state.
type label struct {
	Identity identity `json:"identity"`
	Calls    int64    `json:"calls"`   // likelihood calls up to the state, or few less
	Seconds  float64  `json:"seconds"` // of work up to the state
}

// newKeeper reads what place holds of the hypothesis. A state that is not whole, or of
// another weighing, is a *StateError.
func newKeeper(place sampler.Keeper, of identity) (*keeper, error) {
	k := &keeper{place: place, label: label{Identity: of}}
	text, err := place.Load()
	if err != nil {
		return nil, &StateError{of.Hypothesis, err.Error(), err}
	}
	if text == nil {
		return k, nil
	}
	line, state, found := bytes.Cut(text, []byte("\n"))
	var held label
	if err := json.Unmarshal(line, &held); err != nil || !found {
		return nil, &StateError{of.Hypothesis, "it does not begin with a line that says whose it is", err}
	}
	if why := of.difference(held.Identity); why != "" {
		return nil, &StateError{of.Hypothesis, why, nil}
	}
	k.label, k.loaded, k.calls = held, state, held.Calls
	return k, nil
}

// held reports whether there is a state to go on from.
func (k *keeper) held() bool { return k.loaded != nil }

// begin starts the clock of this part of the work.
func (k *keeper) begin() { k.began = time.Now() }

// seconds is the time of all parts of the work.
func (k *keeper) seconds() float64 { return k.label.Seconds + time.Since(k.began).Seconds() }

// Load implements sampler.Keeper. The state is given away, so that it is in memory
// once; a second call gives it no more.
func (k *keeper) Load() ([]byte, error) {
	state := k.loaded
	k.loaded = nil
	return state, nil
}

// Save implements sampler.Keeper.
func (k *keeper) Save(state []byte) error {
	line, err := json.Marshal(label{k.label.Identity, k.calls, k.seconds()})
	if err != nil {
		return err
	}
	text := make([]byte, 0, len(line)+1+len(state))
	text = append(append(text, line...), '\n')
	err = k.place.Save(append(text, state...))
	if err != nil && k.notKept != nil {
		k.notKept(k.Identity.Hypothesis, err)
	}
	return err
}
