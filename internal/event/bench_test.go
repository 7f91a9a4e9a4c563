package event

import (
	"context"
	"fmt"
	"strings"
	"testing"

	"knell/internal/random"
)

// benchConfig is a 4 s analysis at 2048 Hz from 30 to 900 Hz.
func benchConfig(b *testing.B, sites, modes int, gate float64) *Config {
	b.Helper()
	var text strings.Builder
	fmt.Fprint(&text, "[event]\ntime = 1400000123.25\nsky = { right_ascension = 1.95, declination = 0.62 }\ninclination = 0.5\n")
	for _, code := range []string{"H1", "L1"}[:sites] {
		fmt.Fprintf(&text, "[[site]]\ncode = %q\nsynthetic = { curve = \"second-generation-broadband\" }\nnoise = { from = \"curve\" }\n", code)
	}
	fmt.Fprintf(&text, "[analysis]\nsample_rate = 2048.0\nduration = 4.0\nband = [30.0, 900.0]\ngate = %g\n", gate)
	list := []string{`"2,2,0"`, `"2,2,1"`}[:modes]
	fmt.Fprintf(&text, "[[hypothesis]]\nname = \"surface\"\nmodel = \"cavity\"\nmodes = [%s]\nreflectivity = \"constant\"\n", strings.Join(list, ", "))
	fmt.Fprint(&text, `[prior]
mass         = { kind = "uniform", low = 60.0, high = 75.0 }
spin         = { kind = "uniform", low = 0.5,  high = 0.8 }
amplitude    = { kind = "uniform", low = 0.0,  high = 5e-21 }
reflectivity = { kind = "uniform", low = 0.0,  high = 1.0 }
offset       = { kind = "uniform", low = -1.0, high = 12.0 }
`)
	c, err := Decode("bench.toml", []byte(text.String()))
	if err != nil {
		b.Fatal(err)
	}
	return c
}

// BenchmarkCavity is the whole call of the cavity's likelihood at a new point
// each time: prior, barrier at a new spin, echo sum, modes, projection, gate.
func BenchmarkCavity(b *testing.B) {
	for _, tc := range []struct {
		sites, modes int
		gate         float64
	}{{1, 1, 0}, {2, 1, 0}, {1, 1, 0.125}, {2, 1, 0.125}, {2, 1, 0.25}, {2, 2, 0.125}} {
		b.Run(fmt.Sprintf("sites=%d,modes=%d,gate=%gs", tc.sites, tc.modes, tc.gate), func(b *testing.B) {
			p, err := Load(benchConfig(b, tc.sites, tc.modes, tc.gate))
			if err != nil {
				b.Fatal(err)
			}
			t := p.hypotheses[0].target()
			rng := random.New(1, "benchmark")
			points := make([][]float64, 256)
			for i := range points {
				points[i] = make([]float64, t.Dim())
				for j := range points[i] {
					points[i][j] = rng.Float64()
				}
			}
			b.ReportAllocs()
			i := 0
			for b.Loop() {
				if _, err := t.LogLikelihood(points[i%len(points)]); err != nil {
					b.Fatal(err)
				}
				i++
			}
			bins := float64(p.likelihood.Grid().Count * tc.sites)
			b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(b.N)/bins, "ns/bin/site")
		})
	}
}

// BenchmarkWeigh is a short weighing of the demo's surface hypothesis on one and
// on two workers; the ratio of the two is the speed-up.
func BenchmarkWeigh(b *testing.B) {
	for _, workers := range []int{1, 2} {
		b.Run(fmt.Sprintf("workers=%d", workers), func(b *testing.B) {
			c := demo(b, "surface")
			c.Hypotheses = c.Hypotheses[1:]
			c.Sampler.LivePoints, c.Sampler.EvidenceError = 100, 10
			p, err := Load(c)
			if err != nil {
				b.Fatal(err)
			}
			for b.Loop() {
				w, _, err := p.Weigh(context.Background(), Options{Workers: workers})
				if err != nil {
					b.Fatal(err)
				}
				b.ReportMetric(float64(w.Hypotheses[0].Calls), "calls/op")
			}
		})
	}
}

// TestLikelihoodAllocatesNothing covers the whole road of a call.
func TestLikelihoodAllocatesNothing(t *testing.T) {
	p, err := Load(demo(t, "surface"))
	if err != nil {
		t.Fatal(err)
	}
	for _, h := range p.hypotheses {
		target := h.target()
		u := make([]float64, target.Dim())
		for i := range u {
			u[i] = 0.3
		}
		if n := testing.AllocsPerRun(20, func() {
			if _, err := target.LogLikelihood(u); err != nil {
				t.Fatal(err)
			}
		}); n != 0 {
			t.Errorf("%s: a call allocates %g times", h.Name, n)
		}
	}
}
