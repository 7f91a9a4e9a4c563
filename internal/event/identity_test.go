package event

import (
	"strings"
	"testing"
)

// digestOf is the settings' digest of one hypothesis of an event file.
func digestOf(t *testing.T, text, hypothesis string) string {
	t.Helper()
	c, err := Decode("tiny.toml", []byte(text))
	if err != nil {
		t.Fatal(err)
	}
	for _, h := range c.Hypotheses {
		if h.Name == hypothesis {
			return c.settingsDigest(h)
		}
	}
	t.Fatalf("no hypothesis %s", hypothesis)
	return ""
}

// replaced changes a text that must be there.
func replaced(t *testing.T, text, old, by string) string {
	t.Helper()
	if !strings.Contains(text, old) {
		t.Fatalf("no %q in\n%s", old, text)
	}
	return strings.Replace(text, old, by, 1)
}

// TestSettingsDigest: the digest changes with what a result depends on and with nothing
// else.
func TestSettingsDigest(t *testing.T) {
	plain := digestOf(t, tiny, "horizon")
	same := func(why, text string) {
		t.Helper()
		if digestOf(t, text, "horizon") != plain {
			t.Errorf("%s changes the digest", why)
		}
	}
	other := func(why, text string) {
		t.Helper()
		if digestOf(t, text, "horizon") == plain {
			t.Errorf("%s does not change the digest", why)
		}
	}
	first, second, end := strings.Index(tiny, "[[hypothesis]]\n"), strings.Index(tiny, "[[hypothesis]]   # second"), strings.Index(tiny, "[prior]")
	same("a comment", "# What a day.\n"+tiny)
	same("a title", replaced(t, tiny, `"Tiny"`, `"Renamed"`))
	same("spaces", replaced(t, tiny, "seed  = 7", "seed=7"))
	same("the order of hypotheses", tiny[:first]+tiny[second:end]+tiny[first:second]+tiny[end:])
	same("a hypothesis beside it", replaced(t, tiny, "[prior]", "[[hypothesis]]\nname = \"third\"\nmodel = \"ringdown\"\nmodes = [\"2,2,0\", \"2,2,1\"]\n\n[prior]"))
	same("a prior that only another hypothesis has", replaced(t, tiny, "high = 12.0", "high = 11.0"))
	other("a seed", replaced(t, tiny, "seed  = 7", "seed = 8"))
	other("a setting of the sampler", replaced(t, tiny, "max_calls      = 0", "max_calls = 99999"))
	other("a prior", replaced(t, tiny, "low = 40.0", "low = 40.5"))
	other("a prior shared by modes", replaced(t, tiny, "amplitude    = { kind = \"uniform\", low = 0.0", "amplitude = { kind = \"uniform\", low = 1e-23"))
	other("a mode", replaced(t, tiny, "model = \"ringdown\"\nmodes = [\"2,2,0\"]", "model = \"ringdown\"\nmodes = [\"2,2,0\", \"2,2,1\"]"))
	if digestOf(t, tiny, "surface") == plain {
		t.Error("two hypotheses have one digest")
	}

	c, err := Decode("tiny.toml", []byte(tiny))
	if err != nil {
		t.Fatal(err)
	}
	c.SetSeed(8)
	if c.settingsDigest(c.Hypotheses[0]) == digestOf(t, tiny, c.Hypotheses[0].Name) {
		t.Error("a seed of the command line does not change the digest")
	}
}

// TestIdentity: every part of an identity is told apart, and nothing but it.
func TestIdentity(t *testing.T) {
	p := mustLoad(t, tiny)
	of := func(p *Prepared, name, version string) identity {
		t.Helper()
		for _, h := range p.hypotheses {
			if h.Name == name {
				return p.identity(h, version)
			}
		}
		t.Fatalf("no hypothesis %s", name)
		return identity{}
	}
	plain := of(p, "horizon", "1")
	again := of(mustLoad(t, tiny), "horizon", "1")
	if again != plain || plain.difference(again) != "" || again.problem() != plain.problem() || len(plain.problem()) != 64 {
		t.Errorf("one event has two identities:\n%+v\n%+v", plain, again)
	}
	noisier := mustLoad(t, replaced(t, tiny, "seed = 4", "seed = 5"))
	changedValues := plain
	changedValues.Values = "0"
	changedData := plain
	changedData.Data = "0"
	platform := plain
	platform.Platform = "plan9/386"
	for _, tc := range []struct {
		other identity
		want  []string
	}{
		{of(p, "surface", "1"), []string{"hypothesis surface"}},
		{of(p, "horizon", "2"), []string{"version 2 began it", "this is 1"}},
		{platform, []string{"plan9/386", plain.Platform}},
		{of(mustLoad(t, replaced(t, tiny, "seed  = 7", "seed = 8")), "horizon", "1"), []string{"event file or other options"}},
		{of(noisier, "horizon", "1"), []string{"event file"}},
		{changedData, []string{"other strain"}},
		{changedValues, []string{"program or the machine"}},
	} {
		got := plain.difference(tc.other)
		for _, w := range tc.want {
			if !strings.Contains(got, w) {
				t.Errorf("got %q, want %q in it", got, w)
			}
		}
		if tc.other.problem() == plain.problem() {
			t.Errorf("%q: the sampler cannot tell them apart", got)
		}
	}
	// Strain that changes under one event file is seen.
	quiet := mustLoad(t, tiny)
	quiet.likelihood = mustLoad(t, replaced(t, tiny, "quiet = true", "quiet = false")).likelihood
	if got := plain.difference(of(quiet, "horizon", "1")); !strings.Contains(got, "other strain") {
		t.Errorf("other strain: got %q", got)
	}
	// So are other values of the likelihood alone.
	quiet = mustLoad(t, tiny)
	for _, h := range quiet.hypotheses {
		h.model = failing{h.model}
	}
	if got := plain.difference(of(quiet, "horizon", "1")); !strings.Contains(got, "other values") {
		t.Errorf("another model: got %q", got)
	}
}
