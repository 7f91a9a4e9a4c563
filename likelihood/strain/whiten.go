package strain

import (
	"fmt"
	"math"

	"gonum.org/v1/gonum/dsp/fourier"
)

// Whiten returns the part of x, sampled at rate Hz, between low and high Hz,
// divided by the square root of the density s and scaled so that Gaussian noise
// of that density gets variance one. It is for pictures and checks, not for the
// likelihood.
//
// x is taken as periodic: where its end and its beginning do not fit, as far as
// the filter remembers (some seconds for noise with sharp lines), the result is
// wrong, so give more than is to be used.
func Whiten(x []float64, s *Spectrum, rate, low, high float64) ([]float64, error) {
	n := len(x)
	if n < 2 || !(rate > 0) || !(low >= 0 && low < high && high <= rate/2) {
		return nil, fmt.Errorf("whitening: got %d samples at %v Hz and a band from %v to %v Hz, want at least 2 samples and low < high within 0 to %v Hz",
			n, rate, low, high, rate/2)
	}
	size := goodSize(n)
	padded := make([]float64, size)
	copy(padded, x)
	fft := fourier.NewFFT(size)
	c := fft.Coefficients(nil, padded)
	step := rate / float64(size)
	bins := 0.0 // of the two-sided transform
	for k := range c {
		f := float64(k) * step
		if f < low || f > high {
			c[k] = 0
			continue
		}
		d, err := s.At(f)
		if err != nil {
			return nil, fmt.Errorf("whitening: %w", err)
		}
		// Of size*rate*S/2, the expectation of |c|^2; the inverse transform does
		// not divide by size.
		c[k] *= complex(math.Sqrt(2/(float64(size)*rate*d)), 0)
		if k == 0 || 2*k == size {
			bins++
		} else {
			bins += 2
		}
	}
	if bins == 0 {
		return nil, fmt.Errorf("whitening: got a band from %v to %v Hz, want one wider than %v Hz", low, high, step)
	}
	out := fft.Sequence(nil, c)[:n:n]
	scale := 1 / math.Sqrt(bins)
	for i := range out {
		out[i] *= scale
	}
	return out, nil
}
