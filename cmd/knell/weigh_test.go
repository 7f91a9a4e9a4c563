package main

import (
	"bytes"
	"context"
	"encoding/csv"
	"encoding/json"
	"os"
	"path/filepath"
	"slices"
	"strconv"
	"strings"
	"sync"
	"testing"

	"knell/internal/event"
)

// tiny is a small event whose runs end at a limit of calls: quick, and enough for
// what the command does with a result.
const tiny = `title = "Tern Ness, tiny"
seed  = 7

[event]
time = 1400000123.250
sky  = { right_ascension = 1.95, declination = 0.62 }

[[site]]
code      = "H1"
synthetic = { curve = "second-generation-broadband", seed = 4, length = 8.0 }
noise     = { from = "curve" }

[analysis]
sample_rate = 1024.0
duration    = 1.0
band        = [40.0, 460.0]
gate        = 0.125

[sampler]
live_points    = 100
evidence_error = 1.0
max_calls      = 1500

[[hypothesis]]
name  = "horizon"
model = "ringdown"
modes = ["2,2,0"]

[[hypothesis]]
name  = "surface"
model = "cavity"
modes = ["2,2,0"]
reflectivity = "boltzmann"

[prior]
mass      = { kind = "uniform", low = 40.0, high = 110.0 }
spin      = { kind = "uniform", low = 0.0,  high = 0.98 }
amplitude = { kind = "uniform", low = 0.0,  high = 5e-21 }
offset    = { kind = "uniform", low = -1.0, high = 12.0 }
`

func writeEvent(t *testing.T, file, text string) {
	t.Helper()
	if err := os.WriteFile(file, []byte(text), 0o666); err != nil {
		t.Fatal(err)
	}
}

// evidence is what the documentation promises of evidence.json and --json.
type evidence struct {
	Event      *string
	Seed       *uint64
	Version    *string
	Partial    bool
	Hypotheses []struct {
		Name                 *string
		LogEvidence          *float64 `json:"log_evidence"`
		LogEvidenceError     *float64 `json:"log_evidence_error"`
		LogEvidenceOverNoise *float64 `json:"log_evidence_over_noise"`
		Calls                *int64
		Seconds              *float64
		Verdict              *string
		Posterior            *string
	}
	Ratios []struct {
		For            *string
		Against        *string
		LogBayesFactor *float64 `json:"log_bayes_factor"`
		Error          *float64
	}
}

func (e *evidence) check(t *testing.T, hypotheses int) {
	t.Helper()
	if e.Event == nil || *e.Event != "Tern Ness, tiny" || e.Seed == nil || e.Version == nil || *e.Version == "" || len(e.Hypotheses) != hypotheses {
		t.Fatalf("got %+v", e)
	}
	for _, h := range e.Hypotheses {
		if h.Name == nil || h.LogEvidence == nil || h.LogEvidenceError == nil || h.LogEvidenceOverNoise == nil || h.Calls == nil || *h.Calls < 1 ||
			h.Seconds == nil || h.Verdict == nil || *h.Verdict == "" || h.Posterior == nil {
			t.Errorf("got hypothesis %+v", h)
		}
	}
	if len(e.Ratios) != hypotheses*(hypotheses-1)/2 {
		t.Errorf("got %d ratios", len(e.Ratios))
	}
	for _, r := range e.Ratios {
		if r.For == nil || r.Against == nil || r.LogBayesFactor == nil || r.Error == nil {
			t.Errorf("got ratio %+v", r)
		}
	}
}

func readFile(t *testing.T, parts ...string) string {
	t.Helper()
	text, err := os.ReadFile(filepath.Join(parts...))
	if err != nil {
		t.Fatal(err)
	}
	return string(text)
}

