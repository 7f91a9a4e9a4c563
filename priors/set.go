package priors

import (
	"fmt"
	"slices"
)

// Set is the joint prior of independent, named parameters in a fixed order, some of
// them known. It is immutable and safe for concurrent use.
type Set struct {
	names  []string
	priors []Prior
	free   []int // places in names of the parameters that are not Fixed
}

// NewSet returns the joint prior of parameters, the i-th name having the i-th prior.
// Empty or repeated names, a missing prior and lengths that differ give an error.
func NewSet(names []string, priors []Prior) (*Set, error) {
	if len(names) != len(priors) {
		return nil, fmt.Errorf("priors: %d names and %d priors, want as many of each", len(names), len(priors))
	}
	s := &Set{names: slices.Clone(names), priors: slices.Clone(priors)}
	for i, name := range names {
		switch {
		case name == "":
			return nil, fmt.Errorf("priors: parameter %d has no name", i)
		case slices.Index(names, name) != i:
			return nil, fmt.Errorf("priors: parameter %q appears twice", name)
		case priors[i] == nil:
			return nil, fmt.Errorf("priors: parameter %q has no prior", name)
		}
		if _, fixed := priors[i].(*Fixed); !fixed {
			s.free = append(s.free, i)
		}
	}
	return s, nil
}

// Len returns the number of parameters, the known ones included.
func (s *Set) Len() int { return len(s.names) }

// Dim returns the number of free parameters: the unit cube's dimension.
func (s *Set) Dim() int { return len(s.free) }

// Map fills theta (length Len, in the parameters' units) from the point u of the
// unit cube (length Dim). It allocates nothing. Wrong lengths are a bug in the caller
// and panic.
func (s *Set) Map(u, theta []float64) {
	if len(u) != len(s.free) || len(theta) != len(s.priors) {
		panic(fmt.Sprintf("priors: Map of %d coordinates to %d parameters, want %d to %d",
			len(u), len(theta), len(s.free), len(s.priors)))
	}
	next := 0
	for i, p := range s.priors {
		var coordinate float64 // any will do for a known value
		if next < len(s.free) && s.free[next] == i {
			coordinate = u[next]
			next++
		}
		theta[i] = p.Quantile(coordinate)
	}
}

// LogDensity returns the sum of ln p in nats at theta (length Len); -Inf where any
// parameter is outside its support. A wrong length panics.
func (s *Set) LogDensity(theta []float64) float64 {
	if len(theta) != len(s.priors) {
		panic(fmt.Sprintf("priors: LogDensity of %d parameters, want %d", len(theta), len(s.priors)))
	}
	var sum float64
	for i, p := range s.priors {
		sum += p.LogDensity(theta[i])
	}
	return sum
}

// Names returns a copy of all parameters' names, in order.
func (s *Set) Names() []string { return slices.Clone(s.names) }

// FreeNames returns the names of the free parameters, in the unit cube's order.
func (s *Set) FreeNames() []string {
	names := make([]string, len(s.free))
	for k, i := range s.free {
		names[k] = s.names[i]
	}
	return names
}

// Index returns the place of a parameter in theta, or -1.
func (s *Set) Index(name string) int { return slices.Index(s.names, name) }

// FreeIndex returns the place of a free parameter in the unit cube, or -1.
func (s *Set) FreeIndex(name string) int { return slices.Index(s.free, s.Index(name)) }

// Prior returns the prior of the parameter at a place in theta.
func (s *Set) Prior(index int) Prior { return s.priors[index] }
