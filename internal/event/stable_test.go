package event

import (
	"errors"
	"math"
	"path/filepath"
	"strings"
	"testing"

	"knell/internal/random"
)

// stableText is tiny at one spin, with the switch on.
var stableText = strings.NewReplacer(
	`reflectivity = "constant"`, "reflectivity = \"constant\"\nstable = true",
	`spin         = { kind = "uniform", low = 0.0,  high = 0.98 }`, `spin = { kind = "fixed", value = 0.9 }`,
).Replace(tiny)

// TestStableSwitch: at spin 0.9 the largest amplification of l = m = 2 is 6.42 %
// (Teukolsky equation at 60 digits), so of a uniform reflectivity the share below
// 1/sqrt(1.0642) is left, and the likelihood is zero beyond.
func TestStableSwitch(t *testing.T) {
	const edge = 0.96937
	p := mustLoad(t, stableText)
	h := p.hypotheses[1]
	if d := math.Abs(h.allowed.mass - edge); d > 5*edge*h.allowed.error || h.allowed.error > massTolerance {
		t.Errorf("the switch leaves %.5f +- %.5f of the prior, want %.5f", h.allowed.mass, h.allowed.mass*h.allowed.error, edge)
	}
	if other := p.hypotheses[0].allowed; other != (allowed{mass: 1}) {
		t.Errorf("a horizon keeps %+v of its prior, want all", other)
	}
	target := h.target()
	rng := random.New(5, "stable test")
	u := make([]float64, h.set.Dim())
	seen := 0
	for range 400 {
		for i := range u {
			u[i] = rng.Float64()
		}
		l, err := target.LogLikelihood(u)
		if err != nil {
			t.Fatal(err)
		}
		r := target.theta[h.set.Len()-1]
		if out := r > edge; math.Abs(r-edge) > 1e-5 && out != math.IsInf(l, -1) {
			t.Errorf("reflectivity %.6f: ln L = %g with the edge at %g", r, l, edge)
		} else if out {
			seen++
		}
	}
	if seen == 0 {
		t.Error("no unstable point among 400")
	}
}

// TestStableEvidence: a prior cut by the switch and a prior that ends at the edge are
// the same prior, so evidence and information are the same. The switch leaves 23 % of
// this one: without its normalisation they would differ by 1.45 nat.
func TestStableEvidence(t *testing.T) {
	run := func(text string) (float64, float64, float64, float64) {
		w, _ := weigh(t, text, 2)
		h := w.Hypotheses[1]
		return float64(h.LogEvidenceOver), float64(h.LogEvidenceError), float64(h.Information), float64(h.StablePrior)
	}
	const all, left = "low = 0.96, high = 1.0 }", "low = 0.96, high = 0.96937 }"
	short := strings.NewReplacer("low = -1.0, high = 12.0", "low = 0.0, high = 0.02", "low = 40.0, high = 110.0", "low = 60.0, high = 76.0",
		"low = 0.0,  high = 1.0 }", all, "live_points    = 100", "live_points    = 400").Replace(stableText)
	with, withError, information, mass := run(short)
	cut := strings.NewReplacer("\nstable = true", "", all, left).Replace(short)
	without, withoutError, wanted, whole := run(cut)
	if whole != 1 || math.Abs(mass-0.00937/0.04) > 0.003 {
		t.Errorf("shares of the prior %g and %g, want 0.234 and 1", mass, whole)
	}
	if d, limit := with-without, 3*math.Hypot(withError, withoutError); math.Abs(d) > limit || limit > 1 {
		t.Errorf("ln evidence %g +- %g with the switch, %g +- %g with a prior that ends at the edge", with, withError, without, withoutError)
	}
	// Information scatters as the evidence does.
	if d := information - wanted; math.Abs(d) > 3*math.Hypot(withError, withoutError) {
		t.Errorf("information %g nat with the switch, %g with a prior that ends at the edge", information, wanted)
	}
	t.Logf("ln evidence %.2f +- %.2f and %.2f +- %.2f, information %.2f and %.2f nat", with, withError, without, withoutError, information, wanted)
}

// A derived quantity that does not exist at some points does not spoil the quantiles of
// the others; weights of 1/4 each.
func TestQuantilesWithoutNumbers(t *testing.T) {
	nan, one := math.NaN(), []float64{1, 1, 1, 1}
	for _, c := range []struct {
		x, weights, want []float64 // quantiles at 0.2, 0.5 and 0.9
	}{
		{[]float64{3, 1, 4, 2}, one, []float64{1, 2, 4}},
		{[]float64{3, nan, 1, 2}, one, []float64{1, 2, nan}},
		{[]float64{nan, 3, 1, 2}, []float64{1e-100, 1, 1, 1}, []float64{1, 2, 3}},
		{[]float64{math.Inf(1), nan, nan, 2}, one, []float64{2, math.Inf(1), nan}},
		{[]float64{nan, nan, nan, nan}, one, []float64{nan, nan, nan}},
	} {
		got := weightedQuantiles(c.x, c.weights, 0.2, 0.5, 0.9)
		for i, want := range c.want {
			if got[i] != want && !(math.IsNaN(got[i]) && math.IsNaN(want)) {
				t.Errorf("%v with weights %v: %v, want %v", c.x, c.weights, got, c.want)
				break
			}
		}
	}
}

func TestStableErrors(t *testing.T) {
	for _, tc := range []struct{ why, old, new, key, want string }{
		{"a horizon", "model = \"ringdown\"\nmodes = [\"2,2,0\"]\n\n[[hyp", "model = \"ringdown\"\nmodes = [\"2,2,0\"]\nstable = true\n\n[[hyp", "hypothesis[0].stable", "no such key"},
		{"a prior of unstable points", "low = 0.0,  high = 1.0 }", "low = 0.98, high = 1.0 }", "hypothesis[1].stable", "do not grow"},
	} {
		t.Run(tc.why, func(t *testing.T) {
			if !strings.Contains(stableText, tc.old) {
				t.Fatalf("no %q in the event", tc.old)
			}
			_, err := load(t, filepath.Join(t.TempDir(), "event.toml"), strings.Replace(stableText, tc.old, tc.new, 1))
			var e *InputError
			if !errors.As(err, &e) || e.Key != tc.key || !strings.Contains(e.Want, tc.want) {
				t.Fatalf("got %v, want an error at %s", err, tc.key)
			}
			readable(t, e.Error())
			if e.Line == 0 {
				t.Errorf("no line in %v", e)
			}
		})
	}
	if _, err := Decode("x", []byte(strings.Replace(stableText, "stable = true", "stable = 1", 1))); err == nil || !strings.Contains(err.Error(), "true or false") {
		t.Errorf("stable = 1: %v", err)
	}
}
