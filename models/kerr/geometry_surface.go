package kerr

import (
	"math"

	"gonum.org/v1/gonum/integrate/quad"
)

// Path is the line along which a surface's proper distance from r+ is measured,
// at fixed time and angles.
type Path int

// The paths: along the rotation axis, ds = √((r²+a²)/Δ) dr, the default; and in
// the equatorial plane, ds = (r/√Δ) dr. A given distance along the equator puts
// the surface nearer to the horizon: by up to a factor 2 in r - r+ near spin 1.
const (
	Axis Path = iota
	Equator
)

// In terms of p with r = 1 + √(1-a²) cosh p both distances from the horizon are
// integrals of smooth functions from 0 to p:
//
//	axis ∫ √(r²+a²) dp,   equator ∫ r dp = p + √(1-a²) sinh p.
//
// r - r+ = (r+ - r-) sinh²(p/2).

// ExcessGap returns ln(r0 - r+) for lnExcess = ln(r0/r+ - 1).
func ExcessGap(spin, lnExcess float64) float64 { return lnExcess + math.Log(HorizonRadius(spin)) }

// lnLeadingReach is ln p = ln 1e-8, below which the distance is its leading term,
// p √(2 r+) along the axis and p r+ along the equator, to rounding: the next term
// is less than p²/4 of it.
const lnLeadingReach = -8 * math.Ln10

// SurfaceGap returns lnGap = ln(r0 - r+) of a surface at proper distance
// exp(lnDistance) M above r+ along a path: the inverse of ProperDistance. Close
// to the horizon it is
//
//	r0 - r+ = d² (r+ - r-)/(4 (r+² + a²)) along the axis,  d² (r+ - r-)/(4 r+²) along the equator.
//
// That takes some nanoseconds; where it would be off by more than rounding
// (d above 1e-8 M) the integral is inverted by Newton's method in about a
// microsecond. A Path other than the two is a bug in the caller and panics.
func SurfaceGap(spin, lnDistance float64, path Path) float64 {
	h, rp := rootOfDeficit(spin), HorizonRadius(spin)
	square := 2 * rp // r+² + a² = 2 r+
	switch path {
	case Axis:
	case Equator:
		square = rp * rp
	default:
		panic("kerr: a path is Axis or Equator")
	}
	lnP := lnDistance - math.Log(square)/2
	if lnP < lnLeadingReach {
		return 2*lnP + math.Log(h/2)
	}
	want := math.Exp(lnDistance)
	// The distance is convex in p, and at least p √(square): Newton's method
	// from above falls monotonically. r > 1 + h(cosh p) > h e^p/2 bounds p again.
	p := math.Exp(lnP)
	if p > 1 {
		p = min(p, math.Log(1+2*want/h))
	}
	for range 60 {
		got, slope := pathLength(spin, h, p, path)
		step := (want - got) / slope
		p += step
		if math.Abs(step) <= 1e-9*p { // the next would be at 1e-18
			break
		}
	}
	return math.Log(2*h) + 2*lnSinh(p/2)
}

// ProperDistance returns ln d of the proper distance d (in M) between r+ and the
// radius with lnGap = ln(r - r+), along a path. A Path other than the two is a
// bug in the caller and panics.
func ProperDistance(spin, lnGap float64, path Path) float64 {
	h, rp := rootOfDeficit(spin), HorizonRadius(spin)
	if path != Axis && path != Equator {
		panic("kerr: a path is Axis or Equator")
	}
	// sinh(p/2) = √(gap/2h).
	lnHalf := (lnGap - math.Log(2*h)) / 2
	if lnHalf+math.Ln2 < lnLeadingReach {
		if path == Equator {
			return lnHalf + math.Ln2 + math.Log(rp)
		}
		return lnHalf + math.Ln2 + math.Log(2*rp)/2
	}
	d, _ := pathLength(spin, h, 2*math.Asinh(math.Exp(lnHalf)), path)
	return math.Log(d)
}

// lnSinh returns ln sinh x for x > 0, of any size.
func lnSinh(x float64) float64 {
	if x < 1 {
		return math.Log(math.Sinh(x))
	}
	return x + math.Log1p(-math.Exp(-2*x)) - math.Ln2
}

// pathLength returns the proper distance to p and its derivative by p;
// h = √(1-a²). NaN gives NaN.
func pathLength(spin, h, p float64, path Path) (length, slope float64) {
	if !(h*p < math.MaxFloat64) { // no number of panels
		return h * p, h * p
	}
	if path == Equator {
		return p + h*math.Sinh(p), 1 + h*math.Cosh(p)
	}
	// The integrand's branch points, where r = ±ia, lie at least 3π/4 away from
	// the real axis, so the rule's error on a panel of half-width 1 is below
	// 4.9⁻²⁴ = 3e-17.
	a2 := spin * spin
	panels := 1 + int(p/2)
	half := p / float64(2*panels)
	for i := range panels {
		mid := float64(2*i+1) * half
		for j, x := range legendreNodes {
			r := 1 + h*math.Cosh(mid+half*x)
			length += half * legendreWeights[j] * math.Sqrt(r*r+a2)
		}
	}
	r := 1 + h*math.Cosh(p)
	return length, math.Sqrt(r*r + a2)
}

// The 12-point Gauss-Legendre rule on [-1, 1].
var legendreNodes, legendreWeights = legendreRule()

func legendreRule() (nodes, weights [12]float64) {
	quad.Legendre{}.FixedLocations(nodes[:], weights[:], -1, 1)
	return nodes, weights
}
