package report

import (
	"bytes"
	"errors"
	"math"
	"strings"
	"testing"
)

func TestTableGolden(t *testing.T) {
	var out bytes.Buffer
	if err := Table(&out, someWeighing()); err != nil {
		t.Fatal(err)
	}
	golden(t, "table.txt", out.Bytes())
	for _, line := range strings.Split(out.String(), "\n") {
		if strings.TrimRight(line, " ") != line {
			t.Errorf("trailing blanks: %q", line)
		}
	}
}

func TestTableOfAPartialRun(t *testing.T) {
	w := &Weighing{Event: "x", Partial: true, Hypotheses: []Hypothesis{
		{Name: "horizon", LogEvidenceOver: Number(math.NaN())}, {Name: "b"}, {Name: "c"},
		{Name: "d", Summary: []ParameterSummary{{Parameter: "mass"}}},
	}}
	var out bytes.Buffer
	if err := Table(&out, w); err != nil {
		t.Fatal(err)
	}
	for _, want := range []string{"PARTIAL", "not known", "mass"} {
		if !strings.Contains(out.String(), want) {
			t.Errorf("no %q in\n%s", want, out.String())
		}
	}
}

func TestTableReportsTheWriter(t *testing.T) {
	if err := Table(failing{}, someWeighing()); !errors.Is(err, errFull) {
		t.Errorf("got %v, want %v", err, errFull)
	}
	if err := someWeighing().WriteJSON(failing{}); !errors.Is(err, errFull) {
		t.Errorf("got %v, want %v", err, errFull)
	}
}

var errFull = errors.New("the disk is full")

type failing struct{}

func (failing) Write([]byte) (int, error) { return 0, errFull }

func TestOdds(t *testing.T) {
	for _, tc := range []struct {
		b, e Number
		want string
	}{
		{9.8, 0.15, "about 18,000 to 1"}, // e^9.8 = 18033.7
		{-2.3, 0.1, "about 10 to 1 for horizon"},
		{1.5, 0.1, "about 4.5 to 1"}, // e^1.5 = 4.48
		{4.6049, 0.1, "about 100 to 1"},
		{0.5, 0.01, "undecided"},
		{3, 1.6, "undecided"},
		{Number(math.Log(999999)), 0.1, "about 1.0 x 10^6 to 1"},
		{500, 0.1, "about 1.4 x 10^217 to 1"}, // 500/ln 10 = 217.147
		{5000, 0.1, "about 3.0 x 10^2171 to 1"},
		{Number(math.NaN()), 0.1, "not known"},
		{Number(math.Inf(1)), 0.1, "not known"},
	} {
		if got := odds(Ratio{For: "surface", Against: "horizon", LogBayesFactor: tc.b, Error: tc.e}); got != tc.want {
			t.Errorf("odds(%g ± %g) = %q, want %q", tc.b, tc.e, got, tc.want)
		}
	}
}

func TestNumbersInWords(t *testing.T) {
	for _, tc := range []struct{ got, want string }{
		{withError(9.8, 0.151), "9.80 ± 0.15"},
		{withError(99.2, 0.0123), "99.200 ± 0.012"},
		{withError(-3, 12), "-3.0 ± 12.0"},
		{withError(1, 0), "1.00"},
		{withError(1, Number(math.NaN())), "1.00"},
		{thousands(0), "0"}, {thousands(999), "999"}, {thousands(1000), "1,000"},
		{thousands(-123456), "-123,456"}, {thousands(1234567), "1,234,567"},
		{interval(ParameterSummary{"", "", 68.234, 64.111, 72.919}), "68.23 [64.11, 72.92]"},
		{interval(ParameterSummary{"", "", 250, 100, 1000}), "250 [100, 1000]"},
		{interval(ParameterSummary{"", "", 1.2e-21, 1.1e-21, 1.3e-21}), "1.2e-21 [1.1e-21, 1.3e-21]"},
		{interval(ParameterSummary{"", "", 3, 3, 3}), "3.000 [3.000, 3.000]"},
		{interval(ParameterSummary{"", "", Number(math.NaN()), Number(math.NaN()), Number(math.NaN())}), "NaN [NaN, NaN]"},
	} {
		if tc.got != tc.want {
			t.Errorf("got %q, want %q", tc.got, tc.want)
		}
	}
}

func TestModes(t *testing.T) {
	f, tau := Number(251.3), Number(0.00405)
	d := &ModesDocument{Modes: []Mode{
		{L: 2, M: 2, Spin: 0, Omega: [2]Number{0.3736716844, -0.0889623157}, Separation: [2]Number{4, 0}},
		{L: 2, M: -2, N: 1, Spin: 0.69, Omega: [2]Number{0.5, -0.25}, Separation: [2]Number{2, 0.5}, Frequency: &f, DampingTime: &tau},
	}}
	var out bytes.Buffer
	if err := d.WriteJSON(&out); err != nil {
		t.Fatal(err)
	}
	golden(t, "modes.json", out.Bytes())
	out.Reset()
	if err := ModesTable(&out, d); err != nil {
		t.Fatal(err)
	}
	golden(t, "modes.txt", out.Bytes())
}

// A growth time that is infinite is that of a cavity that is stable.
func TestIntervalOfATimeThatNeverComes(t *testing.T) {
	inf := Number(math.Inf(1))
	for _, tc := range []struct {
		s    ParameterSummary
		want string
	}{
		{ParameterSummary{Low90: inf, Median: inf, High90: inf}, "never [never, never]"},
		{ParameterSummary{Low90: 0.25, Median: 2, High90: inf}, "2 [0.25, never]"},
	} {
		if got := interval(tc.s); got != tc.want {
			t.Errorf("%v: %q, want %q", tc.s, got, tc.want)
		}
	}
}

// A verdict's reason would make the table too wide: it stands among the doubts.
func TestVerdictInTheTable(t *testing.T) {
	w := &Weighing{Event: "x", Hypotheses: []Hypothesis{{Name: "horizon", Verdict: "doubtful: few live points: use more"}}}
	var out bytes.Buffer
	if err := Table(&out, w); err != nil {
		t.Fatal(err)
	}
	evidence, doubts, found := strings.Cut(out.String(), "Doubts about this run")
	if !found || !strings.Contains(evidence, " doubtful\n") || !strings.Contains(doubts, "horizon: few live points: use more") {
		t.Errorf("got\n%s", out.String())
	}
}
