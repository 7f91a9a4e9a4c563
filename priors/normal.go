package priors

import (
	"fmt"
	"math"

	"gonum.org/v1/gonum/mathext"
)

// Normal is a normal density, whole or cut to an interval.
type Normal struct {
	mean, sigma float64
	low, high   float64 // may be infinite
	// Shares of the whole normal below low, above low, below high and above high.
	// Both sides are kept, because one minus a small tail has lost it.
	belowLow, aboveLow, belowHigh, aboveHigh float64
	logNorm                                  float64 // ln(sigma sqrt(2 pi) mass)
}

var _ Prior = (*Normal)(nil)

// NewNormal returns the normal prior with a mean and a standard deviation. Bad
// numbers give a *FieldError. Its quantiles of 0 and 1 are infinite.
func NewNormal(mean, sigma float64) (*Normal, error) {
	return NewTruncatedNormal(mean, sigma, math.Inf(-1), math.Inf(1))
}

// NewTruncatedNormal returns the normal prior with a mean and a standard deviation,
// cut to [low, high] and normalised there; either end may be infinite. The interval
// may lie in a tail, up to about 37 standard deviations out, where a float64 ends.
// Bad numbers give a *FieldError.
func NewTruncatedNormal(mean, sigma, low, high float64) (*Normal, error) {
	if err := finite(field{"mean", mean}, field{"sigma", sigma}); err != nil {
		return nil, err
	}
	if sigma <= 0 {
		return nil, &FieldError{"sigma", number(sigma), "> 0"}
	}
	if math.IsNaN(low) {
		return nil, &FieldError{"low", number(low), "a number"}
	}
	if math.IsNaN(high) {
		return nil, &FieldError{"high", number(high), "a number"}
	}
	if low >= high {
		return nil, &FieldError{"low", number(low), fmt.Sprintf("less than high = %g", high)}
	}
	p := &Normal{mean: mean, sigma: sigma, low: low, high: high}
	a, b := (low-mean)/sigma, (high-mean)/sigma
	p.belowLow, p.aboveLow = tail(a), tail(-a)
	p.belowHigh, p.aboveHigh = tail(b), tail(-b)
	var mass float64
	switch {
	case b <= 0:
		mass = p.belowHigh - p.belowLow
	case a >= 0:
		mass = p.aboveLow - p.aboveHigh
	default:
		mass = 1 - p.belowLow - p.aboveHigh
	}
	if mass <= 0 {
		key, end := "high", high
		if a >= 0 {
			key, end = "low", low
		}
		return nil, &FieldError{key, number(end),
			fmt.Sprintf("an interval that holds some of the normal with mean %g and sigma %g", mean, sigma)}
	}
	p.logNorm = math.Log(sigma) + math.Log(2*math.Pi)/2 + math.Log(mass)
	return p, nil
}

// tail returns the share of the unit normal below z. Through erfc it keeps its
// relative precision down to the smallest float64 (gonum's distuv.Normal.Survival
// is zero from z = 9).
func tail(z float64) float64 { return math.Erfc(-z/math.Sqrt2) / 2 }

// Quantile implements Prior.
func (p *Normal) Quantile(u float64) float64 {
	if x, done := edge(u, p.low, p.high); done {
		return x
	}
	below := (1-u)*p.belowLow + u*p.belowHigh
	above := (1-u)*p.aboveLow + u*p.aboveHigh
	// The smaller share is the one that still has its digits.
	z := mathext.NormalQuantile(min(below, above, 0.5))
	if above < below {
		z = -z
	}
	return between(p.mean+p.sigma*z, p.low, p.high)
}

// LogDensity implements Prior.
func (p *Normal) LogDensity(x float64) float64 {
	if !(x >= p.low && x <= p.high) {
		return math.Inf(-1)
	}
	z := (x - p.mean) / p.sigma
	return -z*z/2 - p.logNorm
}

// Support implements Prior.
func (p *Normal) Support() (low, high float64) { return p.low, p.high }

func (p *Normal) String() string {
	whole := fmt.Sprintf("normal, mean %g, sigma %g", p.mean, p.sigma)
	if math.IsInf(p.low, -1) && math.IsInf(p.high, 1) {
		return whole
	}
	return fmt.Sprintf("%s, on [%g, %g]", whole, p.low, p.high)
}
