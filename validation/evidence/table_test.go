package main

import (
	"bytes"
	"strings"
	"testing"

	"knell/validation/trials"
)

func TestTableSaysWhatFailed(t *testing.T) {
	c := trials.Case{Choice: trials.Choice{Name: trials.Cavity, Dim: 4}, Truth: 5}
	runs := madeRuns(20, 2, 1, 1, 1)
	for i := range runs {
		runs[i].sound = i > 2
		runs[i].shrinkages = nil
	}
	rows := []row{newRow(c, options{}, runs), newRow(trials.Case{Choice: trials.Choice{Name: "other", Dim: 12}}, options{}, nil)}
	var out bytes.Buffer
	table := newTable(&out, options{seeds: 20, live: 100, seed: 4}, []trials.Case{c})
	for _, r := range rows {
		table.add(r)
	}
	if err := table.end(true); err != nil {
		t.Fatal(err)
	}
	for _, s := range []string{
		"20 runs per problem, 100 live points, seed 4", "INTERRUPTED",
		"FAIL: mean z +", "; calls per point not below 3; doubtful by their own verdict: 3", "3.0 of 3",
		"prior 60% 1.7, slices 40% 5.0", "FAIL: runs to judge by: 0, want 2 at least",
	} {
		if !strings.Contains(out.String(), s) {
			t.Errorf("no %q in\n%s", s, out.String())
		}
	}
	// Columns stand under one another: the name's is as wide as its widest entry.
	for _, line := range strings.Split(out.String(), "\n") {
		if strings.HasPrefix(line, "cavity") && !strings.HasPrefix(line, "cavity     4") {
			t.Errorf("the dimension of %q is not under its head", line)
		}
	}
}
