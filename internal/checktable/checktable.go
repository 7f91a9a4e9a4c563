// Package checktable compares numbers with published ones in tests, and shows the
// comparison to the reader as a table: quantity, ours, published, source, difference.
//
// It is for _test files alone. A test called TestPhysics<Something> makes one Table
// and adds a row per number; a row beyond its tolerance fails the test. The table is
// printed when the test ends, and only under go test -v, so that
//
//	go test -run Physics -v ./...
//
// reads as one report.
package checktable

import (
	"fmt"
	"io"
	"math"
	"math/cmplx"
	"os"
	"strings"
	"sync"
	"testing"
	"unicode/utf8"
)

// Table collects the comparisons of one test. Its methods may be called from
// parallel subtests; the rows then stand in the order of the calls.
type Table struct {
	t       testing.TB
	title   string
	out     io.Writer
	verbose func() bool

	mu   sync.Mutex
	rows [][columns]string
}

const columns = 6

var header = [columns]string{"quantity", "ours", "published", "source", "difference", "allowed"}

// New returns an empty table of the test t. Under go test -v its rows go to the
// standard output when t and its subtests have ended, in one write, so that another
// test's lines do not fall between them.
func New(t testing.TB, title string) *Table {
	t.Helper()
	return newTable(t, title, os.Stdout, testing.Verbose)
}

func newTable(t testing.TB, title string, out io.Writer, verbose func() bool) *Table {
	t.Helper()
	table := &Table{t: t, title: title, out: out, verbose: verbose}
	t.Cleanup(table.print)
	return table
}

// Relative fails the test unless |ours - published| <= tolerance |published|.
// A published 0 is met by 0 alone; NaN is met by nothing.
func (table *Table) Relative(quantity string, ours, published, tolerance float64, source string) {
	table.t.Helper()
	difference := 0.0
	if ours != published {
		difference = (ours - published) / math.Abs(published)
	}
	table.add(quantity, number(ours), number(published), source, difference, tolerance, " rel.")
}

// Absolute fails the test unless |ours - published| <= tolerance. NaN is met by
// nothing.
func (table *Table) Absolute(quantity string, ours, published, tolerance float64, source string) {
	table.t.Helper()
	difference := 0.0
	if ours != published {
		difference = ours - published
	}
	table.add(quantity, number(ours), number(published), source, difference, tolerance, "")
}

// Complex fails the test unless |ours - published| <= tolerance |published|, the
// modulus of the complex difference. A published 0 is met by 0 alone; NaN is met by
// nothing.
func (table *Table) Complex(quantity string, ours, published complex128, tolerance float64, source string) {
	table.t.Helper()
	difference := 0.0
	if ours != published {
		difference = cmplx.Abs(ours-published) / cmplx.Abs(published)
	}
	table.add(quantity, complexNumber(ours), complexNumber(published), source, difference, tolerance, " rel.")
}

// Worst is the row of many comparisons: it fails the test unless 0 <= worst <=
// tolerance, where worst is the largest difference over all of them. The name says
// what was compared and whether the difference is relative.
func (table *Table) Worst(name string, worst, tolerance float64, source string) {
	table.t.Helper()
	if worst < 0 {
		// No largest modulus is negative: nothing was compared.
		worst = math.NaN()
	}
	table.add(name, "(largest of many)", "", source, worst, tolerance, "")
}

// add appends a row and fails the test if the difference exceeds the tolerance.
func (table *Table) add(quantity, ours, published, source string, difference, tolerance float64, kind string) {
	table.t.Helper()
	row := [columns]string{quantity, ours, published, source, fmt.Sprintf("%.1e%s", difference, kind), fmt.Sprintf("%.1e", tolerance)}
	if !(math.Abs(difference) <= tolerance) {
		row[5] += "  BEYOND"
		if published == "" {
			table.t.Errorf("%s: largest difference %.3e, allowed %.3e (%s)", quantity, difference, tolerance, source)
		} else {
			table.t.Errorf("%s: ours %s, published %s, difference %.3e%s, allowed %.3e (%s)", quantity, ours, published, difference, kind, tolerance, source)
		}
	}
	table.mu.Lock()
	defer table.mu.Unlock()
	table.rows = append(table.rows, row)
}

// print writes the whole table at once.
func (table *Table) print() {
	table.mu.Lock()
	defer table.mu.Unlock()
	if !table.verbose() {
		return
	}
	io.WriteString(table.out, table.text())
}

// text aligns the columns with two spaces between them.
func (table *Table) text() string {
	var width [columns]int
	lines := append([][columns]string{header}, table.rows...)
	for _, line := range lines {
		for i, cell := range line {
			width[i] = max(width[i], utf8.RuneCountInString(cell))
		}
	}
	var b strings.Builder
	fmt.Fprintf(&b, "\n%s: %s\n", table.t.Name(), table.title)
	for _, line := range lines {
		text := ""
		for i, cell := range line {
			text += "  " + cell + strings.Repeat(" ", width[i]-utf8.RuneCountInString(cell))
		}
		b.WriteString(strings.TrimRight(text, " ") + "\n")
	}
	b.WriteString("\n")
	return b.String()
}

// number shows a real number with digits enough for any published one here.
func number(x float64) string { return fmt.Sprintf("%.12g", x) }

func complexNumber(z complex128) string {
	return fmt.Sprintf("%.12g%+.12gi", real(z), imag(z))
}
