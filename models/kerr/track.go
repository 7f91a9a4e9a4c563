package kerr

import (
	"fmt"
	"math"
	"math/cmplx"
)

// ModeTrack is one quasi-normal mode, seen at one polar angle, over the whole
// range of spins: what a sampler needs, in some tens of nanoseconds. It never
// changes after it is made, so any number of goroutines may read it.
type ModeTrack struct {
	index  panelIndex
	powers [][panelNodes]trackPoint // by panel: coefficients of the powers of its coordinate
}

// trackPoint has the real and imaginary parts of ω and of the angular function at
// θ and at π - θ.
type trackPoint [trackFunctions]float64

const (
	trackFunctions = 6
	// trackTolerance bounds the last two Chebyshev coefficients of an angular
	// function, relative to its size. Those of ω are the table's.
	trackTolerance = 5e-12
)

// NewModeTrack takes mode (l, m, n) over the spins from 0 to MaxSpin from the
// embedded table and follows its spheroidal function (see Spheroidal; γ = aω) at
// polar angle theta (rad, 0 to π) and at π - theta. Ranges of l, m and n as for
// QuasiNormalMode. It takes some milliseconds.
func NewModeTrack(l, m, n int, theta float64) (*ModeTrack, error) {
	curve, sphere, err := trackParts(l, m, n, theta)
	if err != nil {
		return nil, err
	}
	sample := func(h *harmonic, u []float64, values [][]float64) error {
		for j, at := range u {
			omega, _ := curve.at(at)
			if err := h.follow(complex(math.Tanh(at), 0) * omega); err != nil {
				return err
			}
			for f, v := range []complex128{omega, h.at(theta), h.at(math.Pi - theta)} {
				values[2*f][j], values[2*f+1][j] = real(v), imag(v)
			}
		}
		return nil
	}
	small := func(c chebyshev) bool {
		size := func(f, k int) float64 { return cmplx.Abs(complex(c[f][k], c[f+1][k])) }
		// Along the axis all functions but those of m = ±2 vanish; the largest
		// values of any are about 1.
		scale := 1e-3 + size(2, 0) + size(4, 0)
		for _, k := range []int{panelNodes - 2, panelNodes - 1} {
			if max(size(2, k), size(4, k)) > trackTolerance*scale {
				return false
			}
		}
		return true
	}
	panels, series, err := adapt(*sphere, curve.panels, trackFunctions, sample, small)
	if err != nil {
		return nil, fmt.Errorf("kerr: mode (%d,%d,%d): %w", l, m, n, err)
	}
	t := &ModeTrack{index: newPanelIndex(panels), powers: make([][panelNodes]trackPoint, len(panels))}
	for i, s := range series {
		for f := range s {
			for k, v := range powers(s[f]) {
				t.powers[i][k][f] = v
			}
		}
	}
	return t, nil
}

// NewSphericalModeTrack is NewModeTrack with the spherical functions -2Y_lm in
// place of the spheroidal ones: the same angular factors at every spin. It takes
// some microseconds once the mode's record is decoded.
func NewSphericalModeTrack(l, m, n int, theta float64) (*ModeTrack, error) {
	curve, sphere, err := trackParts(l, m, n, theta)
	if err != nil {
		return nil, err
	}
	t := &ModeTrack{index: curve.index, powers: make([][panelNodes]trackPoint, len(curve.powers))}
	north, south := sphere.at(theta), sphere.at(math.Pi-theta)
	for i := range t.powers {
		for k, v := range curve.powers[i] {
			t.powers[i][k] = trackPoint{v[0], v[1]}
		}
		t.powers[i][0] = trackPoint{curve.powers[i][0][0], curve.powers[i][0][1], real(north), imag(north), real(south), imag(south)}
	}
	return t, nil
}

// trackParts checks the arguments of a track and returns what it starts from.
func trackParts(l, m, n int, theta float64) (*modeCurve, *harmonic, error) {
	if err := checkMode(l, m, n); err != nil {
		return nil, nil, err
	}
	if !(theta >= 0 && theta <= math.Pi) {
		return nil, nil, fmt.Errorf("kerr: theta = %g rad, want 0 to π", theta)
	}
	curve, err := tabulatedCurve(l, m, n)
	if err != nil {
		return nil, nil, err
	}
	sphere, err := sphericalHarmonic(l, m)
	return curve, sphere, err
}

// At returns Mω and the angular function at theta and π - theta. Against
// QuasiNormalMode and Spheroidal, ω is off by less than 1e-11 relative and the
// function by less than 1e-10 of its size. A spin outside 0 to MaxSpin is an
// error. At allocates nothing.
func (t *ModeTrack) At(spin float64) (omega, sNorth, sSouth complex128, err error) {
	if err := checkSpin(spin); err != nil {
		return 0, 0, 0, err
	}
	i, x := t.index.locate(math.Atanh(spin))
	p := &t.powers[i]
	q := &p[panelNodes-1]
	wr, wi, nr, ni, sr, si := q[0], q[1], q[2], q[3], q[4], q[5]
	for k := panelNodes - 2; k >= 0; k-- {
		q := &p[k]
		wr, wi = wr*x+q[0], wi*x+q[1]
		nr, ni = nr*x+q[2], ni*x+q[3]
		sr, si = sr*x+q[4], si*x+q[5]
	}
	return complex(wr, wi), complex(nr, ni), complex(sr, si), nil
}
