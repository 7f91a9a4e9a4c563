package models

import "math"

// A ringdown that begins with a jump cannot be told from its samples: cut to a
// band, it rings on both sides of the start by a tenth of the jump. A real signal
// has no jump there; it was there before. What it was does not matter to a
// likelihood that marginalises over the samples before the start, so the model
// may go on into that stretch as it likes. It does so smoothly:
//
//	(1 - (gamma + g) t) exp(g t) exp(-i omega_R t),  t < 0,
//
// with the ringdown exp(-gamma t) exp(-i omega_R t) after it, equal in value and
// slope at t = 0. Its samples after the start are then the ringdown's own.

// leadDecays is how many times the lead falls by a factor e within the stretch
// it is given.
const leadDecays = 15

// leadRate is the g of a mode, per second, for a lead that has died out over the
// given time: a quarter of the mode's angular frequency, unless that is too slow.
func leadRate(omegaRe, seconds float64) float64 {
	return math.Max(omegaRe/4, leadDecays/seconds)
}

// addLead adds the transform of a mode's lead. With s = g - i (2 pi f + omega_R)
// for the part that stands beside U, and s = g - i (2 pi f - omega_R) beside V,
// it is (1 + (gamma + g) / s) / s.
func (h *Polarizations) addLead(w wave, g Grid, seconds float64) {
	rate := leadRate(w.omegaRe, seconds)
	slope := rate - w.omegaIm
	pr, pi := real(w.p)/2, imag(w.p)/2
	xr, xi := real(w.x)/2, imag(w.x)/2
	g2 := rate * rate
	step := 2 * math.Pi * g.Step
	plusRe, plusIm := h.PlusRe[:g.Count], h.PlusIm[:g.Count]
	crossRe, crossIm := h.CrossRe[:g.Count], h.CrossIm[:g.Count]
	for j := range plusRe {
		angular := float64(g.First+j) * step
		near, far := angular-w.omegaRe, angular+w.omegaRe
		// 1/s, then (1/s)(1 + slope/s).
		nearSquare, farSquare := near*near+g2, far*far+g2
		both := 1 / (nearSquare * farSquare)
		vi, ui := both*farSquare, both*nearSquare
		vr, ur := vi*rate, ui*rate
		vi, ui = vi*near, ui*far
		vr, vi = vr+slope*(vr*vr-vi*vi), vi+slope*2*vr*vi
		ur, ui = ur+slope*(ur*ur-ui*ui), ui+slope*2*ur*ui
		sumR, sumI, difR, difI := ur+vr, ui+vi, ur-vr, ui-vi
		plusRe[j] += pr*sumR - pi*difI
		plusIm[j] += pr*sumI + pi*difR
		crossRe[j] += xr*sumR - xi*difI
		crossIm[j] += xr*sumI + xi*difR
	}
}
