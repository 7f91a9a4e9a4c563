package report

import (
	"bytes"
	"fmt"
	"io"
	"math"
	"slices"
	"strings"
	"unicode/utf8"
)

// Table writes a weighing for a reader: the evidences, the ratios with their odds in
// words, the parameters, and what to keep in mind.
func Table(out io.Writer, w *Weighing) error {
	var text bytes.Buffer
	fmt.Fprintf(&text, "%s   (seed %d, knell %s)\n", w.Event, w.Seed, w.Version)
	if w.Partial {
		fmt.Fprint(&text, "PARTIAL: a run ended before it converged; no number below is final\n")
	}
	for _, part := range []func(io.Writer, *Weighing) error{
		writeEvidences, writeRatios, writeParameters, writeModes, writeCautions,
	} {
		if err := part(&text, w); err != nil {
			return err
		}
	}
	_, err := out.Write(text.Bytes())
	return err
}

func writeEvidences(out io.Writer, w *Weighing) error {
	g := grid{
		head: []string{"hypothesis", "model", "free", "ln evidence over noise", "information", "calls", "seconds", "verdict"},
		left: 2, last: true, pad: "  ",
	}
	for _, h := range w.Hypotheses {
		// What a verdict gives as its reason stands among the doubts.
		verdict, _, _ := strings.Cut(h.Verdict, ":")
		g.rows = append(g.rows, []string{
			h.Name, h.Model, fmt.Sprint(h.Dimensions), withError(h.LogEvidenceOver, h.LogEvidenceError),
			decimals(h.Information, 1), thousands(float64(h.Calls)), decimals(h.Seconds, 1), verdict,
		})
	}
	fmt.Fprint(out, "\nEvidence (natural logarithms)\n")
	if err := g.write(out); err != nil {
		return err
	}
	return writeRoutes(out, w)
}

// writeRoutes shows the evidences over noise that were found another way.
func writeRoutes(out io.Writer, w *Weighing) error {
	g := grid{head: []string{"by another route", "ln evidence over noise", "effective samples", "calls"}, left: 1, pad: "  "}
	for _, h := range w.Hypotheses {
		for _, r := range h.Routes {
			g.rows = append(g.rows, []string{h.Name + ", " + r.Name + " sampling", withError(r.LogEvidenceOver, r.Error), decimals(r.EffectiveSamples, 0), thousands(float64(r.Calls))})
		}
	}
	if len(g.rows) == 0 {
		return nil
	}
	fmt.Fprintln(out)
	return g.write(out)
}

func writeRatios(out io.Writer, w *Weighing) error {
	if len(w.Ratios) == 0 {
		return nil
	}
	unfinished := map[string]bool{}
	for _, h := range w.Hypotheses {
		unfinished[h.Name] = h.Partial
	}
	fmt.Fprint(out, "\nRatios\n")
	ratios, _ := w.ratios()
	for _, r := range ratios {
		words := odds(r)
		if unfinished[r.For] || unfinished[r.Against] {
			words = "not final: a run did not finish"
		}
		fmt.Fprintf(out, "  %s over %s: ln B = %s (%s)\n", r.For, r.Against, withError(r.LogBayesFactor, r.Error), words)
		switch {
		case r.SavageDickey != nil:
			fmt.Fprintf(out, "    by the Savage-Dickey ratio at %s: ln B = %s\n", r.SavageDickeyAt, withError(*r.SavageDickey, *r.SavageDickeyError))
		case r.SavageDickeyAt != "":
			fmt.Fprintf(out, "    by the Savage-Dickey ratio at %s: not known\n", r.SavageDickeyAt)
		}
	}
	return nil
}

// odds says a ratio in words. Below two errors or odds of two to one, words stronger
// than "undecided" would claim more than the number does.
func odds(r Ratio) string {
	b, e := float64(r.LogBayesFactor), float64(r.Error)
	switch {
	case !r.LogBayesFactor.finite():
		return "not known"
	case math.Abs(b) < math.Ln2 || math.Abs(b) < 2*e:
		return "undecided"
	case b > 0:
		return "about " + large(b) + " to 1"
	}
	return "about " + large(-b) + " to 1 for " + r.Against
}

// large shows exp(x), x > 0, with two digits.
func large(x float64) string {
	if x < math.Log(9.5e5) {
		value := math.Exp(x)
		scale := math.Pow(10, math.Floor(math.Log10(value))-1)
		if value = math.Round(value/scale) * scale; value < 10 {
			return fmt.Sprintf("%.1f", value)
		}
		return thousands(value)
	}
	exponent := math.Floor(x / math.Ln10)
	factor := math.Exp(x - exponent*math.Ln10)
	if factor >= 9.95 {
		factor, exponent = 1, exponent+1
	}
	return fmt.Sprintf("%.1f x 10^%.0f", factor, exponent)
}

// tableHypotheses is how many hypotheses' parameters fit side by side.
const tableHypotheses = 3

