package kerr

import (
	"fmt"
	"math"
	"math/cmplx"
)

// The quasi-normal modes that this package answers for.
const (
	minMultipole = 2
	maxMultipole = 4
	maxOvertone  = 7
)

// Mode is a quasi-normal mode of a remnant of mass 1: fields go as
// exp(-iωt + imφ), so Im Omega < 0 is decay.
type Mode struct {
	L, M, N    int
	Spin       float64    // a/M
	Omega      complex128 // Mω
	Separation complex128 // A of the angular equation; l(l+1)-2 at a = 0
}

// QuasiNormalMode returns the mode (l, m, n) of spin weight -2 at a spin, by
// solving the radial and the angular continued fraction together (Proc. R. Soc.
// A 402, 285 (1985)) and following the root from spin 0, where overtone n is
// the n-th by decay rate. m < 0 is the family that counter-rotates, with
// Re ω > 0 like the rest. The last step is done in 32 digits, so ω is good to
// 1e-14 and A to a few times that. A root that a fraction cut twice as deep
// moves by 1e-12 of itself is an error.
//
// l runs from 2 to 4, m from -l to l, n from 0 to 7 and spin from 0 to MaxSpin;
// outside, the error names the range. A call costs 1 to 20 ms: for many spins
// use TabulatedMode or build a ModeTrack.
func QuasiNormalMode(l, m, n int, spin float64) (Mode, error) {
	if err := checkMode(l, m, n); err != nil {
		return Mode{}, err
	}
	if err := checkSpin(spin); err != nil {
		return Mode{}, err
	}
	f, err := newFollower(l, m, n)
	if err != nil {
		return Mode{}, err
	}
	if err := f.advance(math.Atanh(spin)); err != nil {
		return Mode{}, err
	}
	w, a, err := polishMode(l, m, n, spin, f.omega(), f.separation())
	if err != nil {
		return Mode{}, err
	}
	return Mode{L: l, M: m, N: n, Spin: spin, Omega: w, Separation: a}, nil
}

func checkMode(l, m, n int) error {
	switch {
	case l < minMultipole || l > maxMultipole:
		return fmt.Errorf("kerr: mode (%d,%d,%d): l = %d, want %d to %d", l, m, n, l, minMultipole, maxMultipole)
	case absInt(m) > l:
		return fmt.Errorf("kerr: mode (%d,%d,%d): m = %d, want %d to %d", l, m, n, m, -l, l)
	case n < 0 || n > maxOvertone:
		return fmt.Errorf("kerr: mode (%d,%d,%d): n = %d, want 0 to %d", l, m, n, n, maxOvertone)
	}
	return nil
}

// nonSpinning holds Mω at spin 0 by [l-2][n], six digits: starting points that
// the fraction refines. Each row was found by stepping down from the
// fundamental at the spacing of the two roots above; the first seven of l = 2,
// four of l = 3 and two of l = 4 are those of Proc. R. Soc. A 402, 285 (1985).
var nonSpinning = [...][maxOvertone + 1]complex128{
	{0.373672 - 0.088962i, 0.346711 - 0.273915i, 0.301053 - 0.478277i, 0.251505 - 0.705148i,
		0.207515 - 0.946845i, 0.169299 - 1.195608i, 0.133252 - 1.447911i, 0.092822 - 1.703841i},
	{0.599443 - 0.092703i, 0.582644 - 0.281298i, 0.551685 - 0.479093i, 0.511962 - 0.690337i,
		0.470174 - 0.915649i, 0.431386 - 1.152151i, 0.397660 - 1.395912i, 0.368992 - 1.643845i},
	{0.809178 - 0.094164i, 0.796632 - 0.284334i, 0.772710 - 0.479908i, 0.739837 - 0.683924i,
		0.701516 - 0.898239i, 0.661572 - 1.122977i, 0.623109 - 1.356686i, 0.587909 - 1.597171i},
}

// radialDepth is where the radial fraction is cut. The remainder series gets
// better with the depth and worse with 1/√(1-a²). Cut here, it moves no root of
// n <= 7 by more than rounding does (measured at spins 0.9, 0.99 and 0.998).
func radialDepth(spin float64) int { return 500 + int(145/rootOfDeficit(spin)) }