func TestWeigh(t *testing.T) {
	t.Chdir(t.TempDir())
	writeEvent(t, "tiny.toml", tiny)
	status, stdout, stderr := knell(t, "weigh", "tiny.toml", "--json", "--workers", "2")
	if status != statusDone {
		t.Fatalf("status %d, standard error %q", status, stderr)
	}
	var printed evidence
	parse(t, stdout, &printed)
	printed.check(t, 2)
	if !strings.Contains(stderr, "horizon (1 of 2)") || !strings.Contains(stderr, "surface (2 of 2)") {
		t.Errorf("no progress on standard error: %q", stderr)
	}
	const folder = "weighed/tern-ness-tiny"
	if written := readFile(t, folder, "evidence.json"); written != stdout {
		t.Errorf("evidence.json is not what --json prints:\n%s", written)
	}
	for _, name := range []string{"posterior-horizon.csv", "posterior-horizon.parquet", "posterior-surface.csv", "posterior-surface.parquet", "event.toml"} {
		if readFile(t, folder, name) == "" {
			t.Errorf("%s is empty", name)
		}
	}
	if c, err := event.Decode("event.toml", []byte(readFile(t, folder, "event.toml"))); err != nil || c.Seed != 7 {
		t.Errorf("the event as run: %v", err)
	}
	if *printed.Hypotheses[1].Posterior != "posterior-surface.csv" {
		t.Errorf("got posterior %q", *printed.Hypotheses[1].Posterior)
	}
	rows, err := csv.NewReader(strings.NewReader(readFile(t, folder, "posterior-surface.csv"))).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	want := []string{"mass", "spin", "start_time", "amplitude_220", "phase_220", "offset", "echo_phase", "reflectivity", "temperature",
		"frequency_220", "damping_time_220", "echo_delay", "growth_time", "log_likelihood_over_noise", "log_likelihood"}
	if len(rows) < 3 || !sameSet(rows[0], want) {
		t.Fatalf("%d rows under %v, want columns %v", len(rows), rows[0], want)
	}
	for _, row := range rows[1:] {
		mass, err := strconv.ParseFloat(row[slices.Index(rows[0], "mass")], 64)
		if err != nil || mass < 40 || mass > 110 {
			t.Errorf("got mass %q", row)
		}
	}

	// Again, as a table, with options behind the file: another directory, the
	// same numbers, no progress.
	status, stdout, stderr = knell(t, "weigh", "tiny.toml", "--quiet", "--workers=1")
	if status != statusDone || stderr != "" || !strings.Contains(stdout, filepath.FromSlash("weighed/tern-ness-tiny-2")) || !strings.Contains(stdout, "ln B") {
		t.Errorf("status %d, standard error %q, standard output\n%s", status, stderr, stdout)
	}
	for _, name := range []string{"posterior-horizon.csv", "posterior-surface.csv", "event.toml"} {
		if readFile(t, folder, name) != readFile(t, folder+"-2", name) {
			t.Errorf("%s differs between two runs of one event", name)
		}
	}
	var e evidence
	parse(t, readFile(t, folder, "evidence.json"), &e)
	if *e.Hypotheses[0].LogEvidence != *printed.Hypotheses[0].LogEvidence {
		t.Error("the first result was overwritten")
	}
}

func sameSet(a, b []string) bool {
	a, b = slices.Sorted(slices.Values(a)), slices.Sorted(slices.Values(b))
	return slices.Equal(a, b)
}

func TestWeighOut(t *testing.T) {
	t.Chdir(t.TempDir())
	writeEvent(t, "tiny.toml", tiny)
	out := filepath.Join("some", "where")
	if status, _, stderr := knell(t, "weigh", "--out", out, "--quiet", "tiny.toml", "--seed", "9"); status != statusDone {
		t.Fatalf("status %d, standard error %q", status, stderr)
	}
	first := readFile(t, out, "evidence.json")
	var e evidence
	parse(t, first, &e)
	if *e.Seed != 9 {
		t.Errorf("got seed %d, want 9", *e.Seed)
	}
	if c, err := event.Decode("event.toml", []byte(readFile(t, out, "event.toml"))); err != nil || c.Seed != 9 {
		t.Errorf("the event as run has not the seed 9 (%v)", err)
	}
	status, stdout, stderr := knell(t, "weigh", "tiny.toml", "--quiet", "--out", out)
	if status != statusUsage || stdout != "" || strings.Count(stderr, "\n") != 1 || !strings.Contains(stderr, "--replace") || !strings.Contains(stderr, out) {
		t.Errorf("status %d, standard output %q, standard error %q", status, stdout, stderr)
	}
	if readFile(t, out, "evidence.json") != first {
		t.Error("a refused run changed the result")
	}
	if status, _, stderr := knell(t, "weigh", "tiny.toml", "--quiet", "--out", out, "--replace"); status != statusDone {
		t.Errorf("status %d, standard error %q", status, stderr)
	}
	if readFile(t, out, "evidence.json") == first {
		t.Error("--replace left the old result")
	}
	if _, err := os.Stat("weighed"); err == nil {
		t.Error("--out made a directory weighed as well")
	}
	// An empty directory, and one with other things in it, are fine.
	if err := os.MkdirAll("empty", 0o777); err != nil {
		t.Fatal(err)
	}
	if status, _, stderr := knell(t, "weigh", "tiny.toml", "--quiet", "--out", "empty"); status != statusDone {
		t.Errorf("status %d, standard error %q", status, stderr)
	}
}

