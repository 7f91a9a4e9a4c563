package models

import (
	"fmt"
	"math"
	"strconv"
	"strings"

	"knell/internal/constants"
	"knell/models/kerr"
)

// ringing is a sum of quasi-normal modes seen at a fixed inclination, with its
// transform. It is the part that every remnant model shares.
//
// With C the mode's complex amplitude, S the angular factor at the inclination
// iota and S' the one at pi - iota, the mode and its (l, -m) partner give
//
//	h+ - i hx = C S e + conj(C S' e),   e = exp(-i omega t), t > 0
//
// (S_{l,-m}(theta; -conj(a omega)) = (-1)^l conj S_{lm}(pi - theta; a omega), so
// the partner's sign (-1)^l drops out). Hence h+ = Re(p e) and hx = Re(x e) with
// p = C (S + S'), x = i C (S - S'), and for f > 0
//
//	transform of Re(p e) = (p U + conj(p) V) / 2,
//	U = -i / (2 pi f + omega),  V = -i / (2 pi f - conj(omega)).
//
// V carries the resonance; U is the tail from the resonance at negative
// frequency.
type ringing struct {
	labels []modeLabel
	tracks []*kerr.ModeTrack
}

// modeLabel is a mode's "l,m,n" and the name its parameters carry.
type modeLabel struct {
	l, m, n int
	name    string
}

// parseModes checks the modes' labels.
func parseModes(modes []string) ([]modeLabel, error) {
	if len(modes) == 0 {
		return nil, &SettingError{"modes", "none", `at least one mode "l,m,n", e.g. "2,2,0"`}
	}
	var labels []modeLabel
	for _, text := range modes {
		l, m, n, err := ParseMode(text)
		if err != nil {
			return nil, err
		}
		// At spin 0 the solution is quick, and says whether the mode exists.
		if _, err := kerr.QuasiNormalMode(l, m, n, 0); err != nil {
			return nil, &SettingError{"modes", strconv.Quote(text), "a mode that is known (" + strings.TrimPrefix(err.Error(), "kerr: ") + ")"}
		}
		label := modeLabel{l, m, n, strings.ReplaceAll(fmt.Sprintf("%d%d%d", l, m, n), "-", "m")}
		for _, other := range labels {
			if other == label {
				return nil, &SettingError{"modes", strconv.Quote(text) + " twice", "each mode once"}
			}
		}
		labels = append(labels, label)
	}
	return labels, nil
}

// checkAngular checks Settings.Angular and says whether it asks for spherical
// factors.
func checkAngular(name string) (spherical bool, err error) {
	switch name {
	case "", "spheroidal":
		return false, nil
	case "spherical":
		return true, nil
	}
	return false, &SettingError{"angular", strconv.Quote(name), `"spheroidal" or "spherical"`}
}

// newRinging tabulates the modes over spin at one inclination. Spheroidal factors
// belong to each mode's a omega; spherical ones are those of a omega = 0, which
// some published templates use.
func newRinging(modes []string, inclination float64, angular string) (*ringing, error) {
	labels, err := parseModes(modes)
	if err != nil {
		return nil, err
	}
	spherical, err := checkAngular(angular)
	if err != nil {
		return nil, err
	}
	r := &ringing{labels: labels}
	for _, label := range labels {
		follow := kerr.NewModeTrack
		if spherical {
			follow = kerr.NewSphericalModeTrack
		}
		track, err := follow(label.l, label.m, label.n, inclination)
		if err != nil {
			return nil, fmt.Errorf("models: mode %s: %w", label.name, err)
		}
		r.tracks = append(r.tracks, track)
	}
	return r, nil
}

// ParseMode reads a mode's label "l,m,n".
func ParseMode(text string) (l, m, n int, err error) {
	bad := &SettingError{"modes", strconv.Quote(text), `"l,m,n", e.g. "2,2,0"`}
	parts := strings.Split(text, ",")
	if len(parts) != 3 {
		return 0, 0, 0, bad
	}
	for i, p := range []*int{&l, &m, &n} {
		v, e := strconv.Atoi(strings.TrimSpace(parts[i]))
		if e != nil {
			return 0, 0, 0, bad
		}
		*p = v
	}
	return l, m, n, nil
}

// modeParameters lists amplitude and phase of each mode.
func modeParameters(labels []modeLabel) []Parameter {
	var list []Parameter
	for _, label := range labels {
		list = append(list,
			Parameter{Name: "amplitude_" + label.name, Note: "strain amplitude at the start", Low: 0, High: 1},
			Parameter{Name: "phase_" + label.name, Unit: "rad", Note: "phase at the start", Low: 0, High: 2 * math.Pi, Periodic: true})
	}
	return list
}

// derived lists frequency and damping time of each mode.
func (r *ringing) derived() []Parameter {
	var list []Parameter
	for _, label := range r.labels {
		list = append(list,
			Parameter{Name: "frequency_" + label.name, Unit: "Hz", Note: "mode frequency in the detector frame"},
			Parameter{Name: "damping_time_" + label.name, Unit: "s", Note: "mode damping time in the detector frame"})
	}
	return list
}

func (r *ringing) derive(mass, spin float64, out []float64) error {
	scale := mass * constants.SolarMassSeconds
	for i, track := range r.tracks {
		omega, _, _, err := track.At(spin)
		if err != nil {
			return err
		}
		out[2*i] = real(omega) / (2 * math.Pi * scale)
		out[2*i+1] = -scale / imag(omega)
	}
	return nil
}

// wave is one mode at one point of parameter space, ready for the kernel.
type wave struct {
	omegaRe, omegaIm float64 // rad/s; omegaIm < 0
	p, x             complex128
}

