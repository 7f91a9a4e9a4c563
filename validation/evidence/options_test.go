package main

import (
	"bytes"
	"context"
	"strings"
	"testing"

	"knell/validation/trials"
)

// Every option that cannot be used ends with status 2 and a message that says the
// option, what was found and what would be accepted; nothing goes to stdout.
func TestBadOptions(t *testing.T) {
	for _, tc := range []struct {
		args string
		says []string
	}{
		{"--problems gauss", []string{"--problems", `"gauss"`, "gaussian, shells", "cavity"}},
		{"--problems gaussian,", []string{"--problems", `""`}},
		{"--problems shells,shells", []string{"--problems", `"shells" twice`}},
		{"--dims 0", []string{"--dims", `"0"`, "1 to 64"}},
		{"--dims two", []string{"--dims", `"two"`, "1 to 64"}},
		{"--dims 2,2", []string{"--dims", "2 twice"}},
		{"--problems eggbox --dims 5", []string{"--dims", "= 5", "2 to 2", "eggbox"}},
		{"--seeds 1", []string{"--seeds", `"1"`, "2 to"}},
		{"--seeds 1.5", []string{"--seeds", `"1.5"`, "2 to"}},
		{"--seed -1", []string{"--seed", `"-1"`, "from 0"}},
		{"--live 31", []string{"--live", `"31"`, "32 to"}},
		{"--problems gaussian --dims 8 --live 32", []string{"--live", "32", "at least 36", "8 dimensions"}},
		{"--grow 2", []string{"--grow", `"2"`, "0.05 to 1"}},
		{"--grow NaN", []string{"--grow", `"NaN"`, "0.05 to 1"}},
		{"--workers 0", []string{"--workers", `"0"`, "1 to"}},
		{"--json=perhaps", []string{"json", "perhaps"}},
		{"--fast", []string{"-fast", "--problems", "--json"}},
		{"gaussian", []string{`"gaussian"`, "options"}},
	} {
		t.Run(tc.args, func(t *testing.T) {
			var out, errs bytes.Buffer
			if status := run(context.Background(), strings.Fields(tc.args), &out, &errs); status != trials.BadUsage {
				t.Errorf("status %d, want %d", status, trials.BadUsage)
			}
			for _, s := range tc.says {
				if !strings.Contains(errs.String(), s) {
					t.Errorf("message %q, want %q in it", errs.String(), s)
				}
			}
			if out.Len() > 0 {
				t.Errorf("stdout has %q, want nothing", out.String())
			}
		})
	}
}

func TestHelp(t *testing.T) {
	var out, errs bytes.Buffer
	if status := run(context.Background(), []string{"--help"}, &out, &errs); status != trials.Passed {
		t.Errorf("status %d, want %d", status, trials.Passed)
	}
	for _, f := range trials.Families() {
		if !strings.Contains(errs.String(), "  "+f.Name+" ") {
			t.Errorf("the help does not name %s", f.Name)
		}
	}
}

func TestAims(t *testing.T) {
	for _, tc := range []struct {
		c    trials.Choice
		want float64
	}{{trials.Choice{Name: "gaussian", Dim: 6}, 3}, {trials.Choice{Name: "gaussian", Dim: 16}, 20}, {trials.Choice{Name: "gaussian", Dim: 32}, 120}, {trials.Choice{Name: "gaussian", Dim: 33}, 0}, {trials.Choice{Name: trials.Cavity, Dim: 4}, 3}, {trials.Choice{Name: "shells", Dim: 2}, 0}} {
		if got := aim(tc.c); got != tc.want {
			t.Errorf("aim for %v = %g, want %g", tc.c, got, tc.want)
		}
	}
}
