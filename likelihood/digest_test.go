package likelihood

import (
	"math"
	"testing"
)

// TestDigest: equal data have one digest, and a small change of any part gives another.
func TestDigest(t *testing.T) {
	digest := func(p problem) [32]byte {
		t.Helper()
		g, err := New(p.sites, p.settings)
		if err != nil {
			t.Fatal(err)
		}
		return g.Digest()
	}
	const samples, gate = 512, 32
	plain := digest(newProblem(t, samples, gate, 1))
	if digest(newProblem(t, samples, gate, 1)) != plain {
		t.Error("equal data have two digests")
	}
	seen := map[[32]byte]string{plain: "nothing"}
	bump := func(v *float64) { *v = math.Nextafter(*v, math.Inf(1)) }
	for why, change := range map[string]func(*problem){
		"gate":      func(p *problem) { p.settings.Gate++ },
		"grid":      func(p *problem) { p.settings.Grid.Count-- },
		"code":      func(p *problem) { p.sites[1].Code = "C1" },
		"plus":      func(p *problem) { bump(&p.sites[0].Plus) },
		"cross":     func(p *problem) { bump(&p.sites[1].Cross) },
		"order":     func(p *problem) { p.sites[0], p.sites[1] = p.sites[1], p.sites[0] },
		"one site":  func(p *problem) { p.sites = p.sites[:1] },
		"arrival":   func(p *problem) { p.sites[1].Arrival += 1e-6 },
		"strain":    func(p *problem) { p.sites[1].Strain[samples-7] *= 1 + 1e-9 },
		"density":   func(p *problem) { p.sites[0].Density[100] *= 1 + 1e-9 },
		"off band":  func(p *problem) { p.sites[0].Density[2] *= 1 + 1e-6 },
		"loud edge": func(p *problem) { p.sites[0].Density[samples/2] *= 1 + 1e-6 },
	} {
		p := newProblem(t, samples, gate, 1)
		change(&p)
		d := digest(p)
		if other, ok := seen[d]; ok {
			t.Errorf("a change of %s gives the digest of a change of %s", why, other)
		}
		seen[d] = why
	}
}
