package main

import (
	"bytes"
	"context"
	"io"
	"slices"
	"strings"
	"testing"
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
		{"--workers 0", []string{"--workers", `"0"`, "1 to"}},
		{"--json=perhaps", []string{"json", "perhaps"}},
		{"--fast", []string{"-fast", "--problems", "--json"}},
		{"gaussian", []string{`"gaussian"`, "options"}},
	} {
		t.Run(tc.args, func(t *testing.T) {
			var out, errs bytes.Buffer
			if status := run(context.Background(), strings.Fields(tc.args), &out, &errs); status != badUsage {
				t.Errorf("status %d, want %d", status, badUsage)
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
	if status := run(context.Background(), []string{"--help"}, &out, &errs); status != passed {
		t.Errorf("status %d, want %d", status, passed)
	}
	for _, f := range families() {
		if !strings.Contains(errs.String(), "  "+f.Name+" ") {
			t.Errorf("the help does not name %s", f.Name)
		}
	}
}

func TestChosenProblems(t *testing.T) {
	for _, tc := range []struct {
		args string
		want []choice
	}{
		{"--problems shells,gaussian --dims 5,8", []choice{{"gaussian", 5}, {"gaussian", 8}, {"shells", 5}, {"shells", 8}}},
		{"--problems eggbox,rosenbrock --dims 2,6", []choice{{"eggbox", 2}, {"rosenbrock", 2}, {"rosenbrock", 6}}},
		{"--problems gaussian", []choice{{"gaussian", 2}, {"gaussian", 8}, {"gaussian", 16}, {"gaussian", 32}}},
		{"--problems cavity", []choice{{"cavity", 4}}},
	} {
		o, err := parse(strings.Fields(tc.args), io.Discard)
		if err != nil || !slices.Equal(o.chosen, tc.want) {
			t.Errorf("%s: %v, %v; want %v", tc.args, o.chosen, err, tc.want)
		}
	}
	// Without names, problems that do not take a dimension are left out.
	o, err := parse([]string{"--dims", "64"}, io.Discard)
	if err != nil || len(o.chosen) == 0 || slices.Contains(o.chosen, choice{cavityName, 64}) || !slices.Contains(o.chosen, choice{"gaussian", 64}) {
		t.Errorf("--dims 64: %v, %v", o.chosen, err)
	}
	all, err := parse(nil, io.Discard)
	if err != nil || len(all.chosen) < 20 || all.seeds != 100 {
		t.Errorf("no options: %d problems of %d seeds, %v; want 20 or more of 100", len(all.chosen), all.seeds, err)
	}
}

func TestAims(t *testing.T) {
	for _, tc := range []struct {
		c    choice
		want float64
	}{{choice{"gaussian", 6}, 3}, {choice{"gaussian", 16}, 20}, {choice{"gaussian", 32}, 120}, {choice{"gaussian", 33}, 0}, {choice{cavityName, 4}, 3}, {choice{"shells", 2}, 0}} {
		if got := aim(tc.c); got != tc.want {
			t.Errorf("aim for %v = %g, want %g", tc.c, got, tc.want)
		}
	}
}
