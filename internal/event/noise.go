package event

import (
	"fmt"
	"math"

	"knell/likelihood"
	"knell/likelihood/strain"
)

// quietBefore is how long before the event the noise estimate leaves out, s: the
// inspiral is louder than noise averaged over it would suggest.
const quietBefore = 1.0

// density is the noise's spectral density on the segment's frequencies, loud
// outside the band, with a line that says where it came from. from and to bound
// the segment in the series.
func (p *Prepared) density(key string, s Site, series *strain.Series, from, to int) ([]float64, string, error) {
	c, a, n := p.Config, p.Config.Analysis, s.Noise
	key += ".noise"
	half, step := a.samples()/2+1, 1/a.Duration
	var spectrum *strain.Spectrum
	var described string
	var err error
	smooth := n.Smooth
	switch n.From {
	case "curve":
		curve, e := strain.Curve(n.Curve)
		if e != nil {
			return nil, "", c.fault(key+".curve", e)
		}
		spectrum, err = strain.SampleCurve(curve, step, half, a.Low)
		described = "design curve " + n.Curve
		// A design curve is smooth as it is.
		smooth = max(0, smooth)
	case "file":
		curve, e := strain.ReadCurveFile(c.path(n.File), strain.Density)
		if e != nil {
			return nil, "", c.fault(key+".file", e)
		}
		spectrum, err = strain.SampleCurve(curve, step, half, a.Low)
		described = "file " + n.File
	default:
		average, e := strain.ParseAverage(n.Average)
		if e != nil {
			return nil, "", c.fault(key+".average", e)
		}
		parts := offSource(series, a, from, to)
		spectrum, err = strain.WelchStretches(parts, series.SampleRate, n.Segment, average)
		if err == nil {
			described = fmt.Sprintf("%s of %d segments of %g s off the event", n.Average, spectrum.Segments, n.Segment)
			if spectrum.Segments < 8 {
				p.Notes = append(p.Notes, fmt.Sprintf("The noise spectrum of %s rests on %d segments only; its own error of about %.0f %% per bin is not in the evidence's.", s.Code, spectrum.Segments, 100/math.Sqrt(float64(spectrum.Segments))))
			}
			spectrum, err = spectrum.Resample(0, step, half)
		}
	}
	if err != nil {
		return nil, "", c.fault(key, err)
	}
	measured := spectrum.Density
	if smooth < 0 {
		smooth = a.Gate
	}
	if smooth > 0 {
		if smooth > a.Duration/2 {
			return nil, "", c.fault(key+".smooth", fmt.Errorf("%g s, want at most half of the duration", smooth))
		}
		if smooth < 1/a.SampleRate {
			return nil, "", c.fault(key+".smooth", fmt.Errorf("%g s, want 0 for off or at least one sample, %g s", smooth, 1/a.SampleRate))
		}
		if spectrum, err = strain.Smooth(spectrum, smooth, a.Low, a.High); err != nil {
			return nil, "", c.fault(key, err)
		}
		described += fmt.Sprintf(", autocovariance to %g s", smooth)
		if a.Gate > 0 && smooth > a.Gate {
			p.Notes = append(p.Notes, fmt.Sprintf("The noise model of %s correlates samples over %g s, longer than the gate of %g s: the ends of the segment are not independent.", s.Code, smooth, a.Gate))
		}
	}
	loud, err := likelihood.Loud(spectrum.Density, measured, step, a.Low, a.High, a.ramp())
	if err != nil {
		return nil, "", c.fault(key, err)
	}
	return loud, described, nil
}

// offSource are the stretches before and after the segment that hold no event.
func offSource(series *strain.Series, a Analysis, from, to int) [][]float64 {
	first, end := series.Edge, len(series.Values)-series.Edge
	event := from + a.gateSamples() - int(a.Start*a.SampleRate)
	before := min(from, event-int(quietBefore*a.SampleRate))
	var parts [][]float64
	if before > first {
		parts = append(parts, series.Values[first:before])
	}
	if to < end {
		parts = append(parts, series.Values[to:end])
	}
	return parts
}
