package sampler

import (
	"fmt"
	"math"
	"runtime"
	"time"
)

// Defaults of Settings.
const (
	DefaultLivePoints = 1000
	DefaultRemaining  = 0.001 // nat
	DefaultMaxGrowth  = 100   // times LivePoints
	DefaultKeepEvery  = 10 * time.Second
)

// minLivePoints is the least live number; below it neither the shrinkage
// statistics nor the fitted ellipsoids mean much.
const minLivePoints = 32

// Settings of a run. The zero value of every field means its default.
type Settings struct {
	// Seed keys every random stream of the run.
	Seed uint64

	// LivePoints is the number of live points, default 1000, at least 32 and
	// at least 4 (dimension + 1).
	LivePoints int

	// EvidenceError is the largest standard error of the log-evidence, and
	// PosteriorSamples the least effective number of posterior samples
	// (Outcome.EffectiveSamples), to stop at. When the run of LivePoints is over,
	// further strands are added to it over those ranges of the likelihood where
	// they help most, until both hold. 0, the default, asks for nothing.
	EvidenceError    float64 // nats
	PosteriorSamples float64

	// MaxGrowth bounds the live number that EvidenceError and PosteriorSamples
	// may ask for, in units of LivePoints, default 100.
	MaxGrowth int

	// Remaining ends a run once ln(1 + Z'/Z) is below it, where Z' is the prior
	// volume left times the mean likelihood of the live points. In nats,
	// default 0.001. The live points then join the evidence, so this bounds
	// what a still unseen rise of the likelihood could matter, not a term left
	// out.
	Remaining float64

	// MaxCalls bounds the likelihood calls of all runs together; 0 means no
	// bound. It is checked between batches, so the last batch may pass it.
	MaxCalls int64

	// Workers is the number of goroutines that evaluate the likelihood,
	// default GOMAXPROCS. The result does not depend on it.
	Workers int

	// Periodic says for each dimension whether u = 0 and u = 1 are the same
	// place. nil means that no dimension is periodic.
	Periodic []bool

	// Reflective says for each dimension whether it may be unfolded at a wall
	// of the cube against which the likelihood piles up, which makes the region
	// above a likelihood whole for the ellipsoids and lets slices go on beyond
	// the wall. The evidence does not depend on it, only the calls. A dimension
	// is unfolded only while the live points say that it pays. nil means that
	// none may be; a dimension cannot be periodic as well.
	Reflective []bool

	// SliceSteps is the least number of slice-sampling steps that separate a
	// new point from the live point it starts from, where slices are used; up
	// to three times as many are taken where walkers are seen to stay near their
	// start. Default 4 times the dimension. More is fairer.
	SliceSteps int

	// Progress, if not nil, is called between batches from the goroutine that
	// called Run.
	Progress func(Progress)

	// Keeper, if not nil, keeps the state of the run, so that an equal Run goes on
	// from there after its process has ended for whatever reason, to the same
	// bits. It is given the state at most every KeepEvery (default 10 s), less
	// often where that would take more than a hundredth of the time, and at the
	// end or on cancellation.
	Keeper    Keeper
	KeepEvery time.Duration

	// Problem says what the likelihood is, in any words. A state that was kept of
	// another problem or other settings is refused with a *ResumeError.
	Problem string

	// force fixes the way of drawing, for tests of one way alone.
	force method
}

// SettingError reports a setting that cannot be used.
type SettingError struct {
	Field, Got, Want string
}

func (e *SettingError) Error() string {
	return fmt.Sprintf("sampler: %s = %s, want %s", e.Field, e.Got, e.Want)
}

// resolve checks s for a problem of the given dimension and fills in defaults.
func (s Settings) resolve(dim int) (Settings, error) {
	bad := func(field string, got any, want string) error {
		return &SettingError{field, fmt.Sprint(got), want}
	}
	if dim < 1 {
		return s, bad("Target.Dim()", dim, "at least 1")
	}
	if s.LivePoints == 0 {
		s.LivePoints = DefaultLivePoints
	}
	if least := max(minLivePoints, 4*(dim+1)); s.LivePoints < least {
		return s, bad("LivePoints", s.LivePoints, fmt.Sprintf("0 (for %d) or at least %d in %d dimensions", DefaultLivePoints, least, dim))
	}
	if !(s.EvidenceError >= 0) || math.IsInf(s.EvidenceError, 0) {
		return s, bad("EvidenceError", s.EvidenceError, "a finite number of nats, 0 (one run) or more")
	}
	if !(s.PosteriorSamples >= 0) || math.IsInf(s.PosteriorSamples, 0) {
		return s, bad("PosteriorSamples", s.PosteriorSamples, "a finite effective number of samples, 0 (any) or more")
	}
	if s.MaxGrowth == 0 {
		s.MaxGrowth = DefaultMaxGrowth
	}
	if s.MaxGrowth < 1 {
		return s, bad("MaxGrowth", s.MaxGrowth, fmt.Sprintf("0 (for %d) or at least 1", DefaultMaxGrowth))
	}
	if s.KeepEvery == 0 {
		s.KeepEvery = DefaultKeepEvery
	}
	if s.KeepEvery < 0 {
		return s, bad("KeepEvery", s.KeepEvery, fmt.Sprintf("0 (for %v) or more", DefaultKeepEvery))
	}
	if s.Remaining == 0 {
		s.Remaining = DefaultRemaining
	}
	if !(s.Remaining > 0 && s.Remaining <= 1) {
		return s, bad("Remaining", s.Remaining, "nats above 0 and up to 1")
	}
	if s.MaxCalls != 0 && s.MaxCalls < int64(s.LivePoints) {
		return s, bad("MaxCalls", s.MaxCalls, fmt.Sprintf("0 (no bound) or at least LivePoints, %d", s.LivePoints))
	}
	if s.Workers == 0 {
		s.Workers = runtime.GOMAXPROCS(0)
	}
	if s.Workers < 1 {
		return s, bad("Workers", s.Workers, "0 (for GOMAXPROCS) or at least 1")
	}
	if s.Periodic != nil && len(s.Periodic) != dim {
		return s, bad("Periodic", fmt.Sprintf("%d values", len(s.Periodic)), fmt.Sprintf("nil or one value for each of %d dimensions", dim))
	}
	if s.Reflective != nil && len(s.Reflective) != dim {
		return s, bad("Reflective", fmt.Sprintf("%d values", len(s.Reflective)), fmt.Sprintf("nil or one value for each of %d dimensions", dim))
	}
	for k, reflective := range s.Reflective {
		if reflective && s.Periodic != nil && s.Periodic[k] {
			return s, bad("Reflective", fmt.Sprintf("true for dimension %d", k), "false, as it is periodic")
		}
	}
	if s.SliceSteps == 0 {
		s.SliceSteps = defaultSlicePerDim * dim
	}
	if s.SliceSteps < 1 {
		return s, bad("SliceSteps", s.SliceSteps, fmt.Sprintf("0 (for %d per dimension) or at least 1", defaultSlicePerDim))
	}
	return s, nil
}
