package event

import (
	"math"
	"strings"
	"testing"
)

// The evidence by the other routes agrees with the run's, is the same for any
// number of workers, and carries the share of the prior that stable leaves.
func TestRoutes(t *testing.T) {
	text := strings.NewReplacer("low = 40.0, high = 110.0", "low = 60.0, high = 76.0", "low = 0.0,  high = 1.0 }", "low = 0.5, high = 1.0 }",
		"low = -1.0, high = 12.0", "low = 0.0, high = 0.02").Replace(stableText)
	one, _ := weigh(t, text, 1)
	two, _ := weigh(t, text, 2)
	for i, h := range one.Hypotheses {
		if len(h.Routes) != 2 {
			t.Fatalf("%s: routes %v, warnings %v", h.Name, h.Routes, h.Warnings)
		}
		for k, r := range h.Routes {
			if d := math.Abs(float64(r.LogEvidenceOver - h.LogEvidenceOver)); !(d < 4*math.Hypot(float64(r.Error), float64(h.LogEvidenceError))) {
				t.Errorf("%s by %s: %v +- %v, by the run %v +- %v", h.Name, r.Name, r.LogEvidenceOver, r.Error, h.LogEvidenceOver, h.LogEvidenceError)
			}
			if !(r.Error > 0 && r.Error < 0.2) || !(r.EffectiveSamples > 50) || r.Calls < 100 {
				t.Errorf("%s by %s: %+v", h.Name, r.Name, r)
			}
			if two.Hypotheses[i].Routes[k] != r {
				t.Errorf("%s by %s: %+v on one worker, %+v on two", h.Name, r.Name, r, two.Hypotheses[i].Routes[k])
			}
		}
	}
	if cut, _ := weigh(t, brief, 2); len(cut.Hypotheses[1].Routes) != 0 {
		t.Error("a run that did not finish has other routes")
	}
}