// solveMode refines a mode from a guess of frequency and separation constant.
func solveMode(l, m, invert, depth int, spin float64, omega, separation complex128) (w, a complex128, ok bool) {
	a, angularOK := separation, true
	w, ok = secant(func(w complex128) complex128 {
		a, angularOK = solveAngular(l, m, complex(spin, 0)*w, a)
		r := radialRecurrence(m, spin, w, a)
		return r.fraction(invert, depth)
	}, omega, 1e-7, 1e-14)
	if ok {
		a, angularOK = solveAngular(l, m, complex(spin, 0)*w, a)
	}
	return w, a, ok && angularOK
}

// follower walks one mode up in spin. The walk is in u = artanh(a), in which
// spins from 0 to MaxSpin are equally hard.
type follower struct {
	l, m, n int
	step    float64 // step in u that the last prediction deserved
	known   int     // points in the arrays, newest last
	u       [followed]float64
	w, a    [followed]complex128
}

// followed is how many earlier points predict the next.
const followed = 5

// Steps of the walk in u. A root is accepted within followTolerance of its
// prediction. Overtones lie at least κ ≈ 0.03 apart over most of the range, but
// some pairs pass each other within 0.006 near spin 0.97 (l=3, m=1, n=5 and 6)
// or 0.99 (l=4, m=2, n=4 and 5), and turn sharply there.
const (
	firstStep       = 1e-4
	largestStep     = 0.05
	smallestStep    = 1e-7
	followTolerance = 1e-4
)

func newFollower(l, m, n int) (*follower, error) {
	f := &follower{l: l, m: m, n: n, step: firstStep}
	w, a, ok := solveMode(l, m, n, radialDepth(0), 0, nonSpinning[l-minMultipole][n], complex(float64(l*(l+1)-2), 0))
	if !ok {
		return nil, fmt.Errorf("kerr: mode (%d,%d,%d): no root of the continued fraction at spin 0", l, m, n)
	}
	f.push(0, w, a)
	return f, nil
}

func (f *follower) push(u float64, w, a complex128) {
	if f.known > 0 && u-f.u[f.known-1] < smallestStep/2 {
		f.known-- // two points so close would spoil the prediction
	}
	if f.known == followed {
		copy(f.u[:], f.u[1:])
		copy(f.w[:], f.w[1:])
		copy(f.a[:], f.a[1:])
		f.known--
	}
	f.u[f.known], f.w[f.known], f.a[f.known] = u, w, a
	f.known++
}

func (f *follower) omega() complex128      { return f.w[f.known-1] }
func (f *follower) separation() complex128 { return f.a[f.known-1] }

// predict extrapolates the polynomial through the known points.
func (f *follower) predict(u float64) (w, a complex128) {
	for i := range f.known {
		weight := 1.0
		for j := range f.known {
			if j != i {
				weight *= (u - f.u[j]) / (f.u[i] - f.u[j])
			}
		}
		w += complex(weight, 0) * f.w[i]
		a += complex(weight, 0) * f.a[i]
	}
	return w, a
}

// advance moves the follower up to u = artanh(spin), in steps that shrink where
// the prediction fails.
func (f *follower) advance(target float64) error {
	for f.u[f.known-1] < target {
		from := f.u[f.known-1]
		next, short := from+f.step, false
		if next >= target-smallestStep/2 {
			next, short = target, true
		}
		guessW, guessA := f.predict(next)
		spin := math.Tanh(next)
		w, a, ok := solveMode(f.l, f.m, f.n, radialDepth(spin), spin, guessW, guessA)
		miss := cmplx.Abs(w - guessW)
		if !ok || miss > followTolerance {
			f.step = (next - from) / 2
			if f.step < smallestStep {
				return fmt.Errorf("kerr: mode (%d,%d,%d): lost beyond spin %.6f", f.l, f.m, f.n, math.Tanh(from))
			}
			continue
		}
		f.push(next, w, a)
		if miss < followTolerance/8 && !short {
			f.step = min(1.5*f.step, largestStep)
		}
	}
	return nil
}
