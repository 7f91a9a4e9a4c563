package configs_test

import (
	"slices"
	"strings"
	"testing"

	"knell/configs"
	"knell/internal/event"
)

// TestDemos: every embedded demo decodes, compares two hypotheses at least and
// says that it is invented, where a reader of the file and of the result sees it.
func TestDemos(t *testing.T) {
	names := configs.DemoNames()
	if !slices.IsSorted(names) || !slices.Contains(names, configs.DefaultDemo) {
		t.Fatalf("got demos %v, want them sorted and %s among them", names, configs.DefaultDemo)
	}
	titles := map[string]string{}
	for _, name := range names {
		file, text, err := configs.Demo(name)
		if err != nil {
			t.Fatal(err)
		}
		if !strings.Contains(file, name) {
			t.Errorf("%s: called %s in messages", name, file)
		}
		c, err := event.Decode(file, text)
		if err != nil {
			t.Errorf("%s: %v", name, err)
			continue
		}
		first, _, _ := strings.Cut(string(text), "\n\n")
		if !strings.HasPrefix(first, "#") || !strings.Contains(strings.ToLower(first), "invented") || !strings.Contains(c.Title, "invented") {
			t.Errorf("%s: the head of the file and its title %q must say that it is invented", name, c.Title)
		}
		if other, taken := titles[c.Title]; taken {
			t.Errorf("%s and %s have the same title", name, other)
		}
		titles[c.Title] = name
		if len(c.Hypotheses) < 2 || len(c.Sites) < 2 || c.Injection == nil {
			t.Errorf("%s: %d hypotheses, %d sites, injection %v", name, len(c.Hypotheses), len(c.Sites), c.Injection)
		}
		for _, s := range c.Sites {
			// Invented sites: none of the catalogue's, and no files.
			if s.Geometry == nil || s.Synthetic == nil {
				t.Errorf("%s: site %s is not of our invention", name, s.Code)
			}
		}
		if c.Sampler.EvidenceError > 0.15 {
			t.Errorf("%s: an evidence error of %g, want 0.15 or better", name, c.Sampler.EvidenceError)
		}
	}
}

func TestUnknownDemo(t *testing.T) {
	for _, name := range []string{"nobody", "", "../configs", "Surface"} {
		_, _, err := configs.Demo(name)
		if err == nil || !strings.Contains(err.Error(), configs.DefaultDemo) {
			t.Errorf("demo %q: got error %v, want one that lists the demos", name, err)
		}
	}
}
