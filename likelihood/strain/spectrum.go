package strain

import (
	"fmt"
	"math"
)

// Spectrum is a one-sided noise spectral density on an even grid: Density[k],
// in 1/Hz, belongs to frequency Start + k Step, in Hz.
type Spectrum struct {
	Start, Step float64
	Density     []float64
	// Segments is the number of segments that were averaged, 0 for a density
	// that was not estimated. Averaging n segments leaves a relative error of
	// about 1/sqrt(n) in each bin, about 1.2/sqrt(n) for a median.
	Segments int
	Average  Average
}

// End is the highest frequency in Hz.
func (s *Spectrum) End() float64 { return s.Start + float64(len(s.Density)-1)*s.Step }

// value is Density[k], with an error unless it is positive and finite.
func (s *Spectrum) value(k int) (float64, error) {
	d := s.Density[k]
	if !(d > 0) || math.IsInf(d, 0) {
		return 0, fmt.Errorf("noise spectrum: got density %v at %v Hz, want a positive number", d, s.Start+float64(k)*s.Step)
	}
	return d, nil
}

// At returns the density at f Hz, in 1/Hz; between grid points its logarithm is
// linear in frequency. An error says that f is off the grid, or that the density
// there is not a positive number.
func (s *Spectrum) At(f float64) (float64, error) {
	// A thousandth of a bin beyond the ends is rounding of f.
	x := (f - s.Start) / s.Step
	last := float64(len(s.Density) - 1)
	if !(x >= -1e-3 && x <= last+1e-3) {
		return 0, fmt.Errorf("noise spectrum: got frequency %v Hz, want %v to %v Hz", f, s.Start, s.End())
	}
	k := int(min(max(math.Floor(x), 0), last))
	a, err := s.value(k)
	x -= float64(k)
	if err != nil || x < 1e-9 || k == int(last) {
		return a, err
	}
	b, err := s.value(k + 1)
	if err != nil || x > 1-1e-9 {
		return b, err
	}
	return math.Exp((1-x)*math.Log(a) + x*math.Log(b)), nil
}

// Resample returns the density at n frequencies start, start + step and so on,
// in Hz, each as At gives it. A grid coarser than the spectrum's own takes
// single bins and does not average: estimate with shorter segments instead.
func (s *Spectrum) Resample(start, step float64, n int) (*Spectrum, error) {
	if !(step > 0) || n < 1 {
		return nil, fmt.Errorf("noise spectrum: got a grid of %d steps of %v Hz, want at least 1 step above 0 Hz", n, step)
	}
	out := &Spectrum{Start: start, Step: step, Density: make([]float64, n), Segments: s.Segments, Average: s.Average}
	for k := range out.Density {
		d, err := s.At(start + float64(k)*step)
		if err != nil {
			return nil, err
		}
		out.Density[k] = d
	}
	return out, nil
}

// SampleCurve puts a density curve (f in Hz, result in 1/Hz) on the grid 0,
// step, ... of n frequencies. Below lowest, in Hz, the density is held at its
// value at lowest.
func SampleCurve(density func(f float64) float64, step float64, n int, lowest float64) (*Spectrum, error) {
	if !(step > 0) || n < 1 || !(lowest >= 0) {
		return nil, fmt.Errorf("noise curve: got %d steps of %v Hz from %v Hz, want at least 1 step above 0 Hz from 0 Hz on", n, step, lowest)
	}
	out := &Spectrum{Step: step, Density: make([]float64, n)}
	for k := range out.Density {
		f := max(lowest, float64(k)*step)
		out.Density[k] = density(f)
		if _, err := out.value(k); err != nil {
			return nil, fmt.Errorf("noise curve: got density %v at %v Hz, want a positive number: does the curve cover this frequency?", out.Density[k], f)
		}
	}
	return out, nil
}
