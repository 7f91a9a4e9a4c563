package priors

import (
	"fmt"
	"math"
)

// Sine is the density proportional to sin x, an isotropic direction's polar angle,
// or, shifted by a quarter turn, to cos x, its declination. Angles in radians.
type Sine struct {
	low, high float64
	shift     float64 // x + shift is the polar angle
	// Squares of sine and cosine of half the polar angle at both ends. The
	// probability is linear in them, and both are kept so that neither pole costs
	// digits.
	sinLow, sinHigh, cosLow, cosHigh float64
	logNorm                          float64
}

var _ Prior = (*Sine)(nil)

// NewSine returns the prior proportional to sin x on [low, high] within [0, pi].
// Bad numbers give a *FieldError.
func NewSine(low, high float64) (*Sine, error) { return newSine(low, high, 0) }

// NewCosine returns the prior proportional to cos x on [low, high] within
// [-pi/2, pi/2]. Bad numbers give a *FieldError.
func NewCosine(low, high float64) (*Sine, error) { return newSine(low, high, math.Pi/2) }

func newSine(low, high, shift float64) (*Sine, error) {
	if err := ordered(low, high); err != nil {
		return nil, err
	}
	if least := -shift; low < least {
		return nil, &FieldError{"low", number(low), fmt.Sprintf(">= %.17g (rad)", least)}
	}
	if most := math.Pi - shift; high > most {
		return nil, &FieldError{"high", number(high), fmt.Sprintf("<= %.17g (rad)", most)}
	}
	p := &Sine{low: low, high: high, shift: shift}
	sinA, cosA := math.Sincos((low + shift) / 2)
	sinB, cosB := math.Sincos((high + shift) / 2)
	p.sinLow, p.sinHigh = sinA*sinA, sinB*sinB
	p.cosLow, p.cosHigh = cosA*cosA, cosB*cosB
	p.logNorm = math.Log(2 * math.Sin((high-low)/2) * math.Sin((high+low)/2+shift))
	return p, nil
}

// Quantile implements Prior.
func (p *Sine) Quantile(u float64) float64 {
	if x, done := edge(u, p.low, p.high); done {
		return x
	}
	sine := (1-u)*p.sinLow + u*p.sinHigh
	cosine := (1-u)*p.cosLow + u*p.cosHigh
	return between(2*math.Atan2(math.Sqrt(sine), math.Sqrt(cosine))-p.shift, p.low, p.high)
}

// LogDensity implements Prior.
func (p *Sine) LogDensity(x float64) float64 {
	if !(x >= p.low && x <= p.high) {
		return math.Inf(-1)
	}
	return math.Log(math.Sin(x+p.shift)) - p.logNorm
}

// Support implements Prior.
func (p *Sine) Support() (low, high float64) { return p.low, p.high }

func (p *Sine) String() string {
	name := "sine"
	if p.shift != 0 {
		name = "cosine"
	}
	return fmt.Sprintf("%s on [%g, %g]", name, p.low, p.high)
}
