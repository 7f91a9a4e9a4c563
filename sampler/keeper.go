package sampler

import "fmt"

// Keeper keeps the latest state of a run outside the process.
type Keeper interface {
	// Load returns the state given to Save last, or nil if there is none. An
	// error ends the run before it began.
	Load() ([]byte, error)

	// Save replaces the state: either wholly or, with an error, not at all. An
	// error becomes a warning of the outcome, and the run goes on.
	Save(state []byte) error
}

// ResumeError reports a kept state that the run cannot go on from.
type ResumeError struct {
	What, Got, Want string
}

func (e *ResumeError) Error() string {
	return fmt.Sprintf("sampler: the kept state does not fit: its %s is %s, want %s", e.What, e.Got, e.Want)
}
