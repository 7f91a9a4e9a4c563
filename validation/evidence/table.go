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
	head := fmt.Sprintf("evidence against truth: %d runs per problem, %d live points, seed %d\n", o.seeds, o.live, o.seed)
	if o.grow > 0 {
		head = fmt.Sprintf("evidence against truth: %d runs per problem, %d live points, grown to %g times their error, seed %d\n", o.seeds, o.live, o.grow, o.seed)
	}
	_, err := io.WriteString(out, head)
	t := trials.NewTable(out, []trials.Column{
		{Head: "problem", Width: trials.NameWidth(cases), Left: true}, {Head: "dim"}, {Head: "runs"}, {Head: "truth", Width: 8},
		{Head: "mean z", Width: 12}, {Head: "sd of z", Width: 11}, {Head: "error", Width: 5},
		{Head: "calls", Width: 8}, {Head: "per point", Width: 11}, {Head: "rank p", Width: 6},
		{Head: "shrinkage", Width: 15}, {Head: "p", Width: 5}, {Head: "s/run", Width: 5},
		{Head: "drawn by (points, calls each)", Width: 53, Left: true}, {Head: "verdict", Left: true},
	})
	if err != nil {
		t.Fail(err)
	}
	return &table{t}
}

func (t *table) add(r row) {
	t.Line(r.Name, fmt.Sprint(r.Dim), fmt.Sprint(r.Seeds), trials.Fixed(r.Truth, 4),
		trials.PlusMinus(r.MeanZ, r.MeanZError, "%+.2f ± %.2f"), trials.PlusMinus(r.StdZ, r.StdZError, "%.2f ± %.2f"),
		trials.Fixed(r.Error, 3), trials.Fixed(r.Calls, 0), perPoint(r), trials.Fixed(r.RankP, 3),
		trials.PlusMinus(r.Shrinkage, r.ShrinkageError, "%.4f ± %.4f"), trials.Fixed(r.ShrinkageP, 3),
		trials.Fixed(r.Seconds, 2), drawn(r), verdict(r))
}

// end prints the words and returns the first error of the output.
func (t *table) end(interrupted bool) error {
	if interrupted {
		t.Text("INTERRUPTED: only the finished runs are counted\n")
	}
	t.Text(`
z         (ln Z - truth) / quoted error; its mean must be within 3/√runs of 0, its deviation in
          0.85 to 1.15, wider by the sampling error for fewer than 100 runs
per point likelihood calls over the points of a run, dead and live; an ideal sampler has 1
rank p    uniformity of the runs' insertion-rank p-values, at least 0.001
shrinkage where volumes are known: mean of n ln(V before / V), 1 for fair draws, and the p-value
          of its distribution, at least 0.001
`)
	return t.Err()
}

// perPoint is the ratio to the ideal, with the aim where there is one.
func perPoint(r row) string {
	if r.Aim == 0 || !trials.Known(r.IdealRatio) {
		return trials.Fixed(r.IdealRatio, 1)
	}
	return fmt.Sprintf("%.1f of %g", float64(r.IdealRatio), r.Aim)
}

// drawn says which ways of drawing made what share of the points, and at how
// many calls each.
func drawn(r row) string {
	var total int64
	for _, d := range r.Drawing {
		total += d.Points
	}
	var texts []string
	for _, d := range r.Drawing {
		texts = append(texts, fmt.Sprintf("%s %.0f%% %.1f", d.Name, 100*float64(d.Points)/float64(max(total, 1)), float64(d.Calls)/float64(max(d.Points, 1))))
	}
	return strings.Join(texts, ", ")
}

func verdict(r row) string {
	text := "pass"
	if len(r.Faults) > 0 {
		text = "FAIL: " + strings.Join(r.Faults, "; ")
	}
	if r.Aim > 0 && float64(r.IdealRatio) >= r.Aim {
		text += fmt.Sprintf("; calls per point not below %g", r.Aim)
	}
	if r.Remaining > 0 {
		text += fmt.Sprintf("; told to go on to %.1g nat remaining", r.Remaining)
	}
	if r.Doubtful > 0 {
		text += fmt.Sprintf("; doubtful by their own verdict: %d", r.Doubtful)
	}
	return text
}