// TestWeighStrain points a site to a file; the event as run says so.
func TestWeighStrain(t *testing.T) {
	t.Chdir(t.TempDir())
	var b strings.Builder
	b.WriteString("# rate = 1024\n# start = 1400000119\n")
	for i := range 8 * 1024 {
		b.WriteString(strconv.Itoa(i%5-2) + "e-24\n")
	}
	writeEvent(t, "other strain.txt", b.String())
	if err := os.Mkdir("events", 0o777); err != nil {
		t.Fatal(err)
	}
	writeEvent(t, filepath.Join("events", "tiny.toml"), tiny)
	status, _, stderr := knell(t, "weigh", filepath.Join("events", "tiny.toml"), "--quiet", "--strain", "H1=other strain.txt", "--out", "out")
	if status != statusDone {
		t.Fatalf("status %d, standard error %q", status, stderr)
	}
	c, err := event.Decode("event.toml", []byte(readFile(t, "out", "event.toml")))
	if err != nil {
		t.Fatal(err)
	}
	if s := c.Sites[0].Strain; !filepath.IsAbs(filepath.FromSlash(s)) || filepath.Base(s) != "other strain.txt" {
		t.Errorf("the event as run reads %q", s)
	}
}

// TestWeighFails: a result that cannot be written is no matter of the command
// line: what was computed is shown, and what stood in the directory stays.
func TestWeighFails(t *testing.T) {
	t.Chdir(t.TempDir())
	writeEvent(t, "tiny.toml", tiny)
	// A directory stands where evidence.json must go.
	if err := os.MkdirAll(filepath.Join("out", "evidence.json", "kept"), 0o777); err != nil {
		t.Fatal(err)
	}
	status, stdout, stderr := knell(t, "weigh", "tiny.toml", "--quiet", "--out", "out", "--replace")
	if status != statusFailed || !strings.Contains(stdout, "surface over horizon") || strings.Contains(stdout, "written to") || strings.Count(stderr, "\n") != 1 || !strings.Contains(stderr, "evidence.json") {
		t.Errorf("status %d, standard output %q, standard error %q", status, stdout, stderr)
	}
	if _, err := os.Stat(filepath.Join("out", "evidence.json", "kept")); err != nil {
		t.Error(err)
	}
}

// cancelling is standard error that interrupts the run when it sees a text.
type cancelling struct {
	mu     sync.Mutex
	text   bytes.Buffer
	mark   string
	cancel func()
}

func (c *cancelling) Write(p []byte) (int, error) {
	c.mu.Lock()
	defer c.mu.Unlock()
	if strings.Contains(string(p), c.mark) {
		c.cancel()
	}
	return c.text.Write(p)
}

func TestInterrupted(t *testing.T) {
	for _, tc := range []struct {
		why, mark  string
		hypotheses int
		args       []string
	}{
		{"amid the first", "horizon (1 of 2)", 1, nil},
		{"amid the second", "surface (2 of 2)", 2, []string{"--json"}},
	} {
		t.Run(tc.why, func(t *testing.T) {
			t.Chdir(t.TempDir())
			// No limit of calls: without the interruption this takes long.
			writeEvent(t, "tiny.toml", strings.Replace(tiny, "max_calls      = 1500", "", 1))
			ctx, cancel := context.WithCancel(context.Background())
			defer cancel()
			var out bytes.Buffer
			errs := &cancelling{mark: tc.mark, cancel: cancel}
			status := run(ctx, append([]string{"knell", "weigh", "tiny.toml", "--out", "out"}, tc.args...), &out, errs)
			lines := strings.Split(strings.TrimSpace(errs.text.String()), "\n")
			if last := lines[len(lines)-1]; status != statusInterrupted || !strings.HasPrefix(last, "knell: interrupted") {
				t.Errorf("status %d, standard error %q", status, lines)
			}
			var e evidence
			if err := json.Unmarshal([]byte(readFile(t, "out", "evidence.json")), &e); err != nil {
				t.Fatal(err)
			}
			e.check(t, tc.hypotheses)
			if !e.Partial {
				t.Error("evidence.json does not say that it is partial")
			}
			if readFile(t, "out", "posterior-horizon.csv") == "" {
				t.Error("no posterior samples")
			}
			if tc.args != nil {
				parse(t, out.String(), &e)
			} else if !strings.Contains(strings.ToLower(out.String()), "partial") {
				t.Errorf("the table does not say that it is partial:\n%s", out.String())
			}
		})
	}
}
