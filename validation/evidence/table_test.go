package main

import (
	"bytes"
	"strings"
	"testing"

	"knell/internal/report"
)

func TestTableSaysWhatFailed(t *testing.T) {
	c := problemCase{choice: choice{cavityName, 4}, truth: 5, most: 3}
	runs := madeRuns(20, 2, 1, 1, 1)
	for i := range runs {
		runs[i].sound = i > 2
		runs[i].shrinkages = nil
	}
	rows := []row{newRow(c, options{}, runs), newRow(problemCase{choice: choice{"other", 12}}, options{}, nil)}
	var out bytes.Buffer
	if err := writeTable(&out, options{seeds: 20, live: 100, seed: 4}, rows, true); err != nil {
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

func TestNumberHasNoMinusZero(t *testing.T) {
	for x, want := range map[float64]string{-1e-9: "0.00", -0.006: "-0.01", 10: "10.00"} {
		if got := number(report.Number(x), 2); got != want {
			t.Errorf("number(%g) = %q, want %q", x, got, want)
		}
	}
}
