package strain

import (
	"bytes"
	"compress/gzip"
	"encoding/binary"
	"fmt"
	"math"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"
)

// The files of hdf5/testdata are made by its make.py, whose numbers these are.
func TestReadHDF5(t *testing.T) {
	for _, tc := range []struct {
		file, site string
		rate       float64
		n          int
		gaps       []Gap
	}{
		{"contiguous.hdf5", "H1", 256, 1024, nil},
		{"gzip.hdf5", "L1", 256, 1024, nil},
		{"shuffle.hdf5", "L1", 128, 1024, nil},
		{"gaps.hdf5", "H1", 32, 256, []Gap{
			{96, 128, "quality/simple/DQmask says that there are no data"}, {160, 176, "NaN in the data"}}},
	} {
		s, err := ReadFile("hdf5/testdata/"+tc.file, tc.site)
		if err != nil {
			t.Fatal(err)
		}
		if s.Site != tc.site || s.SampleRate != tc.rate || len(s.Values) != tc.n || s.StartSeconds != 1400000000 ||
			s.StartFraction != 0 || !slices.Equal(s.Gaps, tc.gaps) {
			t.Errorf("%s: got %s, %v Hz, %d samples from %d + %v, gaps %v", tc.file, s.Site, s.SampleRate, len(s.Values),
				s.StartSeconds, s.StartFraction, s.Gaps)
		}
	}
}

func TestHDF5Errors(t *testing.T) {
	good, err := os.ReadFile("hdf5/testdata/contiguous.hdf5")
	if err != nil {
		t.Fatal(err)
	}
	bits := func(v float64) uint64 { return math.Float64bits(v) }
	for _, tc := range []struct {
		why      string
		after    string // the first of the 8 bytes old after this text become new
		old, new uint64
		want     string
	}{
		{"spacing that is no rate", "", bits(1. / 256), bits(0.0123), "sample spacing of 0.0123 s"},
		{"spacing NaN", "", bits(1. / 256), bits(math.NaN()), "sample spacing of NaN s"},
		{"rate and duration disagree", "", bits(1. / 256), bits(1. / 512), "meta/Duration"},
		{"number of samples", "Npoints", 1024, 1025, "Npoints"},
		{"start of samples or file", "", 1400000000, 1400000001, "want the same GPS time"},
		{"start of flags", "DQmask", 1400000000, 1400000001, "got 4 flags of 1 s from GPS 1400000001.000000"},
		{"spacing of flags", "DQmask", bits(1), bits(2), "got 4 flags of 2 s"},
	} {
		var from, to [8]byte
		binary.LittleEndian.PutUint64(from[:], tc.old)
		binary.LittleEndian.PutUint64(to[:], tc.new)
		at := bytes.Index(good, []byte(tc.after))
		i := bytes.Index(good[at:], from[:])
		if i < 0 {
			t.Fatalf("%s: the file has no %d", tc.why, tc.old)
		}
		path := filepath.Join(t.TempDir(), "bad.hdf5")
		if err := os.WriteFile(path, slices.Concat(good[:at+i], to[:], good[at+i+8:]), 0o644); err != nil {
			t.Fatal(err)
		}
		_, err := ReadFile(path, "H1")
		wantError(t, tc.why, err, path, tc.want)
	}
	_, err = ReadFile("hdf5/testdata/contiguous.hdf5", "L1")
	wantError(t, "other site", err, "contiguous.hdf5", `got strain of site "H1", want "L1"`)
	_, err = ReadFile("hdf5/testdata/types.hdf5", "")
	wantError(t, "another HDF5 file", err, "types.hdf5", "meta")
	_, err = ReadFile("strain.dat", "")
	wantError(t, "unknown ending", err, "strain.dat", ".txt.gz")
	path := filepath.Join(t.TempDir(), "cut.hdf5")
	if err := os.WriteFile(path, good[:len(good)-1], 0o644); err != nil {
		t.Fatal(err)
	}
	_, err = ReadFile(path, "H1")
	wantError(t, "cut off", err, path, "cut off?")
}

func wantError(t *testing.T, why string, err error, want ...string) {
	t.Helper()
	if err == nil {
		t.Errorf("%s: got no error, want one with %q", why, want)
		return
	}
	for _, w := range want {
		if !strings.Contains(err.Error(), w) {
			t.Errorf("%s: got error %q, want %q in it", why, err, w)
		}
	}
}

