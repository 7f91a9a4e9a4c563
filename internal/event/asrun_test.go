package event

import (
	"path/filepath"
	"strings"
	"testing"
)

// TestAsRun changes files the way the command line does; what AsRun gives back
// must be the changed event.
func TestAsRun(t *testing.T) {
	header := strings.Replace(tiny, `synthetic = { curve = "second-generation-broadband", seed = 4, length = 8.0, quiet = true }
noise     = { from = "curve" }
`, `[site.synthetic]
# [a bracket
curve = "second-generation-broadband"

seed = 4
[site.noise]
from = "curve"
smooth = 0.1
`, 1)
	data := strings.Replace(tiny, `synthetic = { curve = "second-generation-broadband", seed = 4, length = 8.0, quiet = true }
noise     = { from = "curve" }`, `strain = 'h1.hdf5' # strain`, 1)
	for _, tc := range []struct{ why, text string }{
		{"inline tables", tiny},
		{"tables with headers", header},
		{"dotted keys", strings.Replace(tiny, `synthetic = { curve = "second-generation-broadband", seed = 4, length = 8.0, quiet = true }`, "synthetic.curve = \"second-generation-broadband\"\nsynthetic.seed = 4", 1)},
		{"strain from a file", data},
		{"no seed", strings.Replace(tiny, "seed  = 7\n", "", 1)},
		{"carriage returns", strings.ReplaceAll(header, "\n", "\r\n")},
		{"byte order mark", "\ufeff" + tiny},
	} {
		t.Run(tc.why, func(t *testing.T) {
			file := filepath.Join(t.TempDir(), "event.toml")
			c, err := Decode(file, []byte(tc.text))
			if err != nil {
				t.Fatal(err)
			}
			for _, name := range []string{"first.hdf5", "second \"odd\"\tname.hdf5"} {
				if err := c.ReplaceStrain("H1", name); err != nil {
					t.Fatal(err)
				}
			}
			c.SetSeed(5)
			c.SetSeed(6)
			if !filepath.IsAbs(c.Sites[0].Strain) || !strings.HasSuffix(c.Sites[0].Strain, "name.hdf5") || c.Sites[0].Synthetic != nil {
				t.Errorf("got site %+v", c.Sites[0])
			}
			again, err := Decode(file, c.AsRun())
			if err != nil {
				t.Fatalf("%v\n%s", err, c.AsRun())
			}
			if again.Seed != 6 {
				t.Errorf("got seed %d, want 6", again.Seed)
			}
			again.Sites[0].Strain = filepath.FromSlash(again.Sites[0].Strain)
			sameEvent(t, again, c)
			// The file keeps its name at the top and what was changed as comments.
			if text := string(c.AsRun()); !strings.HasPrefix(text, "# As run from "+file) || !strings.Contains(text, wasMark) {
				t.Errorf("got\n%s", text)
			}
		})
	}
}

func TestReplaceStrainErrors(t *testing.T) {
	c, err := Decode("x.toml", []byte(tiny))
	if err != nil {
		t.Fatal(err)
	}
	if err := c.ReplaceStrain("L1", "x.hdf5"); err == nil || !strings.Contains(err.Error(), "no site L1, want one of H1") {
		t.Errorf("got error %v", err)
	}
	list := strings.Replace(tiny, "[[site]]\ncode      = \"H1\"\n", "", 1)
	from := strings.Index(list, "synthetic = ")
	to := strings.Index(list, "[injection]")
	list = `site = [ { code = "H1", strain = "x.hdf5" } ]` + "\n" + list[:from] + list[to:]
	if c, err = Decode("x.toml", []byte(list)); err != nil {
		t.Fatal(err)
	}
	if err := c.ReplaceStrain("H1", "x.hdf5"); err == nil || !strings.Contains(err.Error(), "want a [[site]] table for each") {
		t.Errorf("got error %v", err)
	}
}

func TestSlug(t *testing.T) {
	for title, want := range map[string]string{
		"Marram Point, loud remnant": "marram-point-loud-remnant",
		"  -- MP-0417 (invented) ":   "mp-0417-invented",
		"../../etc":                  "etc",
		"…":                          "event",
		strings.Repeat("long ", 40):  "long-long-long-long-long-long-long-long-long-long-long-long-l",
	} {
		if got := (&Config{Title: title}).Slug(); got != want {
			t.Errorf("slug of %q = %q, want %q", title, got, want)
		}
	}
}