func writeParameters(out io.Writer, w *Weighing) error {
	for group := range slices.Chunk(w.Hypotheses, tableHypotheses) {
		g := grid{head: []string{"parameter", "unit"}, left: 2, pad: "  "}
		place := map[string]int{}
		for k, h := range group {
			g.head = append(g.head, h.Name)
			for _, s := range h.Summary {
				row, ok := place[s.Parameter]
				if !ok {
					row = len(g.rows)
					place[s.Parameter] = row
					cells := make([]string, 2+len(group))
					cells[0], cells[1] = s.Parameter, s.Unit
					g.rows = append(g.rows, cells)
				}
				g.rows[row][2+k] = interval(s)
			}
		}
		if len(g.rows) == 0 {
			continue
		}
		fmt.Fprint(out, "\nParameters: median [central 90 % interval]\n")
		if err := g.write(out); err != nil {
			return err
		}
	}
	return nil
}

// writeModes shows the parts of the posteriors that came apart.
func writeModes(out io.Writer, w *Weighing) error {
	for _, h := range w.Hypotheses {
		if len(h.Modes) < 2 {
			continue
		}
		g := grid{head: []string{"share of posterior", "ln evidence over noise"}, pad: "  "}
		for _, p := range h.Modes[0].Parameters {
			g.head = append(g.head, p.Parameter)
		}
		for _, m := range h.Modes {
			row := []string{withError(m.Share, m.ShareError), withError(m.LogEvidenceOver, m.Error)}
			for _, p := range m.Parameters {
				row = append(row, median(p))
			}
			g.rows = append(g.rows, row)
		}
		fmt.Fprintf(out, "\nModes of %s: medians within each\n", h.Name)
		if err := g.write(out); err != nil {
			return err
		}
	}
	return nil
}

// median shows a median to a hundredth of the interval's width.
func median(s ParameterSummary) string {
	text, _, _ := strings.Cut(interval(s), " ")
	return text
}

// interval shows a median and its interval to a hundredth of the interval's width.
func interval(s ParameterSummary) string {
	if math.IsInf(float64(s.High90), 1) {
		return fmt.Sprintf("%s [%s, %s]", orNever(s.Median), orNever(s.Low90), orNever(s.High90))
	}
	width := float64(s.High90 - s.Low90)
	largest := max(math.Abs(float64(s.Low90)), math.Abs(float64(s.High90)))
	places := 2 - int(math.Floor(math.Log10(width)))
	if !(width > 0) || math.IsInf(width, 0) {
		places = 3
	}
	if largest >= 1e6 || places > 6 || largest < 1e-3 {
		return fmt.Sprintf("%.3g [%.3g, %.3g]", float64(s.Median), float64(s.Low90), float64(s.High90))
	}
	places = max(places, 0)
	return fmt.Sprintf("%.*f [%.*f, %.*f]", places, float64(s.Median), places, float64(s.Low90), places, float64(s.High90))
}

// orNever shows a time that may be infinite: that of something that never happens.
func orNever(x Number) string {
	if math.IsInf(float64(x), 1) {
		return "never"
	}
	return fmt.Sprintf("%.3g", float64(x))
}

func writeCautions(out io.Writer, w *Weighing) error {
	var run []string
	for _, h := range w.Hypotheses {
		if _, reason, found := strings.Cut(h.Verdict, ": "); found {
			run = append(run, h.Name+": "+reason)
		}
		for _, warning := range h.Warnings {
			run = append(run, h.Name+": "+warning)
		}
	}
	ratios, cautions := w.ratios()
	for _, r := range ratios {
		// Where there is no number, its absence is in the table and no doubt.
		if r.SavageDickey != nil && r.SavageDickeyNote != "" {
			run = append(run, fmt.Sprintf("Savage-Dickey ratio of %s over %s at %s: %s", r.For, r.Against, r.SavageDickeyAt, r.SavageDickeyNote))
		}
	}
	run = append(run, cautions...)
	if len(run) > 0 {
		fmt.Fprint(out, "\nDoubts about this run\n")
		for _, line := range run {
			writeItem(out, line)
		}
	}
	fmt.Fprint(out, "\nKeep in mind\n")
	for _, line := range reading {
		writeItem(out, line)
	}
	return nil
}

// itemWidth is the width at which the lines of a list break.
const itemWidth = 96

// writeItem writes one entry of a list, broken between words.
func writeItem(out io.Writer, text string) {
	line, width := "  -", 3
	for word := range strings.FieldsSeq(text) {
		n := utf8.RuneCountInString(word)
		if width+1+n > itemWidth && width > 3 {
			fmt.Fprintln(out, line)
			line, width = "   ", 3
		}
		line += " " + word
		width += 1 + n
	}
	fmt.Fprintln(out, line)
}

// withError shows a value and its error to two digits of the error, at most four
// decimals.
func withError(value, e Number) string {
	if !value.finite() {
		return "not known"
	}
	if !e.finite() || e <= 0 {
		return decimals(value, 2)
	}
	places := min(max(1-int(math.Floor(math.Log10(float64(e)))), 1), 4)
	return fmt.Sprintf("%.*f ± %.*f", places, float64(value), places, float64(e))
}

// decimals shows a number with so many decimals, or a dash where it is not finite.
func decimals(x Number, places int) string {
	if !x.finite() {
		return "-"
	}
	return fmt.Sprintf("%.*f", places, float64(x))
}

// thousands shows a whole number in groups of three digits.
func thousands(x float64) string {
	digits := fmt.Sprintf("%.0f", x)
	for i := len(digits) - 3; i > 0 && digits[i-1] != '-'; i -= 3 {
		digits = digits[:i] + "," + digits[i:]
	}
	return digits
}
