package main

import (
	"bytes"
	"context"
	"encoding/json"
	"io"
	"math"
	"strings"
	"testing"

	"knell/validation/trials"
)

func documentOf(t *testing.T, args string) document {
	t.Helper()
	var out bytes.Buffer
	run(context.Background(), strings.Fields(args+" --json"), &out, io.Discard)
	var d document
	if err := json.Unmarshal(out.Bytes(), &d); err != nil {
		t.Fatalf("%s: %v in\n%s", args, err, out.String())
	}
	return d
}

// leastShort is the least gain in the short version below: the run before growth is
// half of the calls of such a small number of samples, which no growth can win back.
const leastShort = 1.5

// The short version of the table's first row: few seeds, few samples.
func TestGrowthForThePosterior(t *testing.T) {
	d := documentOf(t, "--use posterior --seeds 2 --live 250 --samples 8000 --seed 3")
	r := d.Problems[0]
	if len(d.Problems) != 1 || r.Name != "gaussian" || r.Dim != 8 || r.Seeds != 2 {
		t.Fatalf("problems %+v, want the 8-dimensional Gaussian with 2 seeds", d.Problems)
	}
	// The live points of the static runs come from one run of 250, whose number of
	// effective samples is known to a tenth.
	if float64(r.Grown.Samples) < 8000 || math.Abs(float64(r.Static.Samples)-8000) > 2400 {
		t.Errorf("%.0f and %.0f effective samples, want 8000 at least and about 8000", r.Grown.Samples, r.Static.Samples)
	}
	if float64(r.Ratio) < leastShort {
		t.Errorf("%.2f times fewer calls per sample, want %g", r.Ratio, leastShort)
	}
	if r.Mean == nil || r.Variance == nil {
		t.Error("no calibration of mean and variance")
	}
}

// The same for evidences, of a peak and of a plateau.
func TestGrowthForTheEvidence(t *testing.T) {
	d := documentOf(t, "--use evidence --problems gaussian,half-plateau --dims 2 --seeds 6 --live 64 --seed 2")
	if len(d.Problems) != 2 {
		t.Fatalf("%d problems, want 2", len(d.Problems))
	}
	for _, r := range d.Problems {
		if float64(r.Grown.Error) > float64(r.Goal) || r.Seeds != 6 {
			t.Errorf("%s/%d: error %g of %d runs, want %g at most of 6", r.Name, r.Dim, r.Grown.Error, r.Seeds, r.Goal)
		}
		if !r.Passed {
			t.Errorf("%s/%d: %q", r.Name, r.Dim, r.Faults)
		}
	}
}

func TestSameForAnyNumberOfWorkers(t *testing.T) {
	var first bytes.Buffer
	for _, workers := range []string{"1", "3"} {
		var out bytes.Buffer
		run(context.Background(), strings.Fields("--use evidence --problems gaussian --dims 2 --seeds 2 --live 40 --json --workers "+workers), &out, io.Discard)
		if first.Len() == 0 {
			first = out
		}
		if out.String() != first.String() {
			t.Errorf("%s workers:\n%s\none worker:\n%s", workers, out.String(), first.String())
		}
	}
}

func TestTable(t *testing.T) {
	var b bytes.Buffer
	o := options{seeds: 20, live: 200, samples: 2000, share: 0.5}
	table := newTable(&b, o, casesOf([]job{made(posteriorUse)}))
	table.add(newRow(made(posteriorUse), o, madeRuns(posteriorUse, 20, 10_000, 0)))
	table.add(newRow(made(evidenceUse), o, madeRuns(evidenceUse, 20, 60_000, 0)))
	if err := table.end(true); err != nil {
		t.Fatal(err)
	}
	for _, s := range []string{"20 of each, 200 live points", "posterior  made", "posterior variance: mean z", "FAIL: 1.", "INTERRUPTED", "  pass\n"} {
		if !strings.Contains(b.String(), s) {
			t.Errorf("no %q in\n%s", s, b.String())
		}
	}
}

func TestInterrupt(t *testing.T) {
	ctx, cancel := context.WithCancel(context.Background())
	cancel()
	if status := run(ctx, strings.Fields("--use posterior --seeds 2"), io.Discard, io.Discard); status != trials.Interrupted {
		t.Errorf("status %d, want %d", status, trials.Interrupted)
	}
}

func TestBadOptions(t *testing.T) {
	for _, tc := range []struct {
		args string
		says []string
	}{
		{"--use samples", []string{"--use", `"samples"`, "posterior, evidence"}},
		{"--problems gauss", []string{"--problems", `"gauss"`, "gaussian, shells"}},
		{"--seeds 1", []string{"--seeds", `"1"`, "2 to"}},
		{"--live 31", []string{"--live", `"31"`, "32 to"}},
		{"--use posterior --live 32", []string{"--live", "32", "at least 36", "8 dimensions"}},
		{"--samples many", []string{"--samples", `"many"`, "100 to"}},
		{"--share 1", []string{"--share", `"1"`, "0.1 to 0.9"}},
		{"--workers 0", []string{"--workers", `"0"`, "1 to"}},
		{"--seed -1", []string{"--seed", `"-1"`, "from 0"}},
		{"--fast", []string{"-fast", "--use", "--json"}},
		{"gaussian", []string{`"gaussian"`, "options"}},
	} {
		var out, errs bytes.Buffer
		if status := run(context.Background(), strings.Fields(tc.args), &out, &errs); status != trials.BadUsage {
			t.Errorf("%s: status %d, want %d", tc.args, status, trials.BadUsage)
		}
		for _, s := range tc.says {
			if !strings.Contains(errs.String(), s) {
				t.Errorf("%s: message %q, want %q in it", tc.args, errs.String(), s)
			}
		}
		if out.Len() > 0 {
			t.Errorf("%s: stdout has %q, want nothing", tc.args, out.String())
		}
	}
}
