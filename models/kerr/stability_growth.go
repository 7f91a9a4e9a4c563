package kerr

import (
	"fmt"
	"math"
	"math/cmplx"
)

// FastestGrowth returns the fastest growing mode of a cavity: the ω with the largest
// Im ω > 0 that solves
//
//	q(ω) = R(ω) Rs(k) exp(iφ) exp(-2ik x0) = 1,   k = ω - mΩ_H,
//
// with x0 the surface's tortoise coordinate, φ = phase that of the surface and
// reflectivity |Rs|. Fields go as exp(-iωt), so the mode's amplitude grows e-fold in
// 1/Im ω (in M). growing is false, and ω 0, if no mode in the superradiant band
// grows, even where the loop gain exceeds 1 between two modes. For m < 0 the band, and
// with it Re ω, is negative; φ is the phase at those frequencies.
//
// To lowest order the modes are the real ω_n at which a round trip closes, arg q =
// 2πn, and each round trip, of duration τ = d(arg q)/dω, multiplies the wave by |q|:
// Im ω = ln|q|/τ. Around every maximum of that rate over the band the four nearest
// modes are then solved as complex ω by Newton's method. ln R continues
// analytically. Rs, known for real k only, continues by its logarithm's straight line
// at Re k; that is exact for constant and Boltzmann laws, and of relative order
// (Im ω/κ)² for others.
//
// Where dR/dω makes τ negative the wave turns back behind the surface; such parts of
// the band are left out, and a surface outside of all of it is an error. So is a mode
// that grows e-fold within 2/κ: neither is a cavity that echoes.
//
// |q| at ω is good to 1e-6 of |R|-1. l runs from 2 to 4, |m| <= l, spin from 0 to
// MaxSpin. Cost some tens of µs, without allocation (and 35 ms for a table at the
// first call of an (l, |m|)).
func FastestGrowth(l, m int, parity Parity, spin, x0, phase float64, reflectivity func(k float64) float64) (omega complex128, growing bool, err error) {
	if err := parity.check(); err != nil {
		return 0, false, err
	}
	if math.IsNaN(x0) || math.IsInf(x0, 0) || math.IsNaN(phase) || math.IsInf(phase, 0) {
		return 0, false, fmt.Errorf("kerr: surface at r* = %g with phase %g, want finite numbers", x0, phase)
	}
	b, side, err := loopBand(l, m, spin)
	if err != nil || b.turn == 0 {
		return 0, false, err
	}
	g, err := gainTables[l][b.m]()
	if err != nil {
		return 0, false, err
	}
	b.setPhase(g, parity)
	// The modes of -m are -ω* of those of m, with the opposite phase.
	c := cavity{band: &b, x0: x0, phase: side * phase, side: side, reflectivity: reflectivity}
	omega, err = c.fastest()
	if err != nil || omega == 0 {
		return 0, false, err
	}
	if side < 0 {
		omega = -cmplx.Conj(omega)
	}
	return omega, true, nil
}

// cavity is a band closed by a surface.
type cavity struct {
	*band
	x0, phase, side float64
	reflectivity    func(k float64) float64
}

// fastest returns the fastest growing mode, or 0.
func (c *cavity) fastest() (complex128, error) {
	// The rate ln|q|/τ of each point; turns counts 2π of arg q.
	var rate, turns [searchSteps + 1]float64
	first, last, delay := math.Inf(1), math.Inf(-1), 0.0
	for i := range rate {
		rate[i], turns[i], delay = c.rate(float64(i)/searchSteps, delay)
		first, last = min(first, turns[i]), max(last, turns[i])
	}
	first, last = math.Ceil(first), math.Floor(last)
	if delay <= 0 {
		return 0, fmt.Errorf("kerr: surface at r* = %g: no wave between it and the barrier takes time for a round trip", c.x0)
	}
	var best complex128
	for i := range rate {
		before, after := max(i-1, 0), min(i+1, searchSteps)
		if rate[i] < rate[before] || rate[i] < rate[after] || math.IsInf(rate[i], -1) {
			continue
		}
		s, top := refine(func(s float64) float64 { rate, _, _ := c.rate(s, 0); return rate },
			float64(before)/searchSteps, float64(i)/searchSteps, float64(after)/searchSteps, rate[i])
		if top <= 0 {
			continue
		}
		_, at, _ := c.rate(s, 0)
		for n, end := max(math.Floor(at)-1, first), min(math.Floor(at)+2, last); n <= end; n++ {
			omega, err := c.mode(n, c.guess(n, &turns, &rate))
			if err != nil {
				return 0, err
			}
			if imag(omega) > imag(best) && real(omega) >= 0 && real(omega) <= c.turn {
				best = omega
			}
		}
	}
	return best, nil
}

