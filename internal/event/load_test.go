package event

import (
	"errors"
	"fmt"
	"os"
	"path/filepath"
	"strings"
	"testing"
)

// synthetic is the line of tiny that the tests of strain files replace.
const synthetic = `synthetic = { curve = "second-generation-broadband", seed = 4, length = 8.0, quiet = true }
noise     = { from = "curve" }`

// withStrain is tiny with a strain file and noise from a curve.
func withStrain(file string) string {
	return strings.Replace(tiny, synthetic, fmt.Sprintf("strain = %q\nnoise = { from = \"curve\", curve = \"second-generation-broadband\" }", file), 1)
}

// writeStrain writes text strain of a site: seconds from GPS start on, at a rate,
// with NaN where bad says so.
func writeStrain(t *testing.T, file, code string, start, seconds, rate int, bad func(second float64) bool) {
	t.Helper()
	var b strings.Builder
	fmt.Fprintf(&b, "# rate = %d\n# start = %d\n# site = %s\n", rate, start, code)
	for i := range seconds * rate {
		if bad != nil && bad(float64(start)+float64(i)/float64(rate)) {
			b.WriteString("nan\n")
			continue
		}
		fmt.Fprintf(&b, "%de-24\n", i%7-3)
	}
	if err := os.WriteFile(file, []byte(b.String()), 0o666); err != nil {
		t.Fatal(err)
	}
}

