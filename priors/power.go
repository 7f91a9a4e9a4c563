package priors

import (
	"fmt"
	"math"
)

// Power is the density proportional to x^exponent on an interval of numbers that
// are not negative; with the exponent -1 it is the log-uniform prior.
type Power struct {
	low, high, exponent float64
	// e is exponent + 1 and span e ln(high/low), whose sign is that of e.
	e, span float64
	logNorm float64 // ln of the integral of x^exponent over the interval
}

var _ Prior = (*Power)(nil)

// NewLogUniform returns the prior uniform in ln x on [low, high], low > 0. Bad
// numbers give a *FieldError.
func NewLogUniform(low, high float64) (*Power, error) { return NewPower(low, high, -1) }

// NewPower returns the prior proportional to x^exponent on [low, high]. low must not
// be negative, and must be positive where the density could not be normalised from
// zero (exponent <= -1). Bad numbers give a *FieldError.
func NewPower(low, high, exponent float64) (*Power, error) {
	if err := finite(field{"exponent", exponent}); err != nil {
		return nil, err
	}
	if err := ordered(low, high); err != nil {
		return nil, err
	}
	switch {
	case exponent <= -1 && low <= 0:
		return nil, &FieldError{"low", number(low), "> 0"}
	case low < 0:
		return nil, &FieldError{"low", number(low), ">= 0"}
	}
	p := &Power{low: low, high: high, exponent: exponent, e: exponent + 1}
	logRatio := math.Log(high / low)
	if high/low > math.MaxFloat64 && low > 0 {
		logRatio = math.Log(high) - math.Log(low)
	}
	p.span = p.e * logRatio
	// From the end where x^e is larger, so that no power overflows.
	switch {
	case p.e == 0:
		p.span = logRatio
		p.logNorm = math.Log(logRatio)
	case p.e > 0:
		p.logNorm = p.e*math.Log(high) + math.Log(-math.Expm1(-p.span)) - math.Log(p.e)
	default:
		p.logNorm = p.e*math.Log(low) + math.Log(-math.Expm1(p.span)) - math.Log(-p.e)
	}
	if math.IsInf(p.logNorm, 0) || math.IsNaN(p.logNorm) {
		return nil, &FieldError{"exponent", number(exponent), "one whose density a float64 can hold on this range"}
	}
	return p, nil
}

// Quantile implements Prior.
func (p *Power) Quantile(u float64) float64 {
	if x, done := edge(u, p.low, p.high); done {
		return x
	}
	var x float64
	switch {
	case p.e == 0:
		x = p.low * math.Exp(u*p.span)
	case p.e > 0:
		x = p.high * math.Exp(logMix(u, 1-u, -p.span)/p.e)
	default:
		x = p.low * math.Exp(logMix(1-u, u, p.span)/p.e)
	}
	return between(x, p.low, p.high)
}

// logMix returns ln(a + b exp(y)) for a + b = 1 and y <= 0, to full relative
// precision near one as well as near zero.
func logMix(a, b, y float64) float64 {
	if mix := a + b*math.Exp(y); mix < 0.5 {
		return math.Log(mix)
	}
	return math.Log1p(b * math.Expm1(y))
}

// LogDensity implements Prior. Where low is zero and the exponent negative it is
// +Inf at zero, a point of no probability.
func (p *Power) LogDensity(x float64) float64 {
	if !(x >= p.low && x <= p.high) {
		return math.Inf(-1)
	}
	if p.exponent == 0 { // 0 ln 0 is not a number
		return -p.logNorm
	}
	return p.exponent*math.Log(x) - p.logNorm
}

// Support implements Prior.
func (p *Power) Support() (low, high float64) { return p.low, p.high }

func (p *Power) String() string {
	if p.exponent == -1 {
		return fmt.Sprintf("log-uniform on [%g, %g]", p.low, p.high)
	}
	return fmt.Sprintf("power %g on [%g, %g]", p.exponent, p.low, p.high)
}
