package trials

import (
	"context"

	"knell/sampler"
	"knell/validation"
	"knell/validation/problems"
)

// Case is a problem in one dimension, ready to run.
type Case struct {
	Choice
	Truth     float64 // ln Z, nats
	Source    string
	Periodic  []bool
	NewTarget func() (sampler.Target, error)
	// LogVolume is ln of the prior volume above a log-likelihood, where it is known.
	LogVolume func(logL float64) (float64, bool)
	Remaining float64 // sampler.Settings.Remaining, 0 for its default
}

// cavitySeed keys the noise of the cavity's data, the same as in the test of its
// quadrature.
const cavitySeed = 7

// New makes a case. The cavity's truth takes seconds.
func New(c Choice) (Case, error) {
	if c.Name == Cavity {
		p, err := validation.NewCavityProblem(cavitySeed)
		if err != nil {
			return Case{}, err
		}
		truth, err := validation.CavityTruth(p)
		if err != nil {
			return Case{}, err
		}
		return Case{
			Choice: c, Truth: truth, Source: "tensor quadrature of the likelihood",
			Periodic: p.Periodic(), NewTarget: p.NewTarget,
			LogVolume: func(float64) (float64, bool) { return 0, false },
		}, nil
	}
	p, err := problems.New(c.Name, c.Dim)
	if err != nil {
		return Case{}, err
	}
	return Case{
		Choice: c, Truth: p.Truth, Source: p.Source, Periodic: p.Periodic,
		NewTarget: func() (sampler.Target, error) { return p, nil },
		LogVolume: p.LogVolume, Remaining: p.Remaining,
	}, nil
}

// All makes the cases of the choices, or gives the context's error once it is
// cancelled.
func All(ctx context.Context, chosen []Choice) ([]Case, error) {
	var cases []Case
	for _, c := range chosen {
		if err := ctx.Err(); err != nil {
			return nil, err
		}
		k, err := New(c)
		if err != nil {
			return nil, err
		}
		cases = append(cases, k)
	}
	return cases, nil
}
