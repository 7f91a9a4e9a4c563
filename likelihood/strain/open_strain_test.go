package strain

import (
	"math"
	"os"
	"path/filepath"
	"testing"
)

// Public strain of one event, 16.4 s after its start, which the project does not
// carry (see the tests of the HDF5 reader). Noise spectrum from what is not
// within a second of it; whitened, the same noise must have variance one, in
// the whole and second by second.
func TestOpenStrainWhitens(t *testing.T) {
	dir := os.Getenv("KNELL_OPEN_STRAIN")
	if dir == "" {
		t.Skip("KNELL_OPEN_STRAIN is not set: it names the folder with the public strain files")
	}
	for _, site := range []string{"H1", "L1"} {
		const rate, low, high = 2048.0, 30.0, 900.0
		found, err := filepath.Glob(filepath.Join(dir, "*-"+site+"-*.hdf5"))
		if err != nil || len(found) != 1 {
			t.Fatalf("%s has %d files of %s (%v), want one", dir, len(found), site, err)
		}
		raw, err := ReadFile(found[0], site)
		if err != nil {
			t.Fatal(err)
		}
		event := raw.Start() + 16.42
		if raw.SampleRate != 4096 || raw.StartFraction != 0 || raw.Duration() != 32 || len(raw.Gaps) != 0 {
			t.Fatalf("got %v Hz, start %v, %v s, gaps %v", raw.SampleRate, raw.Start(), raw.Duration(), raw.Gaps)
		}
		s, err := Condition(raw, rate, low)
		if err != nil {
			t.Fatal(err)
		}
		if err := s.Check(event-4, event+4); err != nil {
			t.Error(err)
		}
		before, after := s.Index(event-1), s.Index(event+1)
		parts := [][]float64{s.Values[s.Edge:before], s.Values[after : len(s.Values)-s.Edge]}
		for _, average := range []Average{Median, Mean} {
			sp, err := WelchStretches(parts, rate, 2, average)
			if err != nil {
				t.Fatal(err)
			}
			w, err := Whiten(s.Values, sp, rate, low, high)
			if err != nil {
				t.Fatal(err)
			}
			off := append(append([]float64(nil), w[s.Edge+2048:before]...), w[after:len(w)-s.Edge-2048]...)
			got := variance(off)
			// 24 s of 870 Hz are 40000 numbers, known to 0.7 %; the rest is for the
			// spectrum's own error, lines that change and small glitches.
			t.Logf("%s, %v of %d: off-source variance %.3f", site, average, sp.Segments, got)
			if math.Abs(got-1) > 0.08 {
				t.Errorf("%s, %v: off-source variance %v, want 1", site, average, got)
			}
			for i := 0; i+2048 <= len(off); i += 2048 {
				if v := variance(off[i : i+2048]); math.Abs(v-1) > 0.35 {
					t.Errorf("%s, %v: variance of second %d is %v, want 1", site, average, i/2048, v)
				}
			}
			// The event stands out of its 50 ms.
			at := s.Index(event)
			if v := variance(w[at-80 : at+20]); v < 1.5 {
				t.Errorf("%s: variance %v at the event", site, v)
			}
			smooth, err := Smooth(sp, 0.25, low, high)
			if err != nil {
				t.Fatal(err)
			}
			// Smoothing may only lower the whitened variance by what lines cost, and
			// must keep most of a short ringdown's signal-to-noise ratio.
			w, err = Whiten(s.Values, smooth, rate, low, high)
			if err != nil {
				t.Fatal(err)
			}
			got = variance(w[s.Edge+2048 : before])
			rough, kept := 0.0, 0.0
			for k := int(low / sp.Step); k <= int(high/sp.Step); k++ {
				f := float64(k) * sp.Step
				h := 1 / ((f-251)*(f-251) + 1600) // 251 Hz, 4 ms
				rough += h / sp.Density[k]
				kept += h / smooth.Density[k]
			}
			t.Logf("%s, %v, smoothed to 0.25 s: variance %.3f, signal-to-noise squared kept %.3f", site, average, got, kept/rough)
			if got < 0.8 || got > 1.05 || kept/rough < 0.75 {
				t.Errorf("%s, %v: smoothed to 0.25 s: variance %v, signal-to-noise squared kept %v", site, average, got, kept/rough)
			}
		}
	}
}

func variance(x []float64) float64 {
	sum := 0.0
	for _, v := range x {
		sum += v * v
	}
	return sum / float64(len(x))
}
