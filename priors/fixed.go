package priors

import (
	"fmt"
	"math"
)

// Fixed is a parameter that is known. It takes no coordinate of the unit cube.
type Fixed struct{ value float64 }

var _ Prior = (*Fixed)(nil)

// NewFixed returns the prior of a known value. A value that is not finite gives a
// *FieldError.
func NewFixed(value float64) (*Fixed, error) {
	if err := finite(field{"value", value}); err != nil {
		return nil, err
	}
	return &Fixed{value}, nil
}

// Quantile implements Prior.
func (p *Fixed) Quantile(u float64) float64 {
	if x, done := edge(u, p.value, p.value); done {
		return x
	}
	return p.value
}

// LogDensity returns 0 at the value and -Inf elsewhere: the density of a known
// value is counted against that value, so that it adds nothing to a Set's.
func (p *Fixed) LogDensity(x float64) float64 {
	if x == p.value {
		return 0
	}
	return math.Inf(-1)
}

// Support implements Prior.
func (p *Fixed) Support() (low, high float64) { return p.value, p.value }

func (p *Fixed) String() string { return fmt.Sprintf("fixed at %g", p.value) }