// wave i at (mass, spin) with the amplitude and phase given.
func (r *ringing) wave(i int, mass, spin, amplitude, phase float64) (wave, error) {
	omega, north, south, err := r.tracks[i].At(spin)
	if err != nil {
		return wave{}, err
	}
	scale := mass * constants.SolarMassSeconds
	sin, cos := math.Sincos(phase)
	c := complex(amplitude*cos, amplitude*sin)
	return wave{
		omegaRe: real(omega) / scale,
		omegaIm: imag(omega) / scale,
		p:       c * (north + south),
		x:       1i * c * (north - south),
	}, nil
}

// addTo adds the modes as a horizon leaves them, for theta that begins with mass, spin,
// start_time and each mode's amplitude and phase. Every model that contains the ringdown
// adds it in this order, which makes it the ringdown bit for bit.
func (r *ringing) addTo(h *Polarizations, theta []float64, g Grid, lead float64) error {
	for i := range r.tracks {
		w, err := r.wave(i, theta[0], theta[1], theta[3+2*i], theta[4+2*i])
		if err != nil {
			return err
		}
		h.add(w, g, 0)
		if lead > 0 {
			h.addLead(w, g, lead)
		}
	}
	return nil
}

// clear zeroes the polarisations.
func (h *Polarizations) clear() {
	clear(h.PlusRe)
	clear(h.PlusIm)
	clear(h.CrossRe)
	clear(h.CrossIm)
}

// add adds one mode's transform over the grid's bins from onwards.
func (h *Polarizations) add(w wave, g Grid, from int) {
	pr, pi := real(w.p)/2, imag(w.p)/2
	xr, xi := real(w.x)/2, imag(w.x)/2
	y2 := w.omegaIm * w.omegaIm
	step := 2 * math.Pi * g.Step
	plusRe, plusIm := h.PlusRe[from:g.Count], h.PlusIm[from:g.Count]
	crossRe, crossIm := h.CrossRe[from:g.Count], h.CrossIm[from:g.Count]
	plusIm, crossRe, crossIm = plusIm[:len(plusRe)], crossRe[:len(plusRe)], crossIm[:len(plusRe)]
	for j := range plusRe {
		angular := float64(g.First+from+j) * step
		near, far := angular-w.omegaRe, angular+w.omegaRe
		// One division for both reciprocals.
		nearSquare, farSquare := near*near+y2, far*far+y2
		both := -1 / (nearSquare * farSquare)
		vi, ui := both*farSquare, both*nearSquare
		vr, ur := vi*w.omegaIm, ui*w.omegaIm
		vi, ui = vi*near, ui*far
		// p U + conj(p) V
		sumR, sumI, difR, difI := ur+vr, ui+vi, ur-vr, ui-vi
		plusRe[j] += pr*sumR - pi*difI
		plusIm[j] += pr*sumI + pi*difR
		crossRe[j] += xr*sumR - xi*difI
		crossIm[j] += xr*sumI + xi*difR
	}
}

// addEchoing is add for the bins before len(eRe), of a mode whose spectrum is
// multiplied by an echo sum. In the convention exp(-i omega t) the resonance
// seen at f > 0 is the conjugate of the mode at omega = +2 pi f, and the tail is
// the mode itself at omega = -2 pi f; so V is multiplied by conj(e) with e the
// sum at +2 pi f, and U by t, the sum at -2 pi f.
func (h *Polarizations) addEchoing(w wave, g Grid, eRe, eIm, tRe, tIm []float64) {
	pr, pi := real(w.p)/2, imag(w.p)/2
	xr, xi := real(w.x)/2, imag(w.x)/2
	y2 := w.omegaIm * w.omegaIm
	step := 2 * math.Pi * g.Step
	n := len(eRe)
	plusRe, plusIm := h.PlusRe[:n], h.PlusIm[:n]
	crossRe, crossIm := h.CrossRe[:n], h.CrossIm[:n]
	eIm, tRe, tIm = eIm[:n], tRe[:n], tIm[:n]
	for j := range eRe {
		angular := float64(g.First+j) * step
		near, far := angular-w.omegaRe, angular+w.omegaRe
		// One division for both reciprocals.
		nearSquare, farSquare := near*near+y2, far*far+y2
		both := -1 / (nearSquare * farSquare)
		vi, ui := both*farSquare, both*nearSquare
		vr, ur := vi*w.omegaIm, ui*w.omegaIm
		vi, ui = vi*near, ui*far
		// V conj(e) and U t
		vr, vi = vr*eRe[j]+vi*eIm[j], vi*eRe[j]-vr*eIm[j]
		ur, ui = ur*tRe[j]-ui*tIm[j], ur*tIm[j]+ui*tRe[j]
		sumR, sumI, difR, difI := ur+vr, ui+vi, ur-vr, ui-vi
		plusRe[j] += pr*sumR - pi*difI
		plusIm[j] += pr*sumI + pi*difR
		crossRe[j] += xr*sumR - xi*difI
		crossIm[j] += xr*sumI + xi*difR
	}
}

// delay multiplies h by exp(-2 pi i f seconds): the same signal, later. cos and
// sin are scratch space of the grid's length.
func (h *Polarizations) delay(seconds float64, g Grid, cos, sin []float64) {
	fillTurns(0, -2*math.Pi*g.Step*seconds, float64(g.First), cos, sin)
	for j := range g.Count {
		c, s := cos[j], sin[j]
		h.PlusRe[j], h.PlusIm[j] = h.PlusRe[j]*c-h.PlusIm[j]*s, h.PlusRe[j]*s+h.PlusIm[j]*c
		h.CrossRe[j], h.CrossIm[j] = h.CrossRe[j]*c-h.CrossIm[j]*s, h.CrossRe[j]*s+h.CrossIm[j]*c
	}
}
