package hdf5

import (
	"os"
	"path/filepath"
	"testing"
)

// openStrain is public strain of one event, 32 s at 4096 Hz, that the project
// does not carry (CC BY 4.0, DOI 10.7935/K5MW2F23). The folder that
// KNELL_OPEN_STRAIN names may hold it. The digests are of the little-endian
// float64 values as python3-h5py 3.7 with HDF5 1.10.8 reads them, by
// testdata/make.py FILE.
var openStrain = []struct{ site, digest string }{
	{"H1", "2afb44a36d1bd7561cdcf704ccd26243978eff9823b3e04a11866e4f626e284b"},
	{"L1", "6777425af4daee88061b1270da035cdd6ee723211f55f3445aa9dea43b2c1ed4"},
}

// openStrainFile returns the path of the one file of a site.
func openStrainFile(t testing.TB, site string) string {
	dir := os.Getenv("KNELL_OPEN_STRAIN")
	if dir == "" {
		t.Skip("KNELL_OPEN_STRAIN is not set: it names the folder with the public strain files")
	}
	found, err := filepath.Glob(filepath.Join(dir, "*-"+site+"-*.hdf5"))
	if err != nil || len(found) != 1 {
		t.Fatalf("%s has %d files of %s (%v), want one", dir, len(found), site, err)
	}
	return found[0]
}

func TestOpenStrain(t *testing.T) {
	for _, tc := range openStrain {
		f, err := Open(openStrainFile(t, tc.site))
		if err != nil {
			t.Fatal(err)
		}
		defer f.Close()
		for path, want := range map[string]expectation{
			"strain/Strain":                     {Digest: tc.digest, N: 131072},
			"strain/Strain@Npoints":             {Integers: ints("131072", 1)},
			"meta/Duration":                     {Integers: ints("32", 1)},
			"meta/Detector":                     {Strings: []string{tc.site}},
			"quality/simple/DQmask":             {Integers: ints("127", 32)},
			"quality/simple/DQmask@Description": {Strings: []string{`A bitmask encoded as an integer-valued timeseries. The first "Bits" bits might be used, for each there is an entry in "Bits", "Shortnames", "Descriptions", one for each bit.`}},
		} {
			if err := check(f, path, want); err != nil {
				t.Errorf("%s: %s: %v", tc.site, path, err)
			}
		}
	}
}

func BenchmarkRead(b *testing.B) {
	path := openStrainFile(b, "H1")
	b.ReportAllocs()
	b.SetBytes(131072 * 8)
	for range b.N {
		f, err := Open(path)
		if err != nil {
			b.Fatal(err)
		}
		d, err := f.Dataset("strain/Strain")
		if err != nil {
			b.Fatal(err)
		}
		if x, err := d.Float64s(0, d.Len()); err != nil || len(x) != 131072 {
			b.Fatal(len(x), err)
		}
		f.Close()
	}
}
