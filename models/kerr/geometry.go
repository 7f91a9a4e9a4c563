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

// rootOfDeficit returns √(1-a²), without the loss of digits of 1-a*a near 1.
func rootOfDeficit(spin float64) float64 { return math.Sqrt((1 - spin) * (1 + spin)) }

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
func LightRing(spin float64) float64 { return 2 * (1 + math.Cos(2./3.*math.Acos(-spin))) }

// RetrogradeLightRing returns the radius of the retrograde circular photon
// orbit, r = 2 (1 + cos(⅔ arccos(a))).
func RetrogradeLightRing(spin float64) float64 { return 2 * (1 + math.Cos(2./3.*math.Acos(spin))) }

// Tortoise returns the tortoise coordinate of radius r > r+:
//
//	r* = r + (2 r+/(r+ - r-)) ln((r - r+)/2) - (2 r-/(r+ - r-)) ln((r - r-)/2)
func Tortoise(spin, r float64) float64 {
	return TortoiseLog(spin, math.Log(r-HorizonRadius(spin)))
}

// TortoiseLog is Tortoise for a radius given as lnGap = ln(r - r+). A surface a
// Planck length outside has r - r+ near 1e-80, far below the spacing of doubles
// around r+, so only its logarithm can be carried.
func TortoiseLog(spin, lnGap float64) float64 {
	rp, rm, d := HorizonRadius(spin), InnerHorizonRadius(spin), 2*rootOfDeficit(spin)
	gap := math.Exp(lnGap)
	return rp + gap + (2*rp*(lnGap-math.Ln2)-2*rm*math.Log((gap+d)/2))/d
}

// SurfaceTortoise returns the tortoise coordinate of a surface at proper
// distance d above r+, measured along the rotation axis; lnDistance is the
// natural logarithm of d in units of M. The leading form
//
//	r0 - r+ = d² (r+ - r-) / (4 (r+² + a²))
//
// is used: its relative error is of the order of d²/(r+ - r-).
func SurfaceTortoise(spin, lnDistance float64) float64 {
	d, rp := 2*rootOfDeficit(spin), HorizonRadius(spin)
	return TortoiseLog(spin, 2*lnDistance+math.Log(d/(8*rp))) // r+² + a² = 2 r+
}

// EchoDelay returns 2 (r*_barrier - r*_surface) in units of M: the time between
// one echo and the next for a surface at proper distance exp(lnDistance) M (see
// SurfaceTortoise) and a barrier at the prograde light ring.
func EchoDelay(spin, lnDistance float64) float64 {
	return 2 * (Tortoise(spin, LightRing(spin)) - SurfaceTortoise(spin, lnDistance))
}
