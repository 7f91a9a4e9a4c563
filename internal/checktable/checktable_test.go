package checktable

import (
	"bytes"
	"fmt"
	"math"
	"strings"
	"testing"
)

// recorder is a test that fails nothing and keeps what it was told.
type recorder struct {
	testing.TB
	failures []string
	cleanups []func()
}

func (r *recorder) Helper()          {}
func (r *recorder) Name() string     { return "TestRecorded" }
func (r *recorder) Cleanup(f func()) { r.cleanups = append(r.cleanups, f) }
func (r *recorder) Errorf(format string, args ...any) {
	r.failures = append(r.failures, fmt.Sprintf(format, args...))
}

func (r *recorder) end() {
	for _, f := range r.cleanups {
		f()
	}
}

func always() bool { return true }
func never() bool  { return false }

func TestRowsFailBeyondTheirTolerance(t *testing.T) {
	nan, inf := math.NaN(), math.Inf(1)
	for _, tc := range []struct {
		why  string
		row  func(*Table)
		fail bool
	}{
		{"relative, within", func(b *Table) { b.Relative("x", 1000.9, 1000, 1e-3, "s") }, false},
		{"relative, above", func(b *Table) { b.Relative("x", 1001.1, 1000, 1e-3, "s") }, true},
		{"relative, below", func(b *Table) { b.Relative("x", 998.9, 1000, 1e-3, "s") }, true},
		{"relative, of a negative number", func(b *Table) { b.Relative("x", -1000.9, -1000, 1e-3, "s") }, false},
		{"relative, wrong sign", func(b *Table) { b.Relative("x", 1, -1, 0.5, "s") }, true},
		{"relative to 0, met", func(b *Table) { b.Relative("x", 0, 0, 0, "s") }, false},
		{"relative to 0, not met", func(b *Table) { b.Relative("x", 1e-300, 0, 1, "s") }, true},
		{"relative, ours NaN", func(b *Table) { b.Relative("x", nan, 1, 1, "s") }, true},
		{"relative, published NaN", func(b *Table) { b.Relative("x", 1, nan, 1, "s") }, true},
		{"relative, both NaN", func(b *Table) { b.Relative("x", nan, nan, 1, "s") }, true},
		{"relative, ours infinite", func(b *Table) { b.Relative("x", inf, 1, 1, "s") }, true},
		{"relative, tolerance NaN", func(b *Table) { b.Relative("x", 1, 1, nan, "s") }, true},
		{"absolute, within", func(b *Table) { b.Absolute("x", 5.0009, 5, 1e-3, "s") }, false},
		{"absolute, above", func(b *Table) { b.Absolute("x", 5.0011, 5, 1e-3, "s") }, true},
		{"absolute, below", func(b *Table) { b.Absolute("x", 4.9989, 5, 1e-3, "s") }, true},
		{"absolute, NaN", func(b *Table) { b.Absolute("x", nan, 5, 1e9, "s") }, true},
		{"absolute, both infinite", func(b *Table) { b.Absolute("x", inf, inf, 0, "s") }, false},
		{"absolute, one infinite", func(b *Table) { b.Absolute("x", -inf, inf, 1e9, "s") }, true},
		{"complex, within", func(b *Table) { b.Complex("x", 3+4.004i, 3+4i, 1e-3, "s") }, false},
		{"complex, imaginary part off", func(b *Table) { b.Complex("x", 3+4.006i, 3+4i, 1e-3, "s") }, true},
		{"complex, conjugate", func(b *Table) { b.Complex("x", 3-4i, 3+4i, 1, "s") }, true},
		{"complex, NaN", func(b *Table) { b.Complex("x", complex(3, nan), 3+4i, 1, "s") }, true},
		{"worst, within", func(b *Table) { b.Worst("x", 9e-11, 1e-10, "s") }, false},
		{"worst, beyond", func(b *Table) { b.Worst("x", 1.1e-10, 1e-10, "s") }, true},
		{"worst, NaN", func(b *Table) { b.Worst("x", nan, 1, "s") }, true},
		{"worst, nothing compared", func(b *Table) { b.Worst("x", -inf, 1, "s") }, true},
	} {
		t.Run(tc.why, func(t *testing.T) {
			r := &recorder{}
			tc.row(newTable(r, "title", &bytes.Buffer{}, always))
			if got := len(r.failures) > 0; got != tc.fail {
				t.Errorf("failures %q, want any: %t", r.failures, tc.fail)
			}
		})
	}
}

// The message names all that a reader needs to judge it.
func TestFailureSaysEverything(t *testing.T) {
	r := &recorder{}
	newTable(r, "title", &bytes.Buffer{}, never).Relative("Re ω (2,2,0)", 0.3738, 0.3737, 1e-4, "arXiv:0000.00000")
	if len(r.failures) != 1 {
		t.Fatalf("%d failures, want 1", len(r.failures))
	}
	for _, part := range []string{"Re ω (2,2,0)", "0.3738", "0.3737", "2.676e-04 rel.", "1.000e-04", "arXiv:0000.00000"} {
		if !strings.Contains(r.failures[0], part) {
			t.Errorf("%q lacks %q", r.failures[0], part)
		}
	}
}

func TestTableIsAlignedAndPrintedOnce(t *testing.T) {
	r, out := &recorder{}, &writes{}
	table := newTable(r, "modes", out, always)
	table.Relative("Re ω (2,2,0)", 0.5, 0.5, 1e-10, "one.csv")
	table.Complex("R", 1-2i, 1-2i, 1e-9, "two.csv")
	table.Worst("largest of all", 2e-9, 1e-10, "three.csv")
	if out.count != 0 {
		t.Errorf("printed before the end:\n%s", out.String())
	}
	r.end()
	want := `
TestRecorded: modes
  quantity        ours               published  source     difference    allowed
  Re ω (2,2,0)    0.5                0.5        one.csv    0.0e+00 rel.  1.0e-10
  R               1-2i               1-2i       two.csv    0.0e+00 rel.  1.0e-09
  largest of all  (largest of many)             three.csv  2.0e-09       1.0e-10  BEYOND

`
	if out.String() != want {
		t.Errorf("got\n%s\nwant\n%s", out.String(), want)
	}
	if out.count != 1 {
		t.Errorf("printed in %d writes, want 1", out.count)
	}
}

func TestQuietWithoutVerbose(t *testing.T) {
	r, out := &recorder{}, &writes{}
	newTable(r, "modes", out, never).Absolute("x", 1, 1, 0, "s")
	r.end()
	if out.count != 0 {
		t.Errorf("printed %q", out.String())
	}
}

// writes is a buffer that counts how often it is written to.
type writes struct {
	bytes.Buffer
	count int
}

func (w *writes) WriteString(s string) (int, error) {
	w.count++
	return w.Buffer.WriteString(s)
}

func (w *writes) Write(p []byte) (int, error) {
	w.count++
	return w.Buffer.Write(p)
}
