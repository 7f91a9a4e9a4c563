package main

import (
	"bytes"
	"context"
	"encoding/json"
	"io"
	"strings"
	"testing"

	"knell/validation/trials"
)

const short = "--live 200,400 --workers 2,8 --calls 1,3 --nats 3 "

func TestTable(t *testing.T) {
	var out bytes.Buffer
	if status := run(context.Background(), strings.Fields(short), &out, io.Discard); status != trials.Passed {
		t.Fatalf("status %d, want %d", status, trials.Passed)
	}
	for _, s := range []string{"\n200 live points\n", "\n400 live points\n", "live points for an efficiency of 90 %", "3 calls on average, rejection", "1 per batch slow", "one threshold: law"} {
		if !strings.Contains(out.String(), s) {
			t.Errorf("no %q in\n%s", s, out.String())
		}
	}
}

func TestDocument(t *testing.T) {
	var first, second bytes.Buffer
	run(context.Background(), strings.Fields(short+"--json"), &first, io.Discard)
	run(context.Background(), strings.Fields(short+"--json"), &second, io.Discard)
	if first.String() != second.String() {
		t.Error("equal options gave different documents")
	}
	var d document
	if err := json.Unmarshal(first.Bytes(), &d); err != nil {
		t.Fatal(err)
	}
	// 3 kinds of slot, 4 laws, 2 numbers of workers.
	if len(d.Efficiency) != 2*24 || len(d.LivePoints) != 24 || len(d.OneThreshold) != 4 {
		t.Fatalf("%d, %d and %d rows, want 48, 24 and 4", len(d.Efficiency), len(d.LivePoints), len(d.OneThreshold))
	}
	for _, r := range d.Efficiency {
		if !(r.Efficiency > 0 && r.Efficiency <= 1 && r.Former > 0 && r.Former <= 1) {
			t.Errorf("efficiencies out of 0 to 1 in %+v", r)
		}
		// Two workers share 50 slots in the air: calls of equal time leave nobody idle
		// but at the end.
		if r.Live == 400 && r.Workers == 2 && r.CallTimes == "equal" && r.Efficiency < 0.98 {
			t.Errorf("efficiency %.3f of two workers with equal calls, want 0.98 at least", r.Efficiency)
		}
	}
	for _, r := range d.LivePoints {
		if r.Live < 32 {
			t.Errorf("%d live points recommended in %+v, want 32 at least", r.Live, r)
		}
	}
}

func TestBadOptions(t *testing.T) {
	for _, tc := range []struct {
		args string
		says []string
	}{
		{"--live 10", []string{"--live", `"10"`, "32 to"}},
		{"--live 50,50", []string{"--live", "50 twice"}},
		{"--workers 0", []string{"--workers", `"0"`, "1 to"}},
		{"--calls some", []string{"--calls", `"some"`, "1 to"}},
		{"--nats 0.5", []string{"--nats", `"0.5"`, "1 to"}},
		{"--own -1", []string{"--own", `"-1"`, "0 to"}},
		{"--in-flight 32", []string{"--in-flight", `"32"`, "1 to 31"}},
		{"--seed x", []string{"--seed", `"x"`, "from 0"}},
		{"--fast", []string{"-fast", "--live", "--json"}},
		{"500", []string{`"500"`, "options"}},
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

func TestInterrupt(t *testing.T) {
	ctx, cancel := context.WithCancel(context.Background())
	cancel()
	var out bytes.Buffer
	if status := run(ctx, strings.Fields(short), &out, io.Discard); status != trials.Interrupted || out.Len() > 0 {
		t.Errorf("status %d with output %q, want %d with none", status, out.String(), trials.Interrupted)
	}
}
