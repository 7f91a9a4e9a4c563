package strain

import (
	"fmt"
	"math"

	"gonum.org/v1/gonum/dsp/fourier"
)

// PassLow and PassHigh bound what Condition leaves untouched, [PassLow*lowCut,
// PassHigh*rate/2], as fractions of the frequency they belong to.
const (
	PassLow  = 0.8
	PassHigh = 0.9
)

const (
	// stopLow times lowCut is where the lower transition ends.
	stopLow = 0.5
	// ringCycles is how long a filter rings, in units of one over the width of
	// its transition: beyond that what it removes comes back by less than 1e-7 (see
	// the tests).
	ringCycles = 12
)

// Condition returns the series at a lower sample rate in Hz, without what lies
// well below lowCut in Hz, the lower edge of the analysis band:
//
//   - the ends are tapered to zero, so that the step between them does not
//     spread over all frequencies;
//   - frequencies below lowCut/2 are removed and those above 0.8 lowCut are
//     untouched, with a smooth transition between them;
//   - when the rate falls, frequencies above the new Nyquist frequency are
//     removed and those below nine tenths of it are untouched;
//   - every q-th sample is kept, q being the ratio of the rates, on the grid of
//     whole GPS seconds where the first sample allows it.
//
// The filters have zero phase: they shift nothing in time, but they do spread a
// feature to both sides of it. What spreads consists of frequencies in the
// transitions alone, out of the band, since inside it the filters are exactly
// one. A likelihood that gates the data in time and uses only the band must
// still give these frequencies a finite density.
//
// Taper and filters spoil Edge samples at each end of the result; Check refuses
// them.
//
// The whole series is transformed at once, in three times its memory: of a file
// of an hour, Slice what is needed first. It must have no gaps (see Stretch), the ratio of the rates must be a
// whole number, and something must be left between the edges.
func Condition(s *Series, rate, lowCut float64) (*Series, error) {
	q := math.Round(s.SampleRate / rate)
	if !(rate >= 1) || rate != math.Floor(rate) || q < 1 || q*rate != s.SampleRate {
		return nil, fmt.Errorf("%v: got sample rate %v Hz, want %v Hz over a whole number, %s", s, rate, s.SampleRate, divisors(s.SampleRate))
	}
	if !(lowCut > 0 && lowCut < PassHigh*rate/2) {
		return nil, fmt.Errorf("%v: got lower edge of the band %v Hz, want above 0 and below %v Hz", s, lowCut, PassHigh*rate/2)
	}
	if len(s.Gaps) > 0 {
		g := s.Gaps[0]
		return nil, fmt.Errorf("%v: got a gap from GPS %.6f to %.6f (%s), want a stretch without gaps", s, s.Time(g.First), s.Time(g.End), g.Why)
	}
	ring := ringCycles / ((PassLow - stopLow) * lowCut)
	taper := ring / 2
	edge := int(math.Ceil((ring + taper) * rate))
	ratio := int(q)
	// The first sample kept: the next on the grid of whole seconds.
	skip := 0
	if at := s.StartFraction * s.SampleRate; math.Abs(at-math.Round(at)) < 1e-3 {
		skip = (ratio - int(math.Round(at))%ratio) % ratio
	}
	in := s.Slice(min(skip, len(s.Values)), len(s.Values))
	n := len(in.Values) / ratio
	if n <= 2*edge {
		return nil, fmt.Errorf("%v: got a stretch of %.3f s, want more than %.3f s: conditioning for a band from %v Hz spoils %.3f s at each end",
			s, s.Duration(), 2*float64(edge)/rate, lowCut, float64(edge)/rate)
	}

	out := *in
	out.SampleRate = rate
	out.Edge = (s.Edge+ratio-1)/ratio + edge
	out.Values = filter(in.Values[:n*ratio], s.SampleRate, ratio, taper, lowCut)
	return &out, nil
}

// filter does the work of Condition on a slice that it leaves alone.
func filter(x []float64, rate float64, ratio int, taper, lowCut float64) []float64 {
	n := len(x)
	// Zeros behind the tapered end are harmless and make the length a good one.
	size := goodSize((n+ratio-1)/ratio) * ratio
	padded := make([]float64, size)
	copy(padded, x)
	edge := int(taper * rate)
	for i := range edge {
		w := smoothStep((float64(i) + 0.5) / float64(edge))
		padded[i] *= w
		padded[n-1-i] *= w
	}
	c := fourier.NewFFT(size).Coefficients(nil, padded)
	c = c[:size/ratio/2+1]
	step := rate / float64(size)
	nyquist := rate / float64(2*ratio)
	for k := range c {
		f := float64(k) * step
		w := smoothStep((f/lowCut - stopLow) / (PassLow - stopLow))
		if ratio > 1 {
			w *= smoothStep((1 - f/nyquist) / (1 - PassHigh))
		}
		c[k] *= complex(w/float64(size), 0)
	}
	return fourier.NewFFT(size/ratio).Sequence(nil, c)[:n/ratio]
}

// smoothStep rises from 0 at x = 0 to 1 at x = 1 with all its derivatives, so
// its transform falls faster than any power.
func smoothStep(x float64) float64 {
	switch {
	case x <= 0:
		return 0
	case x >= 1:
		return 1
	}
	return 1 / (1 + math.Exp(1/x-1/(1-x)))
}

// goodSize is the smallest even number from n on with no prime factor above 5,
// for which the transform is fast.
func goodSize(n int) int {
	for m := max(2, n+n%2); ; m += 2 {
		r := m
		for _, p := range []int{2, 3, 5} {
			for r%p == 0 {
				r /= p
			}
		}
		if r == 1 {
			return m
		}
	}
}

// divisors lists the rates that divide a rate by 1, 2, 3 and so on.
func divisors(rate float64) string {
	text := "one of"
	for q, n := 1.0, 0; q <= rate && n < 8; q++ {
		if r := rate / q; r == math.Floor(r) {
			text += fmt.Sprintf(" %v", r)
			n++
		}
	}
	return text + " ..."
}
