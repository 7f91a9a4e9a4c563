package event

import (
	"fmt"
	"math"
)

func (d *decoder) analysis(a *Analysis, t *table) {
	a.SampleRate = t.number("sample_rate", "Hz, a number above zero", positive)
	a.Duration = t.number("duration", wantSeconds, positive)
	a.Start = t.numberOr("start", 0, "seconds after event.time", nil)
	a.Gate = t.numberOr("gate", DefaultGate, "seconds, 0 or more", notNegative)
	const wantBand = "[low, high] in Hz with 0 < low < high"
	v, _ := t.take("band")
	list, _ := v.([]any)
	if len(list) != 2 {
		t.fail("band", wantBand)
	} else {
		low, ok1 := asNumber(list[0])
		high, ok2 := asNumber(list[1])
		a.Low, a.High = low, high
		if !ok1 || !ok2 || !(low > 0 && low < high) {
			t.fail("band", wantBand)
		}
	}
	t.finish()
	if d.err != nil {
		return
	}
	if nyquist := a.SampleRate / 2; a.High >= nyquist {
		t.fail("band", fmt.Sprintf("a band below the Nyquist frequency of %g Hz (half of analysis.sample_rate)", nyquist))
	}
	// 1.1 s at 1000 Hz are 1100.0000000000002 samples in binary.
	n := a.Duration * a.SampleRate
	switch whole := math.Round(n); {
	case !(math.Abs(n-whole) <= 1e-9*n) || math.Mod(whole, 2) != 0:
		t.fail("duration", fmt.Sprintf("an even number of samples; %g s at %g Hz are %.12g", a.Duration, a.SampleRate, n))
	case n > maxSamples:
		t.fail("duration", fmt.Sprintf("at most %d samples; %g s at %g Hz are %.12g", maxSamples, a.Duration, a.SampleRate, n))
	default:
		a.Duration = whole / a.SampleRate
	}
	if a.Gate >= a.Duration/2 {
		t.fail("gate", fmt.Sprintf("less than half of the duration of %g s", a.Duration))
	}
	if a.Gate > 0 && a.gateSamples() < 1 {
		t.fail("gate", fmt.Sprintf("0 or at least one sample, %g s", 1/a.SampleRate))
	}
	if a.Gate*a.SampleRate > maxGate {
		t.fail("gate", fmt.Sprintf("at most %d samples, %g s at this sample rate", maxGate, maxGate/a.SampleRate))
	}
	if a.Low < 2/a.Duration {
		t.fail("band", fmt.Sprintf("a lower edge of at least %g Hz, two cycles in the duration", 2/a.Duration))
	}
	if d.err == nil && math.Floor(a.High*a.Duration+1e-9) < math.Ceil(a.Low*a.Duration-1e-9) {
		t.fail("band", fmt.Sprintf("at least one multiple of %g Hz, one over the duration, within it", 1/a.Duration))
	}
}

const (
	maxSamples = 1 << 24 // of a segment
	maxGate    = 8192    // samples; bounds the factorised matrix to 512 MiB
)

func (d *decoder) sampler(s *Sampler, top *table) {
	t := &table{d: d, path: "sampler"}
	if top.has("sampler") {
		t = top.sub("sampler", "a table [sampler]")
	}
	s.LivePoints = int(t.integerOr("live_points", DefaultLivePoints, "a whole number from 100 to 1000000", func(n int64) bool { return n >= 100 && n <= 1e6 }))
	s.EvidenceError = t.numberOr("evidence_error", DefaultEvidenceError, "nat, 0.01 or more", func(x float64) bool { return x >= 0.01 })
	s.PosteriorSamples = t.numberOr("posterior_samples", 0, "an effective number of samples, 0 for any, up to 1e7", func(x float64) bool { return x >= 0 && x <= 1e7 })
	s.Remaining = t.numberOr("remaining", DefaultRemaining, "nat, above 0 and at most 1", func(x float64) bool { return x > 0 && x <= 1 })
	s.MaxCalls = t.integerOr("max_calls", 0, "0 for no limit, or at least live_points", func(n int64) bool { return n == 0 || n >= int64(s.LivePoints) })
	t.finish()
}
