package validation

import (
	"fmt"
	"math"
	"runtime"

	"golang.org/x/sync/errgroup"
	"gonum.org/v1/gonum/floats"
	"gonum.org/v1/gonum/integrate/quad"

	"knell/sampler"
)

// Rule is a quadrature rule on [0, 1]: nodes and weights that sum to one.
type Rule struct {
	Nodes, Weights []float64
}

// GaussLegendre is the rule of n points for a coordinate with two ends.
func GaussLegendre(n int) Rule {
	r := Rule{make([]float64, n), make([]float64, n)}
	quad.Legendre{}.FixedLocations(r.Nodes, r.Weights, 0, 1)
	return r
}

// Trapezoid is the rule of n equal steps for a periodic coordinate, where it
// converges faster than any power of n for a smooth integrand.
func Trapezoid(n int) Rule {
	r := Rule{make([]float64, n), make([]float64, n)}
	for i := range r.Nodes {
		r.Nodes[i], r.Weights[i] = float64(i)/float64(n), 1/float64(n)
	}
	return r
}

// LogQuadrature returns ln of the integral of L over the unit cube in nats, by
// the product of one rule per coordinate. It calls the likelihood once per node
// of the tensor grid, on all cores: what each node of the first rule gives is
// stored by index and summed in order, so equal input gives equal bits.
//
// The first rule's coordinate is the outermost. A number of rules that is not
// the target's dimension is an error.
func LogQuadrature(newTarget func() (sampler.Target, error), rules []Rule) (float64, error) {
	if len(rules) == 0 {
		return 0, fmt.Errorf("validation: no quadrature rule, want one per coordinate")
	}
	slabs := make([]float64, len(rules[0].Nodes))
	workers := min(runtime.GOMAXPROCS(0), len(slabs))
	var group errgroup.Group
	for w := range workers {
		group.Go(func() error {
			target, err := newTarget()
			if err != nil {
				return err
			}
			if target.Dim() != len(rules) {
				return fmt.Errorf("validation: %d quadrature rules, want %d", len(rules), target.Dim())
			}
			s := newSlab(target, rules)
			for i := w; i < len(slabs); i += workers {
				s.u[0] = rules[0].Nodes[i]
				v, err := s.logSum()
				if err != nil {
					return err
				}
				slabs[i] = v + math.Log(rules[0].Weights[i])
			}
			return nil
		})
	}
	if err := group.Wait(); err != nil {
		return 0, err
	}
	return floats.LogSumExp(slabs), nil
}

// slab integrates over all coordinates but the first.
type slab struct {
	target sampler.Target
	rules  []Rule
	u      []float64
	index  []int
	terms  []float64
}

func newSlab(target sampler.Target, rules []Rule) *slab {
	size := 1
	for _, r := range rules[1:] {
		size *= len(r.Nodes)
	}
	return &slab{
		target: target, rules: rules, terms: make([]float64, size),
		u: make([]float64, len(rules)), index: make([]int, len(rules)),
	}
}

func (s *slab) logSum() (float64, error) {
	clear(s.index)
	for k := range s.terms {
		logWeight := 0.0
		for d := 1; d < len(s.rules); d++ {
			s.u[d] = s.rules[d].Nodes[s.index[d]]
			logWeight += math.Log(s.rules[d].Weights[s.index[d]])
		}
		l, err := s.target.LogLikelihood(s.u)
		if err != nil {
			return 0, err
		}
		s.terms[k] = l + logWeight
		for d := len(s.rules) - 1; d >= 1; d-- {
			if s.index[d]++; s.index[d] < len(s.rules[d].Nodes) {
				break
			}
			s.index[d] = 0
		}
	}
	return floats.LogSumExp(s.terms), nil
}
