package hdf5

import (
	"os"
	"path/filepath"
	"testing"
)

// openStrain is public strain (CC BY 4.0, DOI 10.7935/K5MW2F23) that the
// project does not carry. The folder that KNELL_OPEN_STRAIN names may hold it.
// The digests are of the little-endian float64 values as python3-h5py 3.7 with
// HDF5 1.10.8 reads them, by testdata/make.py FILE.
var openStrain = []struct{ file, site, digest string }{
	{"H-H1-1126259446-32.hdf5", "H1", "2afb44a36d1bd7561cdcf704ccd26243978eff9823b3e04a11866e4f626e284b"},
	{"L-L1-1126259446-32.hdf5", "L1", "6777425af4daee88061b1270da035cdd6ee723211f55f3445aa9dea43b2c1ed4"},
}

func openStrainFolder(t testing.TB) string {
	dir := os.Getenv("KNELL_OPEN_STRAIN")
	if dir == "" {
		t.Skip("KNELL_OPEN_STRAIN is not set: it names the folder with the public strain files")
	}
	return dir
}

func TestOpenStrain(t *testing.T) {
	dir := openStrainFolder(t)
	for _, tc := range openStrain {
		f, err := Open(filepath.Join(dir, tc.file))
		if err != nil {
			t.Fatal(err)
		}
		defer f.Close()
		for path, want := range map[string]expectation{
			"strain/Strain":                     {Digest: tc.digest, N: 131072},
			"strain/Strain@Xstart":              {Integers: ints("1126259446", 1)},
			"meta/GPSstart":                     {Integers: ints("1126259446", 1)},
			"meta/Detector":                     {Strings: []string{tc.site}},
			"quality/simple/DQmask":             {Integers: ints("127", 32)},
			"quality/simple/DQmask@Description": {Strings: []string{`A bitmask encoded as an integer-valued timeseries. The first "Bits" bits might be used, for each there is an entry in "Bits", "Shortnames", "Descriptions", one for each bit.`}},
		} {
			if err := check(f, path, want); err != nil {
				t.Errorf("%s: %s: %v", tc.file, path, err)
			}
		}
	}
}

func BenchmarkRead(b *testing.B) {
	path := filepath.Join(openStrainFolder(b), openStrain[0].file)
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
