package main

import (
	"fmt"
	"io"
	"strings"

	"knell/validation/trials"
)

// table prints rows for a reader, each as it comes, with a few words on what they
// hold.
type table struct{ *trials.Table }

func newTable(out io.Writer, o options, cases []trials.Case) *table {
	_, err := fmt.Fprintf(out, "grown against static runs: %d of each, %d live points before growth, seed %d\n"+
		"goals: %g effective samples for posterior use, %g times the error before growth for evidence use\n",
		o.seeds, o.live, o.seed, o.samples, o.share)
	t := trials.NewTable(out, []trials.Column{
		{Head: "use", Width: 9, Left: true}, {Head: "problem", Width: trials.NameWidth(cases), Left: true}, {Head: "dim"}, {Head: "runs"}, {Head: "goal", Width: 6},
		{Head: "grown: calls", Width: 8}, {Head: "reached", Width: 7},
		{Head: "static: live", Width: 5}, {Head: "calls", Width: 8}, {Head: "reached", Width: 7},
		{Head: "ratio", Width: 13}, {Head: "mean z", Width: 12}, {Head: "sd of z", Width: 11}, {Head: "rank p", Width: 6}, {Head: "verdict", Left: true},
	})
	if err != nil {
		t.Fail(err)
	}
	return &table{t}
}

func (t *table) add(r row) {
	places, grown, static := 4, r.Grown.Error, r.Static.Error
	if r.Use == posteriorUse {
		places, grown, static = 0, r.Grown.Samples, r.Static.Samples
	}
	t.Line(r.Use, r.Name, fmt.Sprint(r.Dim), fmt.Sprint(r.Seeds), trials.Fixed(r.Goal, places),
		trials.Fixed(r.Grown.Calls, 0), trials.Fixed(grown, places),
		fmt.Sprint(r.Static.LivePoints), trials.Fixed(r.Static.Calls, 0), trials.Fixed(static, places),
		trials.PlusMinus(r.Ratio, r.RatioError, "%.2f ± %.2f"),
		trials.PlusMinus(r.LogZ.MeanZ, r.LogZ.MeanZError, "%+.2f ± %.2f"), trials.PlusMinus(r.LogZ.StdZ, r.LogZ.StdZError, "%.2f ± %.2f"),
		trials.Fixed(r.RankP, 3), verdict(r))
	for _, of := range []struct {
		name string
		c    *trials.Calibration
	}{{"mean", r.Mean}, {"variance", r.Variance}} {
		if of.c != nil {
			t.Text(fmt.Sprintf("           posterior %s: mean z %s, sd of z %s\n", of.name,
				trials.PlusMinus(of.c.MeanZ, of.c.MeanZError, "%+.2f ± %.2f"), trials.PlusMinus(of.c.StdZ, of.c.StdZError, "%.2f ± %.2f")))
		}
	}
}

// end prints the words and returns the first error of the output.
func (t *table) end(interrupted bool) error {
	if interrupted {
		t.Text("INTERRUPTED: only the finished runs are counted\n")
	}
	t.Text(fmt.Sprintf(`
goal     effective samples, or standard error of ln Z in nats; reached: the runs' mean
ratio    posterior: calls per effective sample, static over grown, at least %d
         evidence: calls × error², grown over static, at most %d within %d standard errors
z        (estimate - truth) / quoted error of the grown runs, for ln Z unless said; its mean must
         be within 3/√runs of 0, its deviation in 0.85 to 1.15, wider by the sampling error for
         fewer than 100 runs
rank p   uniformity of the grown runs' insertion-rank p-values, at least %g
`, leastGain, mostCost, costErrors, trials.LeastP))
	return t.Err()
}

func verdict(r row) string {
	text := "pass"
	if !r.Passed {
		text = "FAIL: " + strings.Join(r.Faults, "; ")
	}
	if r.Doubtful > 0 {
		text += fmt.Sprintf("; doubtful by their own verdict: %d", r.Doubtful)
	}
	return text
}
