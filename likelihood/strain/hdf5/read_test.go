package hdf5

import (
	"crypto/sha256"
	"encoding/binary"
	"encoding/hex"
	"encoding/json"
	"errors"
	"fmt"
	"math"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"
)

// expectation is what the general-purpose library reads; see testdata/make.py.
type expectation struct {
	Strings  []string      `json:"strings"`
	Integers []json.Number `json:"integers"`
	Digest   string        `json:"float64_sha256"`
	N        int           `json:"n"`
}

func digest(x []float64) string {
	b := make([]byte, 8*len(x))
	for i, v := range x {
		binary.LittleEndian.PutUint64(b[8*i:], math.Float64bits(v))
	}
	sum := sha256.Sum256(b)
	return hex.EncodeToString(sum[:])
}

// check compares a dataset or an attribute (path@name) with want.
func check(f *File, path string, want expectation) error {
	var v *value
	if object, name, ok := strings.Cut(path, "@"); ok {
		a, err := f.Attribute(object, name)
		if err != nil {
			return err
		}
		v = a.v
	} else {
		d, err := f.Dataset(path)
		if err != nil {
			return err
		}
		if v, err = d.value(0, d.Len()); err != nil {
			return err
		}
	}
	switch {
	case want.Strings != nil:
		got, err := v.strings()
		if err == nil && !slices.Equal(got, want.Strings) {
			err = fmt.Errorf("got %q, want %q", got, want.Strings)
		}
		return err
	case want.Integers != nil:
		got, err := v.int64s()
		if err == nil && fmt.Sprint(got) != fmt.Sprint(want.Integers) {
			err = fmt.Errorf("got %v, want %v", got, want.Integers)
		}
		return err
	}
	got, err := v.float64s()
	if err == nil && (len(got) != want.N || digest(got) != want.Digest) {
		err = fmt.Errorf("got %d values with digest %s, want %d with %s", len(got), digest(got), want.N, want.Digest)
	}
	return err
}

func expected(t testing.TB) map[string]map[string]expectation {
	b, err := os.ReadFile("testdata/expected.json")
	if err != nil {
		t.Fatal(err)
	}
	var all map[string]map[string]expectation
	if err := json.Unmarshal(b, &all); err != nil {
		t.Fatal(err)
	}
	return all
}

func TestReadsWhatTheLibraryReads(t *testing.T) {
	for name, values := range expected(t) {
		f, err := Open(filepath.Join("testdata", name))
		if err != nil {
			t.Fatal(err)
		}
		defer f.Close()
		for path, want := range values {
			if err := check(f, path, want); err != nil {
				t.Errorf("%s: %s: %v", name, path, err)
			}
		}
	}
}

// Any range of elements must be the same range of the whole.
func TestRanges(t *testing.T) {
	f, err := Open("testdata/chunked.hdf5")
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	for _, path := range []string{"chunked/all", "chunked/holes", "many_chunks"} {
		d, err := f.Dataset(path)
		if err != nil {
			t.Fatal(err)
		}
		whole, err := d.Float64s(0, d.Len())
		if err != nil {
			t.Fatal(err)
		}
		for first := range d.Len() + 1 {
			for count := 0; first+count <= d.Len(); count += 1 + count/2 {
				got, err := d.Float64s(first, count)
				if err != nil || !slices.Equal(got, whole[first:first+count]) {
					t.Fatalf("%s: %d elements from %d: %v, %v", path, count, first, got, err)
				}
			}
		}
		if _, err := d.Float64s(1, d.Len()); err == nil {
			t.Errorf("%s: reading past the end gave no error", path)
		}
	}
}

func TestScalarsAndMembers(t *testing.T) {
	f, err := Open("testdata/contiguous.hdf5")
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	get := func(path string) *Dataset {
		d, err := f.Dataset(path)
		if err != nil {
			t.Fatal(err)
		}
		return d
	}
	if v, err := get("meta/Detector").Text(); v != "H1" || err != nil {
		t.Errorf("meta/Detector = %q, %v", v, err)
	}
	if v, err := get("/meta/GPSstart").Int64(); v != 1400000000 || err != nil {
		t.Errorf("meta/GPSstart = %d, %v", v, err)
	}
	a, err := get("strain/Strain").Attribute("Xspacing")
	if err != nil {
		t.Fatal(err)
	}
	if v, err := a.Float64(); v != 1./256 || err != nil {
		t.Errorf("Xspacing = %v, %v", v, err)
	}
	if got, err := f.Members("quality"); !slices.Equal(got, []string{"detail", "simple"}) || err != nil {
		t.Errorf("members of quality: %q, %v", got, err)
	}
}

// Each error names file, offset, what was found and what would be accepted.
func TestErrors(t *testing.T) {
	open := func(name string) *File {
		f, err := Open("testdata/" + name)
		if err != nil {
			t.Fatal(err)
		}
		t.Cleanup(func() { f.Close() })
		return f
	}
	types, chunked := open("types.hdf5"), open("chunked.hdf5")
	dataset := func(f *File, path string, read func(*Dataset) error) func() error {
		return func() error {
			d, err := f.Dataset(path)
			if err == nil {
				err = read(d)
			}
			return err
		}
	}
	ok := func(*Dataset) error { return nil }
	for _, tc := range []struct {
		why      string
		do       func() error
		want     string
		notFound bool
	}{
		{"no such member", dataset(types, "numbers/none", ok), `one of "`, true},
		{"no such group", dataset(types, "strain/Strain", ok), `one of "numbers"`, true},
		{"no such attribute", func() error { _, err := chunked.Attribute("many_chunks", "b"); return err }, `"a00"`, true},
		{"soft link", dataset(types, "soft", ok), "hard link", false},
		{"group as dataset", dataset(types, "numbers", ok), "a dataset", false},
		{"dataset as group", dataset(types, "numbers/matrix/x", ok), "a group", false},
		{"text as number", dataset(types, "strings/fixed", func(d *Dataset) error { _, err := d.Float64s(0, 3); return err }), "want numbers", false},
		{"number as text", dataset(types, "numbers/matrix", func(d *Dataset) error { _, err := d.Strings(0, 6); return err }), "want strings", false},
		{"array as scalar", dataset(types, "numbers/matrix", func(d *Dataset) error { _, err := d.Float64(); return err }), "want one", false},
		{"integer beyond float64", dataset(types, "numbers/little_int64", func(d *Dataset) error { _, err := d.Float64s(0, 6); return err }), "2^53", false},
	} {
		err := tc.do()
		var e *Error
		if !errors.As(err, &e) {
			t.Errorf("%s: got error %v, want an *Error", tc.why, err)
			continue
		}
		if !strings.Contains(err.Error(), tc.want) || e.File == "" || errors.Is(err, ErrNotFound) != tc.notFound {
			t.Errorf("%s: got %q, want %q in it and not found = %v", tc.why, err, tc.want, tc.notFound)
		}
	}
	if _, err := Open("testdata/expected.json"); err == nil || !strings.Contains(err.Error(), "HDF5") {
		t.Errorf("a JSON file opened as HDF5: %v", err)
	}
	if _, err := Open("testdata"); err == nil || !strings.Contains(err.Error(), "regular file") {
		t.Errorf("a folder opened as a file: %v", err)
	}
}

// ints is n times one number, as expected.json would give it.
func ints(number string, n int) []json.Number {
	return slices.Repeat([]json.Number{json.Number(number)}, n)
}