// rate returns ln|q|/τ, arg q/2π and the larger of τ and delay at searched(s). Where τ
// is not positive the wave turns back behind the surface, and the rate is -Inf.
func (c *cavity) rate(s, delay float64) (rate, turns, longest float64) {
	lnq, slope := c.lnQ(complex(c.turn-c.searched(s), 0))
	rate, tau := math.Inf(-1), imag(slope)
	if tau > 0 {
		rate = real(lnq) / tau
	}
	return rate, imag(lnq) / (2 * math.Pi), max(tau, delay)
}

// lnQ returns ln q without jumps and its derivative at complex ω near the band.
func (c *cavity) lnQ(omega complex128) (lnq, slope complex128) {
	// A central difference will do: it only steers Newton's method, and τ.
	h := complex(1e-4*min(c.kappa, c.turn), 0)
	r := c.lnR(omega)
	slope = (c.lnR(omega+h) - c.lnR(omega-h)) / (2 * h)
	p := min(max(c.turn-real(omega), 0), c.turn)
	step := 1e-4 * min(c.kappa, c.turn)
	at := max(p, step) // stay on the band's side of k = 0, where a law may have a corner
	lnRs := math.Log(math.Abs(c.reflectivity(-c.side * p)))
	rsSlope := math.Log(math.Abs(c.reflectivity(-c.side*(at-step))/c.reflectivity(-c.side*(at+step)))) / (2 * step)
	if math.IsNaN(rsSlope) || math.IsInf(rsSlope, 0) {
		rsSlope = 0 // a surface that does not reflect here; lnRs says so
	}
	k := omega - complex(c.turn, 0)
	lnq = r + complex(lnRs, c.phase) - complex(0, 2*c.x0)*k
	slope += complex(rsSlope, -2*c.x0)
	return lnq + complex(0, imag(omega)*rsSlope), slope
}

// guess starts mode n from the search's points on either side of it.
func (c *cavity) guess(n float64, turns, rate *[searchSteps + 1]float64) complex128 {
	i := 0
	for i < searchSteps-1 && turns[i+1] > n {
		i++
	}
	f := min(max((turns[i]-n)/(turns[i]-turns[i+1]), 0), 1)
	re := c.turn - (1-f)*c.searched(float64(i)/searchSteps) - f*c.searched(float64(i+1)/searchSteps)
	im := (1-f)*rate[i] + f*rate[i+1]
	if !(math.Abs(im) < c.kappa/4) {
		im = 0
	}
	return complex(re, im)
}

// mode solves ln q = 2πin from a guess; of a mode that decays fast it only says so.
func (c *cavity) mode(n float64, omega complex128) (complex128, error) {
	want := complex(0, 2*math.Pi*n)
	from := omega
	for range 40 {
		lnq, slope := c.lnQ(omega)
		if cmplx.Abs(want-lnq) <= 1e-14*(10+math.Abs(2*c.x0*c.turn)) {
			return omega, nil
		}
		omega += (want - lnq) / slope
		if imag(omega) < -c.kappa/2 {
			return omega, nil // it decays, that is all that is asked
		}
		if !(imag(omega) <= c.kappa/2) {
			break
		}
	}
	return 0, fmt.Errorf("kerr: surface at r* = %g: no mode found near Mω = %.4g, want one that takes more than %.4g M to grow e-fold", c.x0, real(from), 2/c.kappa)
}
