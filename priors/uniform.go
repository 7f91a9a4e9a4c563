package priors

import (
	"fmt"
	"math"
)

// Uniform is a constant density on an interval.
type Uniform struct{ low, high, logDensity float64 }

var _ Prior = (*Uniform)(nil)

// NewUniform returns the uniform prior on [low, high]. low >= high and numbers that
// are not finite give a *FieldError.
func NewUniform(low, high float64) (*Uniform, error) {
	if err := ordered(low, high); err != nil {
		return nil, err
	}
	return &Uniform{low, high, -math.Log(high - low)}, nil
}

// Quantile implements Prior.
func (p *Uniform) Quantile(u float64) float64 {
	if x, done := edge(u, p.low, p.high); done {
		return x
	}
	return between(p.low+u*(p.high-p.low), p.low, p.high)
}

// LogDensity implements Prior.
func (p *Uniform) LogDensity(x float64) float64 {
	if x >= p.low && x <= p.high {
		return p.logDensity
	}
	return math.Inf(-1)
}

// Support implements Prior.
func (p *Uniform) Support() (low, high float64) { return p.low, p.high }

func (p *Uniform) String() string { return fmt.Sprintf("uniform on [%g, %g]", p.low, p.high) }
