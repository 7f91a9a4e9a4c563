package main

import (
	"context"

	"knell/sampler"
	"knell/validation"
	"knell/validation/problems"
)

// problemCase is a problem in one dimension, ready to run.
type problemCase struct {
	choice
	truth     float64 // ln Z, nats
	source    string
	periodic  []bool
	newTarget func() (sampler.Target, error)
	// logVolume is ln of the prior volume above a log-likelihood, where it is known.
	logVolume func(logL float64) (float64, bool)
	remaining float64 // sampler.Settings.Remaining, 0 for its default
	most      float64 // calls per accepted point aimed at; 0 for no aim
}

// cavitySeed keys the noise of the cavity's data, the same as in the test of its
// quadrature.
const cavitySeed = 7

// cases makes what the options ask for. The cavity's truth takes seconds.
func (o options) cases(ctx context.Context) ([]problemCase, error) {
	var cs []problemCase
	for _, c := range o.chosen {
		if err := ctx.Err(); err != nil {
			return nil, err
		}
		k := problemCase{choice: c, most: aim(c)}
		if c.name == cavityName {
			p, err := validation.NewCavityProblem(cavitySeed)
			if err != nil {
				return nil, err
			}
			if k.truth, err = validation.CavityTruth(p); err != nil {
				return nil, err
			}
			k.source, k.periodic, k.newTarget = "tensor quadrature of the likelihood", p.Periodic(), p.NewTarget
			k.logVolume = func(float64) (float64, bool) { return 0, false }
		} else {
			p, err := problems.New(c.name, c.dim)
			if err != nil {
				return nil, err
			}
			k.truth, k.source, k.periodic, k.logVolume = p.Truth, p.Source, p.Periodic, p.LogVolume
			k.remaining = p.Remaining
			k.newTarget = func() (sampler.Target, error) { return p, nil }
		}
		cs = append(cs, k)
	}
	return cs, nil
}

// aim is how many calls per accepted point the project aims at, for the Gaussian
// and the cavity: 3 in up to 6 dimensions, 20 up to 16, 120 up to 32.
func aim(c choice) float64 {
	if c.name != "gaussian" && c.name != cavityName {
		return 0
	}
	switch {
	case c.dim <= 6:
		return 3
	case c.dim <= 16:
		return 20
	case c.dim <= 32:
		return 120
	}
	return 0
}
