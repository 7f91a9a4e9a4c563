package strain

import (
	"fmt"
	"math"

	"gonum.org/v1/gonum/dsp/fourier"
)

// Smooth returns the spectrum at the resolution that a gate of lag seconds can
// carry: its autocovariance is multiplied by a window that ends at lag, so that
// what the model correlates is less than lag apart. The window's transform is
// nowhere negative, and so the result is positive; it is 1.44/lag wide at half
// its height, zero at 2/lag, and falls with the sixth power of the distance
// behind. A line much stronger than what surrounds it therefore raises its
// neighbourhood, about 3/lag to each side: that is the price of a short memory.
// The model then has more noise there than the data, never less.
//
// Outside of the band [low, high], in Hz, the density may be huge, or nothing
// where a filter was at work. It is first replaced by its level at the band's
// nearer edge, so that it cannot leak into the band; the level is the geometric
// mean over the bins within 1/lag of the edge, inside the band.
//
// The spectrum must start at 0 Hz; its grid stands for twice as many samples as
// it has steps, over 1/Step seconds, and lag must be at most half of them. Use
// Resample before Smooth, since interpolation puts correlations beyond lag back.
func Smooth(s *Spectrum, lag, low, high float64) (*Spectrum, error) {
	last := len(s.Density) - 1
	if s.Start != 0 || last < 2 {
		return nil, fmt.Errorf("noise spectrum: got %d bins from %v Hz, want a spectrum from 0 Hz", last+1, s.Start)
	}
	if !(lag > 0) || lag > 0.5/s.Step {
		return nil, fmt.Errorf("noise spectrum: got smoothing to a lag of %v s, want above 0 and at most %v s, half of what steps of %v Hz span",
			lag, 0.5/s.Step, s.Step)
	}
	first, end := int(math.Ceil(low/s.Step-1e-6)), int(math.Floor(high/s.Step+1e-6))
	if !(low >= 0 && high > low) || end > last || first >= end {
		return nil, fmt.Errorf("noise spectrum: got a band from %v to %v Hz, want low < high within 0 to %v Hz", low, high, s.End())
	}
	filled := make([]float64, last+1)
	for k := first; k <= end; k++ {
		d, err := s.value(k)
		if err != nil {
			return nil, err
		}
		filled[k] = d
	}
	near := min(end-first, int(1/(lag*s.Step)))
	below, above := level(filled[first:first+near+1]), level(filled[end-near:end+1])
	for k := range filled {
		if k < first {
			filled[k] = below
		} else if k > end {
			filled[k] = above
		}
	}

	n := 2 * last
	fft := fourier.NewFFT(n)
	c := make([]complex128, last+1)
	for k, d := range filled {
		c[k] = complex(d, 0)
	}
	covariance := fft.Sequence(nil, c)
	spacing := 1 / (s.Step * float64(n))
	for i := range covariance {
		covariance[i] *= lagWindow(float64(min(i, n-i))*spacing/lag) / float64(n)
	}
	fft.Coefficients(c, covariance)
	out := &Spectrum{Step: s.Step, Density: filled, Segments: s.Segments, Average: s.Average}
	for k, v := range c {
		out.Density[k] = real(v)
		// A kernel that is positive cannot do this but for rounding, which needs
		// a range of densities near 1e16 to show.
		if _, err := out.value(k); err != nil {
			return nil, err
		}
	}
	return out, nil
}

// level is the geometric mean of positive numbers.
func level(x []float64) float64 {
	sum := 0.0
	for _, v := range x {
		sum += math.Log(v)
	}
	return math.Exp(sum / float64(len(x)))
}

// lagWindow is the autocorrelation of a Hann window, 1 at u = 0 and 0 from u = 1
// on; as an autocorrelation it has a transform that is a square.
//
// The Parzen window has the same first zero but falls with the fourth power
// only. On real strain with lines of a million times their surroundings, at a
// lag of 0.25 s, it raised a fifth of the band by more than three times; this
// one raised a ninth.
func lagWindow(u float64) float64 {
	if u >= 1 {
		return 0
	}
	sin, cos := math.Sincos(2 * math.Pi * u)
	return (1-u)*(2+cos)/3 + sin/(2*math.Pi)
}