// TestLoadErrors: what is wrong with the files an event points to, or does not
// fit them, names file, line and key.
func TestLoadErrors(t *testing.T) {
	dir := t.TempDir()
	in := func(name string) string { return filepath.Join(dir, name) }
	copied, err := os.ReadFile(filepath.FromSlash("../../likelihood/strain/hdf5/testdata/contiguous.hdf5"))
	if err != nil {
		t.Fatal(err)
	}
	for name, content := range map[string][]byte{
		"cut.hdf5": copied[:len(copied)*2/3], "head.hdf5": copied[:40], "none.hdf5": nil,
		"whole.hdf5": copied, "no.hdf5": []byte("strain\n"), "words.txt": []byte("# rate = 4\n# start = 1\n1\nx\n"),
		"curve.txt": []byte("20 1e-46\n30 0\n"), "short.txt": []byte("20 1e-46\n100 1e-46\n"), "not.txt.gz": []byte("1\n2\n"),
	} {
		if err := os.WriteFile(in(name), content, 0o666); err != nil {
			t.Fatal(err)
		}
	}
	if err := os.Mkdir(in("folder.hdf5"), 0o777); err != nil {
		t.Fatal(err)
	}
	if err := os.Mkdir(in("folder.txt"), 0o777); err != nil {
		t.Fatal(err)
	}
	const second = 1400000123
	writeStrain(t, in("good.txt"), "H1", second-4, 8, 1024, nil)
	writeStrain(t, in("other.txt"), "L1", second-4, 8, 1024, nil)
	writeStrain(t, in("fast.txt"), "H1", second-4, 8, 1536, nil)
	writeStrain(t, in("twice.txt"), "H1", second-4, 8, 2048, nil)
	writeStrain(t, in("brief.txt"), "H1", second, 1, 1024, nil)
	writeStrain(t, in("nan.txt"), "H1", second-4, 8, 1024, func(s float64) bool { return s > second+0.25 && s < second+0.26 })
	writeStrain(t, in("later.txt"), "H1", second-4, 8, 1024, func(s float64) bool { return s > second+0.5 && s < second+0.51 })

	edited := func(text, old, new string) string {
		if strings.Count(text, old) != 1 {
			t.Fatalf("%q stands %d times, want once", old, strings.Count(text, old))
		}
		return strings.Replace(text, old, new, 1)
	}
	if _, err := load(t, in("event.toml"), withStrain("good.txt")); err != nil {
		t.Fatal(err)
	}
	for _, tc := range []struct {
		why, text string
		at, key   string
		says      []string
	}{
		{"missing", withStrain("nowhere.hdf5"), "strain", "site[0].strain", []string{in("nowhere.hdf5"), "want a file that can be read"}},
		{"missing text", withStrain("nowhere.txt"), "strain", "site[0].strain", []string{in("nowhere.txt"), "want a file that can be read"}},
		{"folder", withStrain("folder.hdf5"), "strain", "site[0].strain", []string{in("folder.hdf5")}},
		{"folder as text", withStrain("folder.txt"), "strain", "site[0].strain", []string{in("folder.txt")}},
		{"kind of file", withStrain("event.toml"), "strain", "site[0].strain", []string{"event.toml", ".hdf5, .h5, .txt"}},
		{"truncated HDF5", withStrain("cut.hdf5"), "strain", "site[0].strain", []string{in("cut.hdf5"), "offset", fmt.Sprint(len(copied))}},
		{"head of an HDF5", withStrain("head.hdf5"), "strain", "site[0].strain", []string{in("head.hdf5"), "offset"}},
		{"empty HDF5", withStrain("none.hdf5"), "strain", "site[0].strain", []string{in("none.hdf5"), "offset"}},
		{"no HDF5", withStrain("no.hdf5"), "strain", "site[0].strain", []string{in("no.hdf5"), "offset"}},
		{"word in text", withStrain("words.txt"), "strain", "site[0].strain", []string{in("words.txt") + ":4", `"x"`}},
		{"not compressed", withStrain("not.txt.gz"), "strain", "site[0].strain", []string{in("not.txt.gz"), "gzip"}},
		{"other site", withStrain("other.txt"), "strain", "site[0].strain", []string{in("other.txt"), `"L1"`, `"H1"`}},
		{"event outside", withStrain("whole.hdf5"), "strain", "site[0].strain", []string{in("whole.hdf5"), "1400000123.24", "1400000000.000000 to 1400000004.000000"}},
		{"start outside", edited(withStrain("good.txt"), "start       = 0.0", "start = 20.0"), "strain", "site[0].strain", []string{"1400000143.24"}},
		{"segment longer than the data", edited(withStrain("good.txt"), "duration    = 1.0", "duration = 8.0"), "strain", "site[0].strain", []string{in("good.txt"), "analysis.duration", "want within"}},
		{"data shorter than the filter", withStrain("brief.txt"), "strain", "site[0].strain", []string{in("brief.txt"), "1.000 s", "3.000 s"}},
		{"NaN at the start", withStrain("nan.txt"), "strain", "site[0].strain", []string{in("nan.txt"), "NaN"}},
		{"NaN in the segment", withStrain("later.txt"), "strain", "site[0].strain", []string{in("later.txt"), "GPS 1400000123.50", "NaN"}},
		{"rate no divisor", withStrain("fast.txt"), "sample_rate", "analysis.sample_rate", []string{in("fast.txt"), "1536", "1024", "768"}},
		{"rate above the data's", edited(withStrain("good.txt"), "sample_rate = 1024.0", "sample_rate = 2048.0"), "sample_rate", "analysis.sample_rate", []string{"1024", "2048"}},
		{"band in the filter", edited(withStrain("twice.txt"), "460.0]", "480.0]"), "band  ", "analysis.band", []string{"480 Hz", "460.8 Hz", "2048 Hz"}},
		{"noise file missing", edited(tiny, `{ from = "curve" }`, `{ from = "file", file = "gone.txt" }`), "gone.txt", "site[0].noise.file", []string{in("gone.txt"), "want a file that can be read"}},
		{"noise density zero", edited(tiny, `{ from = "curve" }`, `{ from = "file", file = "curve.txt" }`), "curve.txt", "site[0].noise.file", []string{in("curve.txt") + ":2"}},
		{"noise file too short", edited(tiny, `{ from = "curve" }`, `{ from = "file", file = "short.txt" }`), "short.txt", "site[0].noise", []string{"Hz"}},
		{"noise smoothed over all", edited(tiny, `{ from = "curve" }`, `{ from = "curve", smooth = 0.6 }`), "smooth", "site[0].noise.smooth", []string{"0.6", "half of the duration"}},
		{"segments longer than the data", edited(tiny, `{ from = "curve" }`, `{ from = "data", segment = 9.0 }`), "segment", "site[0].noise", []string{"9 s", "want at most"}},
		{"synthetic strain too long", edited(tiny, "length = 8.0", "length = 5000.0"), "length", "site[0].synthetic", []string{"5000", "4096 s"}},
		{"synthetic strain too short", edited(tiny, "length = 8.0", "length = 0.5"), "length", "site[0].synthetic", []string{"0.500 s", "3.000 s"}},
		{"synthetic at a broken rate", edited(edited(tiny, "sample_rate = 1024.0", "sample_rate = 1024.5"), "duration    = 1.0", "duration = 4.0"), "sample_rate", "analysis.sample_rate", []string{"1024.5", "whole number"}},
		{"arms along one another", edited(tiny, `code      = "H1"`, "code = \"H1\"\ngeometry = { latitude = 0.5, longitude = 0.1, x_azimuth = 1.0, y_azimuth = 1.0 }"), "geometry", "site[0].geometry.y_azimuth", []string{"not along the X arm"}},
		{"longitude in degrees", edited(tiny, `code      = "H1"`, "code = \"H1\"\ngeometry = { latitude = 0.5, longitude = 90.0, x_azimuth = 1.0, y_azimuth = 2.5 }"), "geometry", "site[0].geometry.longitude", []string{"90 rad", "between"}},
		{"eight modes", strings.Replace(tiny, `modes = ["2,2,0"]
reflectivity`, `modes = ["2,2,0","2,2,1","2,2,2","2,2,3","2,2,4","2,2,5","2,2,6","2,2,7"]
reflectivity`, 1) + "amplitude_227 = { kind = \"uniform\", low = 0.0, high = 1e-21 }\n", "", "", nil},
		{"nothing free", strings.NewReplacer("40.0, high = 110.0", "68.0, high = 68.0").Replace(tiny), "mass         =", "prior.mass.low", []string{"68"}},
	} {
		t.Run(tc.why, func(t *testing.T) {
			_, err := load(t, in("event.toml"), tc.text)
			if tc.key == "" {
				if err != nil {
					t.Fatal(err)
				}
				return
			}
			var e *InputError
			if !errors.As(err, &e) {
				t.Fatalf("got error %v, want an InputError", err)
			}
			if line := lineOf(t, tc.text, tc.at); e.File != in("event.toml") || e.Line != line || e.Key != tc.key {
				t.Errorf("got line %d and key %s, want %d and %s\n%v", e.Line, e.Key, line, tc.key, e)
			}
			for _, s := range tc.says {
				if !strings.Contains(e.Error(), s) {
					t.Errorf("got %q, want %q in it", e, s)
				}
			}
			if n := strings.Count(e.Error(), in("event.toml")); n != 1 && tc.why != "kind of file" {
				t.Errorf("got %q, want the event file named once", e)
			}
			for _, name := range []string{"nowhere", "gone.txt", "folder.", "cut.hdf5", "words.txt"} {
				if strings.Count(e.Error(), name) > 1 {
					t.Errorf("got %q, want the file named once", e)
				}
			}
			readable(t, strings.ReplaceAll(e.Error(), dir, ""))
		})
	}
}

// load decodes text as the file and loads it.
func load(t *testing.T, file, text string) (*Prepared, error) {
	t.Helper()
	if err := os.WriteFile(file, []byte(text), 0o666); err != nil {
		t.Fatal(err)
	}
	c, err := ReadConfig(file)
	if err != nil {
		return nil, err
	}
	return Load(c)
}

func TestReadConfigErrors(t *testing.T) {
	dir := t.TempDir()
	for _, file := range []string{filepath.Join(dir, "none.toml"), dir} {
		_, err := ReadConfig(file)
		var e *InputError
		if !errors.As(err, &e) || strings.Count(e.Error(), dir) != 1 || !strings.Contains(e.Error(), "want a readable TOML file") {
			t.Errorf("got error %v", err)
		}
	}
}
