package kerr

import "math"

// MaxLoop returns the largest loop gain |Rs(k) R(ω)| of a cavity at a spin, k =
// ω - mΩ_H, and the ω at which it is reached. reflectivity gives |Rs|, from 0 to 1,
// at real k of either sign; it is asked some forty times at k in the superradiant
// band. Outside the band |R| < 1, so that a surface that does not amplify cannot
// reach 1 there.
//
// A cavity whose loop gain stays at or below 1 has no growing mode, whatever the
// surface's place and phase; MaxLoop > 1 is the condition of the ergoregion
// instability "at every frequency". The band's ends are marginal: there |R| = 1
// exactly, no energy passes the barrier, and a surface with Rs = 1, such as a
// Boltzmann law at k = 0, has a loop gain of exactly 1. A mode sitting there neither
// grows nor decays, and counts as stable. For m = 0 and spin 0 the band is that one
// point, and the result Rs(0), at ω = 0.
//
// A Boltzmann law at the Hawking temperature is stable at every spin
// (arXiv:1905.00464). A hotter one is unstable from 1/(T_H dΓ/dk) on, with Γ = 1 -
// |R|² at k = 0: for l = m = 2 from 158 T_H at spin 0.7, 10.1 at 0.9, 2.43 at 0.99 and
// 1.97 at 0.998 (TestPhysicsBoltzmannIsStable).
//
// An excess over 1 is good to 1e-6 of the barrier's own |R|-1 (2e-7 for l = 2); below
// 1e-16 it is lost in the result. A reflectivity that is not smooth on the scale of a
// tenth of the band may hide a narrower maximum. l runs from 2 to 4, |m| <= l, spin
// from 0 to MaxSpin. Cost some µs, without allocation; the first call for an (l, |m|)
// computes a table (30 ms).
func MaxLoop(l, m int, spin float64, reflectivity func(k float64) float64) (gain, omega float64, err error) {
	b, side, err := loopBand(l, m, spin)
	if err != nil {
		return 0, 0, err
	}
	if b.turn == 0 {
		return math.Abs(reflectivity(0)), 0, nil
	}
	// Logarithms keep the digits of an excess far below 1.
	s, top := search(func(s float64) float64 {
		p := b.searched(s)
		return math.Log(math.Abs(reflectivity(-side*p))) + math.Log1p(b.gainOf(s, p))/2
	})
	return math.Exp(top), side * (b.turn - b.searched(s)), nil
}

// loopBand returns the band of (l, |m|) with its gain set, and the sign of m. For m < 0
// the band lies at negative ω and k > 0, mirrored. Without a band its turn is 0.
func loopBand(l, m int, spin float64) (b band, side float64, err error) {
	if err := checkWave(l, m); err != nil {
		return band{}, 0, err
	}
	if err := checkSpin(spin); err != nil {
		return band{}, 0, err
	}
	side = 1
	if m < 0 {
		m, side = -m, -1
	}
	b = newBand(l, m, spin)
	if b.turn == 0 {
		return b, side, nil
	}
	g, err := gainTables[l][m]()
	if err != nil {
		return band{}, 0, err
	}
	b.setGain(g)
	return b, side, nil
}
