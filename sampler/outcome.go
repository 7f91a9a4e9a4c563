package sampler

import (
	"fmt"
	"math"
	"strings"
)

// Status says why a run ended.
type Status int

const (
	Converged   Status = iota // little evidence remains, and the targets hold
	GrowthLimit               // Settings.MaxGrowth was reached short of a target
	CallLimit                 // Settings.MaxCalls was reached
	Interrupted               // the context was cancelled
)

func (s Status) String() string {
	switch s {
	case Converged:
		return "converged"
	case GrowthLimit:
		return "growth limit"
	case CallLimit:
		return "call limit"
	case Interrupted:
		return "interrupted"
	}
	return fmt.Sprintf("Status(%d)", int(s))
}

// Phase counts the work done by one way of drawing, and says whether its points
// were drawn fairly.
type Phase struct {
	Name   string // "prior", "ellipsoids" or "slices"
	Calls  int64  // likelihood calls
	Points int64  // points accepted

	// The insertion-rank tests as in Outcome, of the Ranks ranks of this phase
	// alone. The first live points have no rank.
	Ranks                               int64
	InsertionRankP, InsertionRankBlockP float64
}

// Efficiency is the accepted points per likelihood call; an ideal sampler has 1.
func (p Phase) Efficiency() float64 { return float64(p.Points) / float64(max(p.Calls, 1)) }

// Outcome is a finished run, or several merged ones. Its slices have one
// element per dead point, in order of rising likelihood.
type Outcome struct {
	LogEvidence      float64 // ln of the integral of L over the cube, nats
	LogEvidenceError float64 // its standard deviation over simulated shrinkages, nats

	// BootstrapError is the standard deviation of ln Z over resampled strands,
	// nats, which also sees strands that explore different places. 0 where the
	// strands are not known. ErrorTension is ln(BootstrapError /
	// LogEvidenceError) over its own standard error: about a unit normal while
	// the two agree.
	BootstrapError, ErrorTension float64

	// RunsP is the p-value of a chi-squared test that the evidences of the
	// merged runs agree, 1 for a single run.
	RunsP float64

	FormulaError float64 // sqrt(Information / live points), nats, for comparison
	Information  float64 // nats

	Status  Status
	Partial bool // ended before convergence; the numbers hold what was seen so far

	Calls      int64 // likelihood calls
	Iterations int   // batches
	LivePoints int   // that began at the prior, summed over parts
	Runs       int

	// PriorDraws counts the draws from the prior that made the first live
	// points, PriorZeros those of them with zero likelihood. The latter are not
	// among the points; the evidence accounts for their volume.
	PriorDraws, PriorZeros int64

	Points        [][]float64 // in the unit cube
	LogLikelihood []float64   // nats
	LogWeight     []float64   // posterior weight, its exponentials sum to 1
	LiveCount     []int       // live points just before the point was removed

	// Birth is the log-likelihood above which the point was drawn, -Inf for the
	// first live points; Strand numbers the strand it belongs to, from 0. See
	// Strands. nil where they are not known.
	Birth  []float64
	Strand []int32

	EffectiveSamples float64 // (sum w)² / sum w²

	// InsertionRankP is the p-value of a Kolmogorov-Smirnov test that the
	// insertion ranks are uniform, InsertionRankBlockP that of the worst part of
	// about one live set's length, corrected for the number of parts.
	InsertionRankP, InsertionRankBlockP float64

	Phases   []Phase
	Warnings []string
	Verdict  string // "sound", or what is doubtful and what to change

	notes     []string // warnings of the parts themselves, without judge's
	missed    []string // targets that do not hold, and why
	seed      uint64
	openEnded bool // the prior draws went on until enough were above zero
	ranks     []float64

	compared    bool    // RunsP was set
	rankMethods []uint8 // method that drew the point of each rank
	periodic    []bool  // as in Settings
}

// doubtfulP is the p-value of insertion ranks below which a run is in doubt.
const doubtfulP = 1e-3

// note keeps a warning for judge.
func (o *Outcome) note(format string, args ...any) {
	o.notes = append(o.notes, fmt.Sprintf(format, args...))
}

// judge sets the rank tests, the warnings and the verdict.
func (o *Outcome) judge() {
	o.Warnings = append([]string(nil), o.notes...)
	o.testRanks()
	doubts := append([]string(nil), o.missed...)
	if what := o.unfair(); what != "" {
		doubts = append(doubts, what)
	}
	if t := o.ErrorTension; math.Abs(t) > doubtfulTension {
		o.Warnings = append(o.Warnings, fmt.Sprintf("errors of ln Z disagree: %.3g nat by simulated shrinkage, %.3g by resampled strands, %.1f standard errors apart",
			o.LogEvidenceError, o.BootstrapError, math.Abs(t)))
		doubts = append(doubts, fmt.Sprintf("the error may be %.3g nat: compare independent runs", max(o.LogEvidenceError, o.BootstrapError)))
	}
	if what := o.disagreement(); what != "" {
		doubts = append(doubts, what)
	}
	if o.Partial {
		doubts = append(doubts, "the run did not end by itself ("+o.Status.String()+"): let it finish")
	}
	if o.LivePoints < 10*o.dim() {
		doubts = append(doubts, fmt.Sprintf("%d live points are few in %d dimensions: use more", o.LivePoints, o.dim()))
	}
	o.Verdict = "sound"
	if len(doubts) > 0 {
		o.Verdict = "doubtful: " + strings.Join(doubts, "; ")
	}
}

// Efficiency is the accepted points per likelihood call of the whole outcome.
func (o *Outcome) Efficiency() float64 {
	var points int64
	for _, p := range o.Phases {
		points += p.Points
	}
	return float64(points) / float64(max(o.Calls, 1))
}

func (o *Outcome) dim() int {
	if len(o.Points) == 0 {
		return 0
	}
	return len(o.Points[0])
}

// EqualWeight draws n points of equal weight from the posterior by systematic
// resampling, in random order; n = 0 means as many as EffectiveSamples. index
// holds each draw's place in Points. A point of large weight may come more than
// once. The points are shared with o and must not be changed.
func (o *Outcome) EqualWeight(seed uint64, n int) (points [][]float64, index []int) {
	if n <= 0 {
		n = max(1, int(o.EffectiveSamples))
	}
	return equalWeight(o.Points, o.LogWeight, seed, n)
}
