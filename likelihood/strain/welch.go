package strain

import (
	"fmt"
	"math"
	"slices"

	"gonum.org/v1/gonum/dsp/fourier"
)

// Average is how the segments of Welch's method are combined.
type Average int

const (
	// Median is robust: a glitch or a signal in a few segments hardly moves it.
	Median Average = iota
	// Mean has the smaller variance when the noise is stationary.
	Mean
)

func (a Average) String() string {
	switch a {
	case Median:
		return "median"
	case Mean:
		return "mean"
	}
	return fmt.Sprintf("Average(%d)", int(a))
}

// ParseAverage is the inverse of String.
func ParseAverage(name string) (Average, error) {
	switch name {
	case "median":
		return Median, nil
	case "mean":
		return Mean, nil
	}
	return 0, fmt.Errorf("got average %q, want \"median\" or \"mean\"", name)
}

// Welch estimates the one-sided spectral density of one stretch; see
// WelchStretches.
func Welch(x []float64, rate, segmentSeconds float64, average Average) (*Spectrum, error) {
	return WelchStretches([][]float64{x}, rate, segmentSeconds, average)
}

// WelchStretches estimates the one-sided spectral density, in 1/Hz, of the noise
// in several stretches sampled at rate Hz, such as those before and after an
// event. Segments of segmentSeconds overlap by half and do not cross from one
// stretch to the next; each has its mean removed, is weighted by a Hann window
// and transformed; the squares are averaged over all segments, bin by bin. The
// grid is 0, 1/segmentSeconds, ..., rate/2.
//
// The median is divided by its expectation for n independent segments of unit
// mean, MedianBias(n). Segments that overlap by half are slightly correlated
// (the squares by (1/6)^2 = 1/36), which is left out: it changes the expectation
// by less than a hundredth (measured on white noise: +0.7 % with 4 segments, less
// than 0.1 % with 15).
//
// The first two bins are low, as the mean is removed. All others are unbiased
// where the density is smooth over 2/segmentSeconds.
//
// Errors: a segment that is not a whole, even number of samples, or longer than
// every stretch; a NaN or infinity.
//
// Source: IEEE Trans. Audio Electroacoust. 15, 70 (1967).
func WelchStretches(parts [][]float64, rate, segmentSeconds float64, average Average) (*Spectrum, error) {
	if average != Median && average != Mean {
		return nil, fmt.Errorf("noise spectrum: got %v, want median or mean", average)
	}
	size := rate * segmentSeconds
	n := int(math.Round(size))
	if !(rate > 0) || !(size >= 8 && size <= 1<<30) || math.Abs(size-float64(n)) > 1e-6 || n%2 != 0 {
		return nil, fmt.Errorf("noise spectrum: got segments of %v s at %v Hz, want a whole, even number of samples, at least 8", segmentSeconds, rate)
	}
	total, longest := 0, 0
	for i, x := range parts {
		longest = max(longest, len(x))
		if len(x) >= n {
			total += (len(x)-n)/(n/2) + 1
		}
		for j, v := range x {
			if math.IsNaN(v) || math.IsInf(v, 0) {
				return nil, fmt.Errorf("noise spectrum: stretch %d, sample %d: got %v, want a finite number", i, j, v)
			}
		}
	}
	if total == 0 {
		return nil, fmt.Errorf("noise spectrum: got segments of %v s, want at most the longest stretch, %v s", segmentSeconds, float64(longest)/rate)
	}

	window := hann(n)
	power := 0.0
	for _, w := range window {
		power += w * w
	}
	fft := fourier.NewFFT(n)
	segment, c := make([]float64, n), make([]complex128, n/2+1)
	bins := n/2 + 1
	squares := make([]float64, bins*total) // all segments of one bin side by side
	done := 0
	for _, x := range parts {
		for first := 0; first+n <= len(x); first += n / 2 {
			prepare(segment, x[first:first+n], window)
			fft.Coefficients(c, segment)
			for k, v := range c {
				squares[k*total+done] = real(v)*real(v) + imag(v)*imag(v)
			}
			done++
		}
	}

	out := &Spectrum{Step: rate / float64(n), Density: make([]float64, bins), Segments: total, Average: average}
	for k := range out.Density {
		// Twice, for the negative frequencies, which 0 and Nyquist do not have.
		scale := 2 / (rate * power)
		if k == 0 || k == bins-1 {
			scale /= 2
		}
		out.Density[k] = scale * combine(squares[k*total:(k+1)*total], average)
	}
	return out, nil
}

// hann is the Hann window, periodic, so that halves overlap to a constant.
func hann(n int) []float64 {
	w := make([]float64, n)
	for i := range w {
		s := math.Sin(math.Pi * float64(i) / float64(n))
		w[i] = s * s
	}
	return w
}

// prepare fills dst with x less its mean, times the window.
func prepare(dst, x, window []float64) {
	mean := 0.0
	for _, v := range x {
		mean += v
	}
	mean /= float64(len(x))
	for i, v := range x {
		dst[i] = (v - mean) * window[i]
	}
}

// combine averages one bin's squares, which it may reorder.
func combine(x []float64, average Average) float64 {
	n := len(x)
	if average == Mean {
		sum := 0.0
		for _, v := range x {
			sum += v
		}
		return sum / float64(n)
	}
	slices.Sort(x)
	return (x[(n-1)/2] + x[n/2]) / 2 / MedianBias(n)
}

// MedianBias is the expectation of the median of n independent exponential
// variables of mean one, which is what the bins of n segments are. For odd n it
// is sum_{j=1..n} (-1)^(j+1)/j. For even n, with the mean of the middle two as
// median, it is that of n - 1. It falls from 1 towards ln 2. n must be positive.
func MedianBias(n int) float64 {
	if n < 1 {
		panic(fmt.Sprintf("strain: median of %d segments", n))
	}
	n -= 1 - n%2
	sum := 0.0
	for j := n; j >= 1; j -= 2 {
		sum += 1 / float64(j)
		if j > 1 {
			sum -= 1 / float64(j-1)
		}
	}
	return sum
}
