package models

import (
	"fmt"
	"math"
	"math/cmplx"
	"testing"

	"gonum.org/v1/gonum/dsp/fourier"

	"knell/internal/checktable"
	"knell/internal/constants"
	"knell/models/kerr"
)

// groupDelay is d arg R / d omega at a real frequency, in M: with the surface at x0 an
// echo of that frequency comes -2 x0 + groupDelay after the one before.
func groupDelay(t testing.TB, l, m int, spin, omega float64, parity kerr.Parity) float64 {
	t.Helper()
	// R is good to 1e-12 and bends over 0.1: the central difference is good to 1e-6.
	const h = 1e-4
	var r [2]complex128
	for i, w := range []float64{omega - h, omega + h} {
		response, err := kerr.BarrierResponse(l, m, spin, w, parity)
		if err != nil {
			t.Fatal(err)
		}
		r[i] = response.Reflection
	}
	return cmplx.Phase(r[1]/r[0]) / (2 * h)
}

// At one frequency an echo is late by the group delay of the round trip. What is left
// of the signal in a narrow band about the mode's frequency has its centre of energy
// there, found from samples, to within one sample. The light ring is where the barrier
// is highest, not where a wave of the mode's frequency turns: it lingers there, so that
// the centre lies behind the echo delay's estimate by what TestPhysicsEchoDelayAgainstGroupDelay gives.
func TestPhysicsEchoesByGroupDelay(t *testing.T) {
	table := checktable.New(t, "centre of energy of echo 1 after the ringdown's, at the mode's frequency, in samples of 1/32768 s")
	// Half width in M omega, 2 Hz here. The delay of the band is the mean of the group
	// delay over the power in it, which moves away from that at the mode's frequency
	// with the square of the width; it is 0.3 samples off at this one.
	const width = 0.004
	for _, c := range trains("cavity") {
		if c.s.Excitation != "" {
			continue
		}
		const duration = 4
		e := trainOf(t, c, duration, 1)
		l, m, n, err := ParseMode(c.s.Modes[0])
		if err != nil {
			t.Fatal(err)
		}
		parity := kerr.Odd
		if c.s.Parity == "even" {
			parity = kerr.Even
		}
		spin, scale := c.values["spin"], c.values["mass"]*constants.SolarMassSeconds
		mode, err := kerr.QuasiNormalMode(l, m, n, spin)
		if err != nil {
			t.Fatal(err)
		}
		centre := func(part []complex128) float64 {
			narrow := make([]complex128, len(part))
			for j, z := range part {
				x := (e.omega(j)*scale - real(mode.Omega)) / width
				narrow[j] = z * complex(math.Exp(-x*x/2), 0)
			}
			var sum, moment float64
			// From a quarter of the segment before the start to three quarters after:
			// in a band so narrow the ringdown swells for 1 / 0.004 M = 0.08 s on each side.
			for i, z := range fourier.NewCmplxFFT(len(narrow)).Sequence(nil, narrow) {
				if i > 3*len(narrow)/4 {
					i -= len(narrow)
				}
				power := real(z)*real(z) + imag(z)*imag(z)
				sum, moment = sum+power, moment+power*float64(i)
			}
			return moment / sum
		}
		trip := groupDelay(t, l, m, spin, real(mode.Omega), parity) - 2*kerr.SurfaceTortoise(spin, lnDistance(c.values["mass"], c.values["offset"]))
		table.Absolute(c.name, centre(e.parts[1])-centre(e.parts[0]), trip*scale*timeRate, 1, "d arg q / d omega, barrier integrated directly")
	}
}

// The barrier's top, where a wave of the mode's frequency turns slowly, delays the echo
// against the estimate that reflects it at the light ring at once. At spin 0 the barrier
// is much like one over cosh^2, of which everything is known: with b = -2 Im omega
// the width that gives the same mode, y = Re omega / b, the group delay at that frequency
// is
//
//	(2 Re psi(i y) - psi(1/2) - Re psi(1/2 + 2 i y)) / b,
//
// psi the digamma function. Odd and even parity lie on either side of one another by some
// tenths; the mean is compared, to the fifth by which the shapes differ.
func TestPhysicsEchoDelayAgainstGroupDelay(t *testing.T) {
	table := checktable.New(t, "group delay at the (l,m,0) frequency less the light ring's, in M")
	late := func(l, m int, spin float64, parity kerr.Parity) float64 {
		mode, err := kerr.QuasiNormalMode(l, m, 0, spin)
		if err != nil {
			t.Fatal(err)
		}
		return groupDelay(t, l, m, spin, real(mode.Omega), parity) - 2*kerr.Tortoise(spin, kerr.LightRing(spin))
	}
	for l := 2; l <= 4; l++ {
		mode, err := kerr.QuasiNormalMode(l, l, 0, 0)
		if err != nil {
			t.Fatal(err)
		}
		b := -2 * imag(mode.Omega)
		y := real(mode.Omega) / b
		// The digamma functions by their asymptotic series, good to 1e-4 at y > 2;
		// psi(1/2) = -gamma - 2 ln 2.
		imaginary := math.Log(y) + 1/(12*y*y) + 1/(120*math.Pow(y, 4))
		half := math.Log(2*y) - 1/(24*4*y*y)
		want := (2*imaginary + 1.9635100260214235 - half) / b
		ours := (late(l, l, 0, kerr.Odd) + late(l, l, 0, kerr.Even)) / 2
		table.Relative(fmt.Sprintf("l = %d, spin 0", l), ours, want, 0.2, "1/cosh^2 barrier with the same mode")
	}
	// Whoever reads an echo delay off a model takes it for the time between echoes. It
	// is, to 2 percent of the delay of a surface a Planck length outside the horizon
	// of 68 solar masses.
	worst := 0.0
	for _, spin := range []float64{0, 0.3, 0.5, 0.69, 0.8, 0.9, 0.95, 0.99} {
		delay := kerr.EchoDelay(spin, lnDistance(68, 0))
		for _, parity := range []kerr.Parity{kerr.Odd, kerr.Even} {
			share := late(2, 2, spin, parity) / delay
			if share <= 0 {
				t.Errorf("spin %g, %s: the echo comes before the light ring's, by %.3g of the delay", spin, parity, -share)
			}
			worst = max(worst, share)
		}
	}
	table.Worst("l = m = 2, all spins, over the delay of 68 solar masses", worst, 0.02, "as stated for echo_delay")
}
