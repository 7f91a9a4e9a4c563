package kerr

import (
	"fmt"
	"math"
	"math/cmplx"
)

// ModeTrack is one quasi-normal mode, seen at one polar angle, over the whole
// range of spins: what a sampler needs, in some tens of nanoseconds. It never
// changes after NewModeTrack, so any number of goroutines may read it.
type ModeTrack struct {
	points   [trackPieces][]trackPoint // equal pieces of u = artanh(spin), each at equal steps, both ends included
	perPiece float64                   // pieces per unit of u
}

type trackPoint struct{ omega, north, south complex128 }

// A track interpolates through trackOrder points of a piece. The steps of a
// piece are halved until every second point is reproduced by the others to
// trackTolerance. Most pieces keep the first grid; where two overtones nearly
// meet, a branch point close to real spins needs a much finer one.
const (
	trackPieces    = 64
	trackOrder     = 6
	trackTolerance = 5e-10
	coarsestPiece  = 10 // steps
	finestPiece    = coarsestPiece << 9
)

// NewModeTrack follows mode (l, m, n) over the spins from 0 to MaxSpin and
// tabulates its frequency and its angular function at polar angle theta (rad,
// 0 to π) and at π - theta. Ranges of l, m and n as for QuasiNormalMode. It
// takes about 20 ms for a mode that moves smoothly, up to 1 s for one that does
// not.
func NewModeTrack(l, m, n int, theta float64) (*ModeTrack, error) {
	if err := checkMode(l, m, n); err != nil {
		return nil, err
	}
	if !(theta >= 0 && theta <= math.Pi) {
		return nil, fmt.Errorf("kerr: theta = %g rad, want 0 to π", theta)
	}
	f, err := newFollower(l, m, n)
	if err != nil {
		return nil, err
	}
	h, err := sphericalHarmonic(l, m)
	if err != nil {
		return nil, err
	}
	t := &ModeTrack{perPiece: trackPieces / math.Atanh(MaxSpin)}
	for i := range t.points {
		steps, off := coarsestPiece/2, math.Inf(1)
		for off > trackTolerance {
			if steps *= 2; steps > finestPiece {
				return nil, fmt.Errorf("kerr: mode (%d,%d,%d): %d steps near spin %.4f interpolate to %.1e only", l, m, n, finestPiece, math.Tanh(float64(i)/t.perPiece), off)
			}
			// Each attempt starts from copies of the state at the piece's start.
			follow, harmonic := *f, *h
			points := make([]trackPoint, steps+1)
			for j := range points {
				u := (float64(i) + float64(j)/float64(steps)) / t.perPiece
				if err := follow.advance(u); err != nil {
					return nil, err
				}
				if err := harmonic.follow(complex(math.Tanh(u), 0) * follow.omega()); err != nil {
					return nil, err
				}
				points[j] = trackPoint{omega: follow.omega(), north: harmonic.at(theta), south: harmonic.at(math.Pi - theta)}
			}
			t.points[i] = points
			if off = halvedError(points) / (1 << trackOrder); off <= trackTolerance {
				*f, *h = follow, harmonic
			}
		}
	}
	return t, nil
}

// halvedError returns the largest error, relative to |ω| or to the size of the
// angular function, of odd points interpolated from the even ones. That of the
// whole grid is 2⁶ times smaller.
func halvedError(points []trackPoint) float64 {
	var even []trackPoint
	for i := 0; i < len(points); i += 2 {
		even = append(even, points[i])
	}
	worst := 0.0
	for i := 1; i < len(points); i += 2 {
		got, want := interpolate(even, float64(i)/2), points[i]
		// Along the axis all functions but those of m = ±2 vanish; the largest
		// values of any are about 1.
		angular := 1e-3 + cmplx.Abs(want.north) + cmplx.Abs(want.south)
		worst = max(worst, cmplx.Abs(got.omega/want.omega-1),
			cmplx.Abs(got.north-want.north)/angular, cmplx.Abs(got.south-want.south)/angular)
	}
	return worst
}

// interpolate returns the point at position x in units of steps.
func interpolate(points []trackPoint, x float64) (p trackPoint) {
	first, at := locate(x, len(points), trackOrder)
	var weights [trackOrder]float64
	stencil(at, weights[:])
	for j, q := range points[first : first+trackOrder] {
		w := weights[j]
		p.omega += complex(w*real(q.omega), w*imag(q.omega))
		p.north += complex(w*real(q.north), w*imag(q.north))
		p.south += complex(w*real(q.south), w*imag(q.south))
	}
	return p
}

// At returns Mω and the spheroidal function (see Spheroidal; γ = aω) at theta
// and π - theta. Against QuasiNormalMode and Spheroidal the interpolation is off
// by less than 1e-8 relative. A spin outside 0 to MaxSpin is an error. At
// allocates nothing.
func (t *ModeTrack) At(spin float64) (omega, sNorth, sSouth complex128, err error) {
	if err := checkSpin(spin); err != nil {
		return 0, 0, 0, err
	}
	x := math.Atanh(spin) * t.perPiece
	piece := min(int(x), trackPieces-1)
	points := t.points[piece]
	p := interpolate(points, (x-float64(piece))*float64(len(points)-1))
	return p.omega, p.north, p.south, nil
}
