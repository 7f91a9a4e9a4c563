package strain

import (
	"fmt"
	"math"
	"slices"
)

// Series is evenly sampled strain of one site. Sample i is taken at GPS time
// StartSeconds + StartFraction + i / SampleRate; the start is kept in two parts
// because one float64 resolves GPS times of today only to 2.4e-7 s.
type Series struct {
	File          string    // where it was read, for messages
	Site          string    // two-character code
	StartSeconds  int64     // GPS s of the first sample, whole part
	StartFraction float64   // s, the rest, in [0, 1)
	SampleRate    float64   // Hz, a whole number
	Values        []float64 // strain
	Gaps          []Gap     // sorted by First, may overlap
	// Edge is how many samples at each end conditioning has spoiled.
	Edge int
}

// Gap is a run of samples [First, End) that must not be used.
type Gap struct {
	First, End int
	Why        string
}

// Start is the GPS time of the first sample in s, rounded to a float64.
func (s *Series) Start() float64 { return float64(s.StartSeconds) + s.StartFraction }

// Duration is the length in s: the number of samples over their rate.
func (s *Series) Duration() float64 { return float64(len(s.Values)) / s.SampleRate }

// Offset is how long after the first sample the GPS time t is, in s. The
// subtraction itself is exact: only t's own rounding remains.
func (s *Series) Offset(t float64) float64 {
	return t - float64(s.StartSeconds) - s.StartFraction
}

// Index returns the first sample at or after GPS time t. It may lie outside of
// the series. Times within a thousandth of a sample count as that sample, since
// t is rounded.
func (s *Series) Index(t float64) int {
	return int(math.Ceil(s.Offset(t)*s.SampleRate - 1e-3))
}

// Time is the GPS time of sample i in s, rounded to a float64.
func (s *Series) Time(i int) float64 {
	return float64(s.StartSeconds) + (s.StartFraction + float64(i)/s.SampleRate)
}

// String says where the series is from, for messages.
func (s *Series) String() string {
	return fmt.Sprintf("%s: strain of %s", s.File, s.Site)
}

// Check returns an error unless all samples with GPS times in [from, to) are
// there, outside of every gap and not spoiled by conditioning.
func (s *Series) Check(from, to float64) error {
	if !(from < to) {
		return fmt.Errorf("%v: got times from %.6f to %.6f, want from < to", s, from, to)
	}
	first, end := s.Index(from), s.Index(to)
	if first < s.Edge || end > len(s.Values)-s.Edge {
		return fmt.Errorf("%v: got times from GPS %.6f to %.6f, want within %.6f to %.6f",
			s, from, to, s.Time(s.Edge), s.Time(len(s.Values)-s.Edge))
	}
	for _, g := range s.Gaps {
		if g.First < end && g.End > first {
			return fmt.Errorf("%v: got times from GPS %.6f to %.6f, want none of the gap from %.6f to %.6f (%s)",
				s, from, to, s.Time(g.First), s.Time(g.End), g.Why)
		}
	}
	return nil
}

// Slice returns samples [first, end) as a series that shares the values.
// The range must be inside the series.
func (s *Series) Slice(first, end int) *Series {
	if first < 0 || end < first || end > len(s.Values) {
		panic(fmt.Sprintf("strain: slice [%d, %d) of %d samples", first, end, len(s.Values)))
	}
	out := *s
	out.Values = s.Values[first:end:end]
	// Whole seconds first, so that the sum stays exact.
	rate := int(s.SampleRate)
	out.StartSeconds += int64(first / rate)
	out.StartFraction += float64(first%rate) / s.SampleRate
	if out.StartFraction >= 1 {
		out.StartSeconds++
		out.StartFraction--
	}
	out.Edge = max(0, s.Edge-min(first, len(s.Values)-end))
	out.Gaps = nil
	for _, g := range s.Gaps {
		if g.First < end && g.End > first {
			out.Gaps = append(out.Gaps, Gap{max(g.First, first) - first, min(g.End, end) - first, g.Why})
		}
	}
	return &out
}

// Stretch returns the longest piece without gaps that contains GPS time t. It
// shares the values.
func (s *Series) Stretch(t float64) (*Series, error) {
	at := s.Index(t)
	if at < 0 || at >= len(s.Values) {
		return nil, fmt.Errorf("%v: got time GPS %.6f, want within %.6f to %.6f", s, t, s.Start(), s.Time(len(s.Values)))
	}
	first, end := 0, len(s.Values)
	for _, g := range s.Gaps {
		switch {
		case g.End <= at:
			first = max(first, g.End)
		case g.First > at:
			end = min(end, g.First)
		default:
			return nil, fmt.Errorf("%v: got time GPS %.6f, want a time outside of the gap from %.6f to %.6f (%s)",
				s, t, s.Time(g.First), s.Time(g.End), g.Why)
		}
	}
	return s.Slice(first, end), nil
}

// findGaps adds a gap for every run of NaNs; an infinity is an error, with the
// index of the sample.
func (s *Series) findGaps() error {
	for i := 0; i < len(s.Values); i++ {
		if math.IsInf(s.Values[i], 0) {
			return fmt.Errorf("%v: sample %d (GPS %.6f): got %v, want a finite value, or NaN for a gap", s, i, s.Time(i), s.Values[i])
		}
		if !math.IsNaN(s.Values[i]) {
			continue
		}
		first := i
		for i < len(s.Values) && math.IsNaN(s.Values[i]) {
			i++
		}
		s.Gaps = append(s.Gaps, Gap{first, i, "NaN in the data"})
		i--
	}
	slices.SortStableFunc(s.Gaps, func(a, b Gap) int { return a.First - b.First })
	return nil
}

// setSpacing sets the sample rate from the time between samples in s.
func (s *Series) setSpacing(spacing float64) error {
	rate := math.Round(1 / spacing)
	// A spacing rounded to ten digits is still read as what it means.
	if !(spacing > 0) || rate < 1 || rate > 1<<20 || math.Abs(rate*spacing-1) > 1e-9 {
		return fmt.Errorf("%v: got a sample spacing of %v s, want 1/n s with a whole n from 1 to %d", s, spacing, 1<<20)
	}
	s.SampleRate = rate
	return nil
}
