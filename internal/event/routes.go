package event

import (
	"context"
	"errors"
	"fmt"

	"knell/internal/random"
	"knell/internal/report"
	"knell/sampler"
)

// routes finds the evidence of a finished run by the sampler's two other routes,
// which share with it only the likelihood and the posterior's whereabouts. A route
// that cannot be gone, because the run left too few samples to fit a density to,
// is said in a warning; a disagreement beyond three errors is one too.
func (p *Prepared) routes(ctx context.Context, h *hypothesis, o *sampler.Outcome, workers int) ([]report.Route, []string, error) {
	if o.Partial {
		return nil, nil, nil
	}
	settings := sampler.RouteSettings{Workers: workers, Periodic: h.periodic}
	var list []report.Route
	var estimates []sampler.Estimate
	var warnings []string
	for _, route := range []struct {
		name string
		find func(context.Context, func() (sampler.Target, error), sampler.RouteSettings) (sampler.Estimate, error)
	}{{"bridge", o.Bridge}, {"importance", o.Importance}} {
		settings.Seed = random.New(p.Config.Seed, "route "+route.name+" "+h.Name).Uint64()
		e, err := route.find(ctx, h.newTarget, settings)
		var point *sampler.PointError
		switch {
		case ctx.Err() != nil:
			return list, warnings, nil
		case errors.As(err, &point):
			return nil, nil, err
		case err != nil:
			warnings = append(warnings, fmt.Sprintf("no evidence by %s sampling: %v", route.name, err))
			continue
		}
		estimates = append(estimates, e)
		for _, w := range e.Warnings {
			warnings = append(warnings, route.name+" sampling: "+w)
		}
		list = append(list, report.Route{
			Name:            route.name,
			LogEvidenceOver: report.Number(e.LogEvidence - h.allowed.logMass()), Error: report.Number(e.Error),
			EffectiveSamples: report.Number(e.EffectiveSamples), Calls: e.Calls,
		})
	}
	return list, append(warnings, sampler.Agree(o, estimates...)...), nil
}
