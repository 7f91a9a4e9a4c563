package problems

import (
	"fmt"
	"math"
)

// Problem is a log-likelihood on the unit cube with a known evidence. It is
// read-only and may be used by several goroutines at once.
type Problem struct {
	Name     string
	Truth    float64 // ln of the integral of L over the unit cube, nats
	Source   string  // where Truth comes from
	Periodic []bool  // which coordinates are periodic; nil for none

	// Remaining is how little evidence may remain, as ln(1 + Z'/Z) in nats with Z'
	// judged by the points at hand, when a run may end; 0 for the sampler's default.
	// It is set where evidence waits in a volume that no point can have seen by
	// then: a run has to be told of it.
	Remaining float64

	dim    int
	logL   func(u []float64) float64
	volume func(logL float64) float64 // ln of the volume above logL, or NaN; nil if never known
}

// Dim is the number of coordinates.
func (p *Problem) Dim() int { return p.dim }

// LogLikelihood returns ln L at u in nats, -Inf where L is zero. The error is
// always nil. It allocates nothing.
func (p *Problem) LogLikelihood(u []float64) (float64, error) { return p.logL(u), nil }

// LogVolume returns ln of the share of the unit cube in which the
// log-likelihood is above logL, and whether it is known there.
func (p *Problem) LogVolume(logL float64) (float64, bool) {
	if p.volume == nil {
		return math.NaN(), false
	}
	v := p.volume(logL)
	return v, !math.IsNaN(v)
}

// Family is a problem that is defined in several dimensions.
type Family struct {
	Name        string
	Dims        []int // the usual ones
	Least, Most int   // that the definition allows

	make func(dim int) *Problem
}

// mostDim bounds what may be asked for, so that a slip of the pen does not start
// a run that never ends.
const mostDim = 64

// Families lists all problems, in the order in which they are shown.
func Families() []Family {
	return []Family{
		{"gaussian", []int{2, 8, 16, 32}, 1, mostDim, gaussian},
		{"shells", []int{2, 5, 10}, 2, mostDim, shells},
		{"eggbox", []int{2}, 2, 2, eggbox},
		{"rosenbrock", []int{2, 6}, 2, mostDim, rosenbrock},
		{"log-gamma", []int{2, 10}, 2, mostDim, logGamma},
		{"spike-and-slab", []int{20}, 1, mostDim, spikeAndSlab},
		{"two-modes", []int{2, 5}, 1, 16, twoModes},
		{"half-plateau", []int{3}, 1, mostDim, halfPlateau},
		{"mostly-zero", []int{3}, 1, mostDim, mostlyZero},
		{"ridge", []int{2, 4}, 2, mostDim, ridge},
		{"winding", []int{5}, 3, mostDim, winding},
		{"tiers", []int{2, 10}, 1, mostDim, tiers},
		{"hypercube", []int{2, 10}, 1, mostDim, hypercube},
	}
}

// New makes the problem of a name in a number of dimensions. An unknown name or
// a dimension outside the family's range is an error.
func New(name string, dim int) (*Problem, error) {
	for _, f := range Families() {
		if f.Name == name {
			return f.New(dim)
		}
	}
	return nil, fmt.Errorf("problems: problem = %q, want a name that Families lists", name)
}

// New makes the family's problem in a number of dimensions, or gives an error
// outside Least to Most.
func (f Family) New(dim int) (*Problem, error) {
	if dim < f.Least || dim > f.Most {
		return nil, fmt.Errorf("problems: dimensions of %s = %d, want %d to %d", f.Name, dim, f.Least, f.Most)
	}
	p := f.make(dim)
	p.Name, p.dim = f.Name, dim
	return p, nil
}
