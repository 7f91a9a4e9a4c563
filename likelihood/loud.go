package likelihood

import (
	"fmt"
	"math"
)

// loudness is the factor by which the noise outside the band exceeds the
// largest density within it: what lies outside the band enters the likelihood
// with that much less weight. A signal of SNR 20 with a tenth of its power
// outside then changes ln L by less than 0.5 * 400 * 0.1 / 1e5 = 2e-4.
const loudness = 1e5

// Loud replaces density (one-sided, 1/Hz, at j*step) outside [low, high] by a
// large finite value, joined to the band's edges by a raised cosine in ln S over
// ramp hertz on each side, and returns the result. Zero frequency and Nyquist
// are always outside.
func Loud(density []float64, step, low, high, ramp float64) ([]float64, error) {
	first, last := int(math.Ceil(low/step-1e-9)), int(math.Floor(high/step+1e-9))
	if first < 1 || last > len(density)-2 || first > last {
		return nil, fmt.Errorf("likelihood: band %g to %g Hz, want within %g to %g Hz", low, high, step, step*float64(len(density)-2))
	}
	largest := 0.0
	for j := first; j <= last; j++ {
		s := density[j]
		if !(s > 0) || math.IsInf(s, 0) {
			return nil, fmt.Errorf("likelihood: noise density at %g Hz = %g, want a finite number above zero", float64(j)*step, s)
		}
		largest = max(largest, s)
	}
	ceiling := math.Log(loudness * largest)
	out := make([]float64, len(density))
	copy(out[first:last+1], density[first:last+1])
	fill := func(j int, edge, distance float64) {
		rise := 1.0
		if distance < ramp {
			rise = 0.5 - 0.5*math.Cos(math.Pi*distance/ramp)
		}
		out[j] = math.Exp(edge + (ceiling-edge)*rise)
	}
	for j := 0; j < first; j++ {
		fill(j, math.Log(density[first]), float64(first-j)*step)
	}
	for j := last + 1; j < len(out); j++ {
		fill(j, math.Log(density[last]), float64(j-last)*step)
	}
	return out, nil
}
