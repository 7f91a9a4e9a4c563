package sampler

import (
	"strings"
	"testing"

	"knell/internal/random"
)

// Ranks are fair in two phases and not in the third: the verdict names it, and
// the tests of the others are untouched.
func TestVerdictNamesThePhaseAtFault(t *testing.T) {
	for _, bad := range []method{automatic, fromPrior, fromUnion, fromSlices} {
		rng := random.New(3, "phases")
		o := &Outcome{LivePoints: 100, Runs: 1}
		var r ranks
		for _, m := range []method{fromPrior, fromUnion, fromSlices} {
			for range 3000 {
				x := rng.Float64()
				if m == bad { // a sixth of the volume missed
					x = x*x*0.2 + x*0.8
				}
				r.u = append(r.u, x)
			}
			r.mark(m)
			o.Phases = append(o.Phases, Phase{Name: m.String(), Calls: 6000, Points: 3000})
		}
		o.ranks, o.rankMethods = r.u, r.by
		o.judge()
		for i, p := range o.Phases {
			fair := min(p.InsertionRankP, p.InsertionRankBlockP) > doubtfulP
			if fair == (method(i+1) == bad) || p.Ranks != 3000 {
				t.Errorf("bad %q: phase %s has p = %g and %g of %d ranks", bad, p.Name, p.InsertionRankP, p.InsertionRankBlockP, p.Ranks)
			}
			if p.Efficiency() != 0.5 {
				t.Errorf("efficiency %g, want 0.5", p.Efficiency())
			}
		}
		if bad == automatic {
			if o.Verdict != "sound" || len(o.Warnings) > 0 {
				t.Errorf("fair ranks: verdict %q, warnings %q", o.Verdict, o.Warnings)
			}
			continue
		}
		if !strings.Contains(o.Verdict, "fairly from "+bad.String()) || len(o.Warnings) != 1 {
			t.Errorf("bad %v: verdict %q, warnings %q", bad, o.Verdict, o.Warnings)
		}
		// Where nobody noted the phases, the whole still tells.
		o.rankMethods, o.notes = nil, nil
		o.judge()
		if o.Verdict == "sound" || strings.Contains(o.Verdict, bad.String()) {
			t.Errorf("bad %v, phases unknown: verdict %q", bad, o.Verdict)
		}
	}
}
