package priors

import (
	"fmt"
	"math"
)

// Prior is the distribution of one parameter. All priors of this package are
// immutable and safe for concurrent use.
type Prior interface {
	// Quantile returns the x below which lies the share u of the probability. It
	// does not decrease with u, Quantile(0) and Quantile(1) are the ends of the
	// support, and a u outside [0, 1] gives NaN.
	Quantile(u float64) float64
	// LogDensity returns ln p(x) in nats, normalised; -Inf outside the support.
	LogDensity(x float64) float64
	// Support returns the closed interval outside which the density is zero.
	Support() (low, high float64)
	// String describes the prior in one short phrase for tables and messages.
	fmt.Stringer
}

// FieldError says which number or key of a prior is wrong.
type FieldError struct {
	Key  string // such as low or sigma
	Got  string
	Want string
}

func (e *FieldError) Error() string {
	return fmt.Sprintf("priors: %s = %s, want %s", e.Key, e.Got, e.Want)
}

// field is one number with the key it came from.
type field struct {
	key   string
	value float64
}

// finite returns a *FieldError for the first number that is NaN or infinite.
func finite(fields ...field) error {
	for _, f := range fields {
		if math.IsNaN(f.value) || math.IsInf(f.value, 0) {
			return &FieldError{f.key, number(f.value), "a finite number"}
		}
	}
	return nil
}

// ordered returns a *FieldError unless low < high, both finite.
func ordered(low, high float64) error {
	if err := finite(field{"low", low}, field{"high", high}); err != nil {
		return err
	}
	if low >= high {
		return &FieldError{"low", number(low), fmt.Sprintf("less than high = %s", number(high))}
	}
	if math.IsInf(high-low, 0) {
		return &FieldError{"high", number(high), "a range that a float64 can hold"}
	}
	return nil
}

func number(x float64) string { return fmt.Sprintf("%g", x) }

// edge answers the quantiles that need no formula: the ends of the support, exactly,
// and NaN outside [0, 1].
func edge(u, low, high float64) (x float64, done bool) {
	switch {
	case u == 0:
		return low, true
	case u == 1:
		return high, true
	case u > 0 && u < 1:
		return 0, false
	}
	return math.NaN(), true
}

// between brings x back into [low, high] where rounding took it out.
func between(x, low, high float64) float64 { return min(max(x, low), high) }
