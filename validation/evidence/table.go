package main

import (
	"fmt"
	"io"
	"math"
	"strings"
	"unicode/utf8"

	"knell/internal/report"
)

// writeTable prints the rows for a reader, with a few words on what they hold.
func writeTable(out io.Writer, o options, rows []row, interrupted bool) error {
	var b strings.Builder
	fmt.Fprintf(&b, "evidence against truth: %d runs per problem, %d live points, seed %d\n", o.seeds, o.live, o.seed)
	if interrupted {
		fmt.Fprintln(&b, "INTERRUPTED: only the finished runs are counted")
	}
	lines := [][]string{{
		"problem", "dim", "runs", "truth", "mean z", "sd of z", "error", "calls", "per point", "rank p", "shrinkage", "p", "s/run", "drawn by (points, calls each)", "verdict",
	}}
	for _, r := range rows {
		lines = append(lines, []string{
			r.Name, fmt.Sprint(r.Dim), fmt.Sprint(r.Seeds), number(r.Truth, 4),
			plusMinus(r.MeanZ, r.MeanZError, "%+.2f ± %.2f"), plusMinus(r.StdZ, r.StdZError, "%.2f ± %.2f"),
			number(r.Error, 3), number(r.Calls, 0), perPoint(r), number(r.RankP, 3),
			plusMinus(r.Shrinkage, r.ShrinkageError, "%.4f ± %.4f"), number(r.ShrinkageP, 3),
			number(r.Seconds, 2), drawn(r), verdict(r),
		})
	}
	columns(&b, lines, map[int]bool{0: true, 13: true, 14: true})
	fmt.Fprint(&b, `
z         (ln Z - truth) / quoted error; its mean must be within 3/√runs of 0, its deviation in
          0.85 to 1.15, wider by the sampling error for fewer than 100 runs
per point likelihood calls over the points of a run, dead and live; an ideal sampler has 1
rank p    uniformity of the runs' insertion-rank p-values, at least 0.001
shrinkage where volumes are known: mean of n ln(V before / V), 1 for fair draws, and the p-value
          of its distribution, at least 0.001
`)
	_, err := io.WriteString(out, b.String())
	return err
}

// columns aligns the lines, the columns of left to the left and the others to
// the right.
func columns(b *strings.Builder, lines [][]string, left map[int]bool) {
	width := make([]int, len(lines[0]))
	for _, l := range lines {
		for i, cell := range l {
			width[i] = max(width[i], utf8.RuneCountInString(cell))
		}
	}
	for _, l := range lines {
		text := ""
		for i, cell := range l {
			space := strings.Repeat(" ", width[i]-utf8.RuneCountInString(cell))
			if left[i] {
				text += cell + space + "  "
			} else {
				text += space + cell + "  "
			}
		}
		b.WriteString(strings.TrimRight(text, " ") + "\n")
	}
}

func known(x report.Number) bool { return !math.IsNaN(float64(x)) }

func number(x report.Number, places int) string {
	if !known(x) {
		return "-"
	}
	text := fmt.Sprintf("%.*f", places, float64(x))
	if strings.Trim(text, "-0.") == "" { // no "-0.0000"
		text = strings.TrimPrefix(text, "-")
	}
	return text
}

func plusMinus(x, e report.Number, format string) string {
	if !known(x) {
		return "-"
	}
	return fmt.Sprintf(format, float64(x), float64(e))
}

// perPoint is the ratio to the ideal, with the aim where there is one.
func perPoint(r row) string {
	if r.Aim == 0 || !known(r.IdealRatio) {
		return number(r.IdealRatio, 1)
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
