package kerr

import (
	"fmt"
	"math"
)

// MaxSpin is the largest dimensionless spin a/M that this package answers for.
// Beyond it the fraction of the quasi-normal modes and the table of the barrier
// are not tested.
const MaxSpin = 0.998

// checkSpin returns an error that names the range unless 0 <= spin <= MaxSpin.
func checkSpin(spin float64) error {
	if !(spin >= 0 && spin <= MaxSpin) {
		return fmt.Errorf("kerr: spin = %g, want 0 to %g", spin, MaxSpin)
	}
	return nil
}

// The functions below take a spin in [0, 1) and units of G = c = M = 1. They
// return NaN outside [0, 1).

// rootOfDeficit returns √(1-a²), without the loss of digits of 1-a*a near 1, and
// NaN outside [0, 1).
func rootOfDeficit(spin float64) float64 {
	if !(spin >= 0 && spin < 1) {
		return math.NaN()
	}
	return math.Sqrt((1 - spin) * (1 + spin))
}

// HorizonRadius returns r+ = 1 + √(1-a²), the outer horizon's radial coordinate.
func HorizonRadius(spin float64) float64 { return 1 + rootOfDeficit(spin) }

// InnerHorizonRadius returns r- = a²/r+, free of the cancellation in 1 - √(1-a²).
func InnerHorizonRadius(spin float64) float64 { return spin * spin / HorizonRadius(spin) }

// HorizonFrequency returns the angular frequency of the horizon, Ω_H = a/(2 r+).
func HorizonFrequency(spin float64) float64 { return spin / (2 * HorizonRadius(spin)) }

// SurfaceGravity returns κ = √(1-a²)/(2 r+).
func SurfaceGravity(spin float64) float64 {
	return rootOfDeficit(spin) / (2 * HorizonRadius(spin))
}

// HawkingTemperature returns T_H = κ/(2π), with ħ = k_B = 1.
func HawkingTemperature(spin float64) float64 { return SurfaceGravity(spin) / (2 * math.Pi) }

// LightRing returns the radius of the prograde circular photon orbit in the
// equatorial plane, r = 2 (1 + cos(⅔ arccos(-a))) (ApJ 178, 347 (1972)).
func LightRing(spin float64) float64 { return HorizonRadius(spin) + lightRingGap(spin) }

// lightRingGap returns the prograde light ring's r - r+, good to rounding at
// every spin. With a = cos 3e the horizon lies at 1 + sin 3e and the ring at
// 1 + 2 sin²e + √3 sin 2e, whose difference is
//
//	sin e (2√3 cos e - 3 + 2 sin e + 4 sin²e).
func lightRingGap(spin float64) float64 {
	sin, cos := math.Sincos(math.Atan2(rootOfDeficit(spin), spin) / 3)
	return sin * (2*math.Sqrt(3)*cos - 3 + 2*sin + 4*sin*sin)
}

// RetrogradeLightRing returns the radius of the retrograde circular photon
// orbit, r = 2 (1 + cos(⅔ arccos(a))).
func RetrogradeLightRing(spin float64) float64 {
	return 2 * (1 + math.Cos(2./3.*math.Atan2(rootOfDeficit(spin), spin)))
}

// Tortoise returns the tortoise coordinate of radius r > r+:
//
//	r* = r + (2 r+/(r+ - r-)) ln((r - r+)/2) - (2 r-/(r+ - r-)) ln((r - r-)/2)
//
// A radius close to the horizon has lost the digits of r - r+ already; where
// they are known, TortoiseLog keeps them.
func Tortoise(spin, r float64) float64 {
	return TortoiseLog(spin, math.Log(r-HorizonRadius(spin)))
}

// TortoiseLog is Tortoise for a radius given as lnGap = ln(r - r+). A surface a
// Planck length outside has r - r+ near 1e-80, far below the spacing of doubles
// around r+, so only its logarithm can be carried; it may lie below the smallest
// double, too.
//
// With g = r - r+ and D = r+ - r- the equal form
//
//	r* = r + 2 ln((g + D)/2) - (2 r+/D) ln(1 + D/g)
//
// is used. It has no difference of large terms, whatever g/D, so the result is
// good to some units of the last place of its largest term at every spin.
func TortoiseLog(spin, lnGap float64) float64 {
	return tortoise(HorizonRadius(spin), 2*rootOfDeficit(spin), math.Exp(lnGap), lnGap)
}

// tortoise is the formula of TortoiseLog.
func tortoise(rp, d, gap, lnGap float64) float64 {
	if gap < d {
		lnD, rest := math.Log(d), math.Log1p(gap/d)
		return rp + gap + 2*(lnD+rest-math.Ln2) - 2*rp/d*(lnD-lnGap+rest)
	}
	rest := math.Log1p(d / gap)
	return rp + gap + 2*(lnGap+rest-math.Ln2) - 2*rp/d*rest
}

// SurfaceTortoise returns the tortoise coordinate of a surface at proper
// distance d above r+, measured along the rotation axis; lnDistance is the
// natural logarithm of d in units of M. See SurfaceGap.
func SurfaceTortoise(spin, lnDistance float64) float64 {
	return TortoiseLog(spin, SurfaceGap(spin, lnDistance, Axis))
}

// EchoDelay returns 2 (r*_barrier - r*_surface) in units of M: the time between
// one echo and the next for a surface at proper distance exp(lnDistance) M along
// the axis (see SurfaceGap) and a barrier at the prograde light ring.
func EchoDelay(spin, lnDistance float64) float64 {
	return EchoDelayLog(spin, SurfaceGap(spin, lnDistance, Axis))
}

// EchoDelayLog is EchoDelay for a surface given as lnGap = ln(r0 - r+). It is
// negative for a surface outside the light ring.
func EchoDelayLog(spin, lnGap float64) float64 {
	return 2 * (TortoiseLog(spin, math.Log(lightRingGap(spin))) - TortoiseLog(spin, lnGap))
}

// EchoDelayExcess is EchoDelay for a surface given as lnExcess = ln(r0/r+ - 1).
func EchoDelayExcess(spin, lnExcess float64) float64 {
	return EchoDelayLog(spin, ExcessGap(spin, lnExcess))
}
