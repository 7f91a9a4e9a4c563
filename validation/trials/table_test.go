package trials

import (
	"bytes"
	"errors"
	"testing"

	"knell/internal/report"
)

func TestTableLinesStandUnderOneAnother(t *testing.T) {
	var out bytes.Buffer
	table := NewTable(&out, []Column{{Head: "name", Width: 6, Left: true}, {Head: "x", Width: 4}, {Head: "words", Left: true}})
	table.Line("µ", "1", "")
	table.Line("longname", "-0.25", "end")
	want := "name       x  words\nµ          1\nlongname  -0.25  end\n"
	if out.String() != want {
		t.Errorf("got\n%swant\n%s", out.String(), want)
	}
}

type full struct{}

func (full) Write([]byte) (int, error) { return 0, errors.New("no space") }

func TestTableKeepsAnErrorOfItsOutput(t *testing.T) {
	table := NewTable(full{}, []Column{{Head: "a"}})
	table.Line("1")
	if err := table.Err(); err == nil || err.Error() != "no space" {
		t.Errorf("error %v, want that of the output", err)
	}
}

func TestNumberHasNoMinusZero(t *testing.T) {
	for x, want := range map[float64]string{-1e-9: "0.00", -0.006: "-0.01", 10: "10.00"} {
		if got := Fixed(report.Number(x), 2); got != want {
			t.Errorf("Fixed(%g) = %q, want %q", x, got, want)
		}
	}
}
