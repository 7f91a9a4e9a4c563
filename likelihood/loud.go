package likelihood

import (
	"fmt"
	"math"
)

// The noise outside the band exceeds the density at the band's nearer edge by
// these factors. Below the band it must drown what a detector really has there,
// and what the filter that removes it leaves. Above, too loud a noise would cost
// signal: what begins at the analysis start is told from what came before by its
// high frequencies too. A factor of 100 keeps all but a tenth of what the true
// density would.
const (
	loudBelow = 1e5
	loudAbove = 100
	// loudMargin is by how much the noise outside the band exceeds what was
	// measured there, where that is louder still: strong lines.
	loudMargin = 10
)

// Loud replaces density (one-sided, 1/Hz, at j*step) outside [low, high] by a
// loud but finite noise, joined to the band's edges by a raised cosine in ln S
// over ramp hertz on each side, and returns the result. outside is what was
// measured, at the same frequencies; where ten times of it exceeds the loud noise
// it is used. A value of outside that is not finite is passed over. Zero
// frequency and Nyquist are always outside.
func Loud(density, outside []float64, step, low, high, ramp float64) ([]float64, error) {
	first, last := int(math.Ceil(low/step-1e-9)), int(math.Floor(high/step+1e-9))
	if first < 1 || last > len(density)-2 || first > last {
		return nil, fmt.Errorf("likelihood: band %g to %g Hz, want within %g to %g Hz", low, high, step, step*float64(len(density)-2))
	}
	if len(outside) != len(density) {
		panic(fmt.Sprintf("likelihood: Loud: %d densities outside the band, want %d", len(outside), len(density)))
	}
	for j := first; j <= last; j++ {
		if s := density[j]; !(s > 0) || math.IsInf(s, 0) {
			return nil, fmt.Errorf("likelihood: noise density at %g Hz = %g, want a finite number above zero", float64(j)*step, s)
		}
	}
	out := make([]float64, len(density))
	copy(out[first:last+1], density[first:last+1])
	fill := func(j int, edge, loud, distance float64) {
		rise := 1.0
		if distance < ramp {
			rise = 0.5 - 0.5*math.Cos(math.Pi*distance/ramp)
		}
		out[j] = edge * math.Pow(loud, rise)
		if measured := loudMargin * outside[j]; measured > loud*edge && !math.IsInf(measured, 0) {
			out[j] = measured
		}
	}
	for j := 0; j < first; j++ {
		fill(j, density[first], loudBelow, float64(first-j)*step)
	}
	for j := last + 1; j < len(out); j++ {
		fill(j, density[last], loudAbove, float64(j-last)*step)
	}
	return out, nil
}
