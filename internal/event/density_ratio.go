package event

import (
	"fmt"
	"math"
	"strings"

	"knell/internal/random"
	"knell/internal/report"
	"knell/sampler"
)

// densityRatios finds the Bayes factors of the event's other hypotheses that are
// nested in h by the Savage-Dickey ratio from h's finished run. It costs no
// likelihood call beyond those that tell whether they are. A posterior with too few
// samples near the nested value gives words and no number.
func (p *Prepared) densityRatios(h *hypothesis, o *sampler.Outcome) []report.DensityRatio {
	if o.Partial {
		return nil
	}
	var list []report.DensityRatio
	for _, nested := range p.hypotheses {
		if nested == h {
			continue
		}
		n, ok := nested.nestedIn(h)
		if !ok {
			continue
		}
		r, err := o.SavageDickey(n.coordinate, n.at, sampler.RatioSettings{
			Seed:     random.New(p.Config.Seed, "density ratio "+nested.Name+" in "+h.Name).Uint64(),
			Periodic: h.periodic[n.coordinate],
		})
		entry := report.DensityRatio{Nested: nested.Name, Parameter: n.parameter, At: report.Number(n.value)}
		switch {
		case err != nil:
			entry.Note = strings.TrimPrefix(err.Error(), "sampler: density ratio: ")
		case !r.Supported():
			entry.Note = fmt.Sprintf("the posterior hardly reaches that value (%.0f effective samples and a share of %.1g of it lie near), so its density there is not known", r.Near, r.Share)
		default:
			entry.Known = true
			entry.LogBayesFactor = report.Number(r.LogBayesFactor + n.logShare)
			entry.Error = report.Number(math.Hypot(r.Error, n.error))
			entry.Note = strings.Join(r.Warnings, "; ")
		}
		list = append(list, entry)
	}
	return list
}
