package strain

import (
	"errors"
	"fmt"
	"math"
	"strings"

	"knell/likelihood/strain/hdf5"
)

// ReadFile reads the strain of a site from a file whose name ends in
//
//   - .hdf5 or .h5: the layout of open-data strain (see below), or
//   - .txt, .csv, .txt.gz or .csv.gz: text, see ReadText.
//
// wantSite is the site's two-character code; "" accepts any.
//
// In HDF5 the samples are strain/Strain with attributes Xspacing (s) and Xstart
// (GPS s), which must agree with meta/GPSstart where both are there; the site
// is meta/Detector. In quality/simple/DQmask, one integer per second or other
// whole step, bit 0 says that there are data; where it is 0, the series has a
// gap, as it has for NaNs. The other bits are not used. A file without DQmask
// has no flags.
//
// Gaps are not an error here but in Check, Stretch and Condition.
func ReadFile(path, wantSite string) (*Series, error) {
	name := strings.ToLower(path)
	var s *Series
	var err error
	switch {
	case strings.HasSuffix(name, ".hdf5"), strings.HasSuffix(name, ".h5"):
		s, err = readHDF5(path)
	case hasAnySuffix(strings.TrimSuffix(name, ".gz"), ".txt", ".csv"):
		s, err = readText(path, wantSite)
	default:
		return nil, fmt.Errorf("%s: got an unknown kind of file, want a name in .hdf5, .h5, .txt, .csv, .txt.gz or .csv.gz", path)
	}
	if err != nil {
		return nil, err
	}
	if wantSite != "" && s.Site != wantSite {
		return nil, fmt.Errorf("%s: got strain of site %q, want %q", path, s.Site, wantSite)
	}
	return s, s.findGaps()
}

func hasAnySuffix(name string, suffixes ...string) bool {
	for _, s := range suffixes {
		if strings.HasSuffix(name, s) {
			return true
		}
	}
	return false
}

func readHDF5(path string) (*Series, error) {
	f, err := hdf5.Open(path)
	if err != nil {
		return nil, err
	}
	defer f.Close()
	s := &Series{File: path}
	detector, err := f.Dataset("meta/Detector")
	if err != nil {
		return nil, err
	}
	if s.Site, err = detector.Text(); err != nil {
		return nil, err
	}
	data, err := f.Dataset("strain/Strain")
	if err != nil {
		return nil, err
	}
	if len(data.Dims()) != 1 || data.Len() == 0 {
		return nil, fmt.Errorf("%s: strain/Strain: got dimensions %v, want one list of samples", path, data.Dims())
	}
	spacing, err := number(data, "Xspacing")
	if err != nil {
		return nil, err
	}
	if err := s.setSpacing(spacing); err != nil {
		return nil, err
	}
	if err := s.readStart(f, data); err != nil {
		return nil, err
	}
	for _, declared := range []struct {
		name string
		get  func() (float64, error)
		want float64
	}{
		{"strain/Strain@Npoints (samples)", func() (float64, error) { return number(data, "Npoints") }, float64(data.Len())},
		{"meta/Duration (s)", func() (float64, error) { return scalar(f, "meta/Duration") }, float64(data.Len()) / s.SampleRate},
	} {
		got, err := declared.get()
		if errors.Is(err, hdf5.ErrNotFound) {
			continue
		}
		if err != nil {
			return nil, err
		}
		if got != declared.want {
			return nil, fmt.Errorf("%s: %s: got %v, want %v, as %d samples at %v Hz give", path, declared.name, got,
				declared.want, data.Len(), s.SampleRate)
		}
	}
	if s.Values, err = data.Float64s(0, data.Len()); err != nil {
		return nil, err
	}
	return s, s.readMask(f)
}

// number reads an attribute that is one number.
func number(d *hdf5.Dataset, name string) (float64, error) {
	a, err := d.Attribute(name)
	if err != nil {
		return 0, err
	}
	return a.Float64()
}

// scalar reads a dataset that is one number.
func scalar(f *hdf5.File, path string) (float64, error) {
	d, err := f.Dataset(path)
	if err != nil {
		return 0, err
	}
	return d.Float64()
}

// readStart takes the start from Xstart and meta/GPSstart: at least one must be
// there, and two must agree.
func (s *Series) readStart(f *hdf5.File, data *hdf5.Dataset) error {
	start, err := number(data, "Xstart")
	if err != nil && !errors.Is(err, hdf5.ErrNotFound) {
		return err
	}
	other, err2 := scalar(f, "meta/GPSstart")
	switch {
	case err2 != nil && !errors.Is(err2, hdf5.ErrNotFound):
		return err2
	case err != nil && err2 != nil:
		return err
	case err != nil:
		start = other
	case err2 == nil && start != other:
		return fmt.Errorf("%s: got strain/Strain@Xstart %.9f and meta/GPSstart %.9f, want the same GPS time", s.File, start, other)
	}
	whole := math.Floor(start)
	if !(start >= 0 && start < 1e11) {
		return fmt.Errorf("%s: got start %v, want a GPS time in s", s.File, start)
	}
	s.StartSeconds, s.StartFraction = int64(whole), start-whole
	return nil
}

// readMask makes gaps of the seconds without data.
func (s *Series) readMask(f *hdf5.File) error {
	const path = "quality/simple/DQmask"
	d, err := f.Dataset(path)
	if errors.Is(err, hdf5.ErrNotFound) {
		return nil
	}
	if err != nil {
		return err
	}
	step, err := number(d, "Xspacing")
	if errors.Is(err, hdf5.ErrNotFound) {
		step, err = 1, nil // s, as the layout has it
	}
	if err != nil {
		return err
	}
	start, err := number(d, "Xstart")
	if errors.Is(err, hdf5.ErrNotFound) {
		start, err = s.Start(), nil
	}
	if err != nil {
		return err
	}
	mask, err := d.Int64s(0, d.Len())
	if err != nil {
		return err
	}
	per := step * s.SampleRate // samples per flag
	if !(per >= 1) || per != math.Floor(per) || float64(len(mask))*per != float64(len(s.Values)) || start != s.Start() {
		return fmt.Errorf("%s: %s: got %d flags of %v s from GPS %.6f, want flags for the %v s of strain from GPS %.6f",
			s.File, path, len(mask), step, start, s.Duration(), s.Start())
	}
	for i := 0; i < len(mask); i++ {
		if mask[i]&1 != 0 {
			continue
		}
		first := i
		for i < len(mask) && mask[i]&1 == 0 {
			i++
		}
		s.Gaps = append(s.Gaps, Gap{first * int(per), i * int(per), path + " says that there are no data"})
	}
	return nil
}
