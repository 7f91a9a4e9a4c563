package report

import (
	"bytes"
	"encoding/csv"
	"encoding/json"
	"errors"
	"math"
	"os"
	"path/filepath"
	"runtime"
	"slices"
	"strconv"
	"strings"
	"testing"

	"github.com/parquet-go/parquet-go"
)

// names returns the sorted names of a directory's files.
func names(t *testing.T, dir string) []string {
	t.Helper()
	entries, err := os.ReadDir(dir)
	if err != nil {
		t.Fatal(err)
	}
	var list []string
	for _, e := range entries {
		list = append(list, e.Name())
	}
	return list
}

// sameBits reports whether two columns are equal bit by bit, any NaN equal to any.
func sameBits(a, b []float64) bool {
	return slices.EqualFunc(a, b, func(x, y float64) bool {
		return math.Float64bits(x) == math.Float64bits(y) || (math.IsNaN(x) && math.IsNaN(y))
	})
}

func TestWriteDirectory(t *testing.T) {
	dir := filepath.Join(t.TempDir(), "deeper", "marram")
	w, surface := someWeighing(), somePosterior()
	horizon := Posterior{Name: "horizon", Columns: []string{"mass"}, Values: [][]float64{{1, 2}}}
	config := []byte("title = \"as run\"\n")
	for range 2 { // the second time over the first
		if err := WriteDirectory(dir, w, []Posterior{horizon, surface}, config); err != nil {
			t.Fatal(err)
		}
	}
	want := []string{"event.toml", "evidence.json", "posterior-horizon.csv", "posterior-horizon.parquet",
		"posterior-surface.csv", "posterior-surface.parquet"}
	if got := names(t, dir); !slices.Equal(got, want) {
		t.Errorf("files %v, want %v", got, want)
	}
	if got, err := os.ReadFile(filepath.Join(dir, "event.toml")); err != nil || !bytes.Equal(got, config) {
		t.Errorf("event.toml = %q, %v", got, err)
	}
	text, err := os.ReadFile(filepath.Join(dir, "evidence.json"))
	if err != nil {
		t.Fatal(err)
	}
	var document Weighing
	if err := json.Unmarshal(text, &document); err != nil {
		t.Fatal(err)
	}
	if got := document.Hypotheses[0].Posterior; got != "posterior-horizon.csv" {
		t.Errorf("horizon's posterior is %q", got)
	}
	if w.Hypotheses[0].Posterior != "" {
		t.Error("WriteDirectory changed its argument")
	}
	if runtime.GOOS != "windows" {
		if info, err := os.Stat(filepath.Join(dir, "evidence.json")); err != nil || info.Mode().Perm() != 0o644 {
			t.Errorf("mode %v, %v; want 0644", info.Mode(), err)
		}
	}
	readCSV(t, filepath.Join(dir, "posterior-surface.csv"), surface)
	readParquet(t, filepath.Join(dir, "posterior-surface.parquet"), surface)
}

func readCSV(t *testing.T, path string, p Posterior) {
	t.Helper()
	text, err := os.ReadFile(path)
	if err != nil {
		t.Fatal(err)
	}
	rows, err := csv.NewReader(bytes.NewReader(text)).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	if !slices.Equal(rows[0], p.Columns) {
		t.Errorf("header %q, want %q", rows[0], p.Columns)
	}
	for c := range p.Columns {
		var column []float64
		for _, row := range rows[1:] {
			x, err := strconv.ParseFloat(row[c], 64)
			if err != nil {
				t.Fatal(err)
			}
			column = append(column, x)
		}
		if !sameBits(column, p.Values[c]) {
			t.Errorf("column %s = %v, want %v", p.Columns[c], column, p.Values[c])
		}
	}
}