func TestReadText(t *testing.T) {
	for _, tc := range []struct {
		why, text string
		start     float64
		rate      float64
		want      []float64
	}{
		{"one column", "# rate = 4\n# start = 1400000000.25\n1e-21\n-2e-21\n3\n", 1400000000.25, 4, []float64{1e-21, -2e-21, 3}},
		{"open-data words", "# Strain, DOI 1.2\n# This file has 4096 samples per second\n# starting GPS 1400000000 duration 32\n1\n2\n",
			1400000000, 4096, []float64{1, 2}},
		{"two columns", "time,strain\n1400000000.5,1\n1400000000.75,2\n1400000001,3\n", 1400000000.5, 4, []float64{1, 2, 3}},
		{"two columns and header", "# rate = 2\n# site: H1\n# start = 7\n7\t1\n7.5\t2\n8.0 3", 7, 2, []float64{1, 2, 3}},
		{"rounded times", "0.333 1\n0.667 2\n1.000 3\n", 0.333, 3, []float64{1, 2, 3}},
	} {
		s, err := ReadText(strings.NewReader(tc.text), "x.txt", "H1")
		if err != nil {
			t.Errorf("%s: %v", tc.why, err)
			continue
		}
		if s.Start() != tc.start || s.SampleRate != tc.rate || !slices.Equal(s.Values, tc.want) || s.Site != "H1" {
			t.Errorf("%s: got %+v", tc.why, s)
		}
	}
}

func TestTextErrors(t *testing.T) {
	head := "# rate = 4\n# start = 10\n"
	for _, tc := range []struct{ why, text, want string }{
		{"empty", "", "x.txt:0: got the end"},
		{"no header", "1\n2\n", "x.txt:1: got one column without start and rate"},
		{"no start", "# rate = 4\n1\n2\n", "without start"},
		{"a word", head + "1\nhello\n", `x.txt:4: got strain "hello"`},
		{"empty line", head + "1\n\n2\n", "x.txt:4: got 0 columns, want 1"},
		{"more columns", head + "1\n1 2\n", "x.txt:4: got 2 columns, want 1"},
		{"three columns", "1 2 3\n", "x.txt:1: got 3 columns"},
		{"late header", head + "1\n# rate = 4\n", "x.txt:4: got a header"},
		{"other site", "# site = L1\n", `x.txt:1: got strain of site "L1", want "H1"`},
		{"two rates", "# rate = 4\n# rate = 8\n", `x.txt:2: got rate "8"`},
		{"broken rate", "# rate = 0.5\n", `x.txt:1: got rate "0.5"`},
		{"fraction of a rate", "# rate = 4.5\n", `x.txt:1: got rate "4.5"`},
		{"broken start", "# start = 1e9\n", `x.txt:1: got time "1e9"`},
		{"one time", "1 1\n", "x.txt:1: got one sample"},
		{"uneven times", "10.0 1\n10.25 1\n10.6 1\n10.75 1\n", "x.txt:3: got time 0.600000000 s"},
		{"falling times", "10 1\n9 1\n", "x.txt:2: got times"},
		{"missing sample", "0 1\n0.25 1\n0.75 1\n1 1\n", "x.txt:"},
		{"header against times", "# rate = 8\n0 1\n0.25 1\n", "got times"},
		{"start against times", "# start = 1\n0 1\n0.25 1\n", "got start 1"},
		{"negative time", "-1 1\n0 1\n", `got time "-1"`},
	} {
		_, err := ReadText(strings.NewReader(tc.text), "x.txt", "H1")
		wantError(t, tc.why, err, tc.want)
	}
}

func TestReadTextFiles(t *testing.T) {
	text := "# rate = 2\n# start = 10\n1\nnan\n3\n"
	var zipped bytes.Buffer
	z := gzip.NewWriter(&zipped)
	fmt.Fprint(z, text)
	z.Close()
	dir := t.TempDir()
	write := func(name string, b []byte) string {
		path := filepath.Join(dir, name)
		if err := os.WriteFile(path, b, 0o644); err != nil {
			t.Fatal(err)
		}
		return path
	}
	for _, path := range []string{write("a.txt", []byte(text)), write("a.txt.gz", zipped.Bytes())} {
		s, err := ReadFile(path, "L1")
		if err != nil {
			t.Fatal(err)
		}
		if len(s.Values) != 3 || !slices.Equal(s.Gaps, []Gap{{1, 2, "NaN in the data"}}) || s.Site != "L1" {
			t.Errorf("%s: got %+v", path, s)
		}
	}
	path := write("cut.txt.gz", zipped.Bytes()[:zipped.Len()-9])
	_, err := ReadFile(path, "")
	wantError(t, "cut gzip", err, path, "unexpected EOF")
	path = write("inf.csv", []byte("0 1\n0.5 inf\n"))
	_, err = ReadFile(path, "")
	wantError(t, "infinity", err, path, "sample 1")
}

func FuzzReadText(f *testing.F) {
	f.Add("# rate = 4\n# start = 1400000000.25\n1e-21\n-2e-21\n3\n")
	f.Add("time,strain\n1400000000.5,1\n1400000000.75,2\n1400000001,3\n")
	f.Add("# This file has 4096 samples per second\n# starting GPS 1400000000 duration 32\nnan\n2\n")
	f.Fuzz(func(t *testing.T, text string) {
		s, err := ReadText(strings.NewReader(text), "x", "")
		if err != nil {
			return
		}
		if len(s.Values) == 0 || !(s.SampleRate >= 1) || s.StartFraction < 0 || s.StartFraction >= 1 {
			t.Errorf("accepted %q as %+v", text, s)
		}
		s.Stretch(s.Time(0))
	})
}
