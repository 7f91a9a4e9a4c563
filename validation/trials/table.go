package trials

import (
	"fmt"
	"io"
	"math"
	"strings"
	"unicode/utf8"

	"knell/internal/report"
)

// Column is a column of a Table.
type Column struct {
	Head  string
	Width int  // least; a wider cell pushes the rest of its line
	Left  bool // aligned to the left
}

// Table prints lines one by one, so the widths of its columns are given beforehand.
type Table struct {
	out     io.Writer
	columns []Column
	err     error
}

// NewTable prints the heads of the columns.
func NewTable(out io.Writer, columns []Column) *Table {
	t := &Table{out: out, columns: columns}
	heads := make([]string, len(columns))
	for i, c := range columns {
		heads[i] = c.Head
	}
	t.Line(heads...)
	return t
}

// Line prints one cell per column.
func (t *Table) Line(cells ...string) {
	if len(cells) != len(t.columns) {
		panic(fmt.Sprintf("trials: %d cells, want %d", len(cells), len(t.columns)))
	}
	var b strings.Builder
	for i, cell := range cells {
		c := t.columns[i]
		space := strings.Repeat(" ", max(0, max(c.Width, utf8.RuneCountInString(c.Head))-utf8.RuneCountInString(cell)))
		if c.Left {
			b.WriteString(cell + space + "  ")
		} else {
			b.WriteString(space + cell + "  ")
		}
	}
	t.Text(strings.TrimRight(b.String(), " ") + "\n")
}

// Text prints text as it is.
func (t *Table) Text(text string) {
	if _, err := io.WriteString(t.out, text); err != nil {
		t.Fail(err)
	}
}

// Fail notes an error of the output, if it is the first.
func (t *Table) Fail(err error) {
	if t.err == nil {
		t.err = err
	}
}

// Err is the first error of the output.
func (t *Table) Err() error { return t.err }

// NameWidth is the width of the longest name.
func NameWidth(cases []Case) int {
	w := 0
	for _, c := range cases {
		w = max(w, len(c.Name))
	}
	return w
}

// Known says whether x is a number.
func Known(x report.Number) bool { return !math.IsNaN(float64(x)) }

// Fixed shows x with so many decimal places, "-" if it is not known.
func Fixed(x report.Number, places int) string {
	if !Known(x) {
		return "-"
	}
	text := fmt.Sprintf("%.*f", places, float64(x))
	if strings.Trim(text, "-0.") == "" { // no "-0.0000"
		text = strings.TrimPrefix(text, "-")
	}
	return text
}

// PlusMinus shows x and its error by a format for both, "-" if x is not known.
func PlusMinus(x, e report.Number, format string) string {
	if !Known(x) {
		return "-"
	}
	return fmt.Sprintf(format, float64(x), float64(e))
}