func readParquet(t *testing.T, path string, p Posterior) {
	t.Helper()
	text, err := os.ReadFile(path)
	if err != nil {
		t.Fatal(err)
	}
	f, err := parquet.OpenFile(bytes.NewReader(text), int64(len(text)))
	if err != nil {
		t.Fatal(err)
	}
	var columns []string
	for _, path := range f.Schema().Columns() {
		columns = append(columns, strings.Join(path, "/"))
	}
	if !slices.Equal(columns, p.Columns) {
		t.Errorf("columns %q, want %q", columns, p.Columns)
	}
	for i, unit := range p.Units {
		if got, ok := f.Lookup("unit." + p.Columns[i]); !ok || got != unit {
			t.Errorf("unit of %s = %q, %t, want %q", p.Columns[i], got, ok, unit)
		}
	}
	values := make([][]float64, len(columns))
	rows := make([]parquet.Row, len(p.Values[0])+1)
	reader := parquet.NewReader(bytes.NewReader(text))
	defer reader.Close()
	n, err := reader.ReadRows(rows)
	if n != len(p.Values[0]) {
		t.Fatalf("%d rows (%v), want %d", n, err, len(p.Values[0]))
	}
	for _, row := range rows[:n] {
		for c, v := range row {
			if v.Kind() != parquet.Double {
				t.Fatalf("column %s is %v, want doubles", columns[c], v.Kind())
			}
			values[c] = append(values[c], v.Double())
		}
	}
	for c := range columns {
		if !sameBits(values[c], p.Values[c]) {
			t.Errorf("column %s = %v, want %v", columns[c], values[c], p.Values[c])
		}
	}
}

func TestWriteDirectoryLeavesOldFilesOnFailure(t *testing.T) {
	dir := t.TempDir()
	w, good := someWeighing(), somePosterior()
	if err := WriteDirectory(dir, w, []Posterior{good}, []byte("old")); err != nil {
		t.Fatal(err)
	}
	before := names(t, dir)
	ragged := somePosterior()
	ragged.Values[2] = ragged.Values[2][:1]
	repeated := somePosterior()
	repeated.Columns = []string{"a", "b", "a", "c"}
	for why, posteriors := range map[string][]Posterior{
		"ragged columns":  {good, ragged},
		"repeated column": {good, repeated},
		"no columns":      {{Name: "x"}},
		"one file for two": {{Name: "a b", Columns: []string{"x"}, Values: [][]float64{{1}}},
			{Name: "A/b", Columns: []string{"x"}, Values: [][]float64{{1}}}},
	} {
		if err := WriteDirectory(dir, w, posteriors, []byte("new")); err == nil {
			t.Errorf("%s: no error", why)
		}
		if got, _ := os.ReadFile(filepath.Join(dir, "event.toml")); string(got) != "old" {
			t.Errorf("%s: event.toml = %q", why, got)
		}
		if got := names(t, dir); !slices.Equal(got, before) {
			t.Errorf("%s: files %v, want %v", why, got, before)
		}
	}
}

func TestWriteStagedCleansUp(t *testing.T) {
	dir := t.TempDir()
	if err := os.WriteFile(filepath.Join(dir, "a"), []byte("old"), 0o644); err != nil {
		t.Fatal(err)
	}
	// The second file's folder does not exist: the first must not take its name.
	err := writeStaged(dir, []file{{"a", []byte("new")}, {"no/b", []byte("new")}})
	if err == nil {
		t.Error("no error")
	}
	if got, _ := os.ReadFile(filepath.Join(dir, "a")); string(got) != "old" {
		t.Errorf("a = %q, want old", got)
	}
	// A folder stands where the second file should go: the rename itself fails, and the
	// files not yet renamed go away.
	if err := os.MkdirAll(filepath.Join(dir, "b", "full"), 0o755); err != nil {
		t.Fatal(err)
	}
	err = writeStaged(dir, []file{{"a", []byte("new")}, {"b", []byte("new")}, {"c", []byte("new")}})
	if err == nil {
		t.Error("no error")
	}
	if got := names(t, dir); !slices.Equal(got, []string{"a", "b"}) {
		t.Errorf("left behind: %v", got)
	}
	// A file stands where the directory should be.
	if err := WriteDirectory(filepath.Join(dir, "a"), someWeighing(), nil, nil); err == nil {
		t.Error("a file taken for a directory")
	}
	var path *os.PathError
	if err := writeStaged(filepath.Join(dir, "none"), []file{{"a", nil}}); !errors.As(err, &path) {
		t.Errorf("missing directory: %v", err)
	}
}

func TestPosteriorFile(t *testing.T) {
	for name, want := range map[string]string{
		"horizon":         "posterior-horizon.csv",
		"surface, strong": "posterior-surface-strong.csv",
		"../../etc/x":     "posterior-..-..-etc-x.csv",
		"échos":           "posterior--chos.csv",
		"a\x00b\\c:":      "posterior-a-b-c-.csv",
		"":                "posterior-.csv",
	} {
		if got := PosteriorFile(name, ".csv"); got != want {
			t.Errorf("PosteriorFile(%q) = %q, want %q", name, got, want)
		}
	}
}
