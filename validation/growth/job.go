package main

import (
	"context"

	"knell/validation/trials"
)

// What runs are made for.
const (
	posteriorUse = "posterior"
	evidenceUse  = "evidence"
)

// posteriorChoice is the problem of the posterior use.
var posteriorChoice = trials.Choice{Name: "gaussian", Dim: 8}

// Its posterior: every coordinate of the unit cube has this mean and this variance,
// because it is a normal density of width 0.1 in the middle of a box of side 2, whose
// walls are ten widths away.
const (
	posteriorMean     = 0.5
	posteriorVariance = 0.05 * 0.05
)

// job is a comparison.
type job struct {
	trials.Case
	use string
}

// jobs lists what the options ask for.
func (o options) jobs(ctx context.Context) ([]job, error) {
	var jobs []job
	if o.posterior {
		c, err := trials.New(posteriorChoice)
		if err != nil {
			return nil, err
		}
		jobs = append(jobs, job{c, posteriorUse})
	}
	if o.evidence {
		cases, err := trials.All(ctx, o.chosen)
		if err != nil {
			return nil, err
		}
		for _, c := range cases {
			jobs = append(jobs, job{c, evidenceUse})
		}
	}
	return jobs, nil
}

func casesOf(jobs []job) []trials.Case {
	cases := make([]trials.Case, len(jobs))
	for i, j := range jobs {
		cases[i] = j.Case
	}
	return cases
}
