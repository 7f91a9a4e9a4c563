package strain

import (
	"fmt"
	"math"

	"gonum.org/v1/gonum/dsp/fourier"

	"knell/internal/random"
)

// spareSeconds is how much longer than asked for noise is generated at least, so
// that its first and last samples are as good as uncorrelated.
const spareSeconds = 8

// Synthesize returns n samples at rate Hz of stationary Gaussian noise with the
// one-sided density (f in Hz, result in 1/Hz), drawn from the caller's stream.
// Below lowest, in Hz, the density is held at its value at lowest, so that the
// noise has power at every frequency, as a likelihood that gates it assumes.
//
// The samples are cut from a periodic series of more than twice their length,
// so the series itself does not wrap around: its covariances are those of the
// density for all correlations shorter than the part that is cut away.
//
// The density must be positive and finite from lowest to rate/2.
func Synthesize(rng *random.Rand, density func(f float64) float64, rate float64, n int, lowest float64) ([]float64, error) {
	if !(rate > 0) || n < 1 || !(lowest >= 0 && lowest <= rate/2) {
		return nil, fmt.Errorf("synthetic noise: got %d samples at %v Hz from %v Hz, want at least 1 sample and a lowest frequency between 0 and %v Hz",
			n, rate, lowest, rate/2)
	}
	size := goodSize(2*n + int(math.Ceil(spareSeconds*rate)))
	last := size / 2
	s, err := SampleCurve(density, rate/float64(size), last+1, lowest)
	if err != nil {
		return nil, fmt.Errorf("synthetic noise: %w", err)
	}
	c := make([]complex128, last+1)
	for k, d := range s.Density {
		// The expectation of |c[k]|^2 is size*rate*S/2; divided by size, as the
		// inverse transform does not do it.
		a := math.Sqrt(d * rate / (2 * float64(size)))
		if k == 0 || k == last {
			c[k] = complex(a*rng.NormFloat64(), 0)
			continue
		}
		a /= math.Sqrt2
		c[k] = complex(a*rng.NormFloat64(), a*rng.NormFloat64())
	}
	return fourier.NewFFT(size).Sequence(nil, c)[:n:n], nil
}
