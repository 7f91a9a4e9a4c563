package strain

import (
	"math"
	"slices"
	"testing"
)

func ramp(n int) *Series {
	s := &Series{File: "f", Site: "H1", StartSeconds: 1400000000, StartFraction: 0.5, SampleRate: 16384, Values: make([]float64, n)}
	for i := range s.Values {
		s.Values[i] = float64(i)
	}
	return s
}

// Every sample must be found again from its rounded GPS time.
func TestIndexInvertsTime(t *testing.T) {
	s := ramp(40000)
	for i := range s.Values {
		if got := s.Index(s.Time(i)); got != i {
			t.Fatalf("Index(Time(%d)) = %d", i, got)
		}
	}
	for i := 0; i < len(s.Values); i += 777 {
		p := s.Slice(i, len(s.Values))
		if p.Time(0) != s.Time(i) || p.Values[0] != s.Values[i] || p.StartFraction < 0 || p.StartFraction >= 1 {
			t.Fatalf("slice from %d starts at %d + %v", i, p.StartSeconds, p.StartFraction)
		}
	}
}

func TestCheckAndStretch(t *testing.T) {
	s := ramp(4 * 16384)
	s.Gaps = []Gap{{16384, 16400, "one"}, {3 * 16384, 3*16384 + 1, "two"}}
	const start = 1400000000.5
	for _, tc := range []struct {
		why      string
		from, to float64
		want     string // "" for no error
	}{
		{"before the gap", start, start + 1, ""},
		{"touches the gap with one sample", start, start + 1 + 1./16384, "(one)"},
		{"between", start + 1.01, start + 3, ""},
		{"second gap", start + 2.9, start + 3.1, "(two)"},
		{"to the end", start + 3.1, start + 4, ""},
		{"past the end", start + 3.1, start + 4.1, "want within"},
		{"before the start", start - 0.1, start + 0.1, "want within"},
		{"backwards", start + 1, start, "want from < to"},
		{"NaN", math.NaN(), start, "want from < to"},
	} {
		err := s.Check(tc.from, tc.to)
		if tc.want != "" {
			wantError(t, tc.why, err, "f: strain of H1", tc.want)
		} else if err != nil {
			t.Errorf("%s: %v", tc.why, err)
		}
	}
	p, err := s.Stretch(start + 2)
	if err != nil || len(p.Values) != 2*16384-16 || p.Values[0] != 16400 || len(p.Gaps) != 0 || p.Time(0) != s.Time(16400) {
		t.Errorf("Stretch: got %d samples from %v, %v", len(p.Values), p.Values[0], err)
	}
	_, err = s.Stretch(start + 1)
	wantError(t, "stretch in a gap", err, "(one)")
	_, err = s.Stretch(start + 5)
	wantError(t, "stretch outside", err, "want within")
	cut := s.Slice(16390, 3*16384+1)
	if !slices.Equal(cut.Gaps, []Gap{{0, 10, "one"}, {2*16384 + 16384 - 16390, 2*16384 + 16384 - 16390 + 1, "two"}}) {
		t.Errorf("gaps of a slice: %v", cut.Gaps)
	}
}

func TestEdgeIsRefused(t *testing.T) {
	s := ramp(16384)
	s.Edge = 1000
	start := s.Start()
	if err := s.Check(start+1000./16384, start+1-1000./16384); err != nil {
		t.Error(err)
	}
	wantError(t, "edge", s.Check(start+999./16384, start+0.5), "want within")
	wantError(t, "edge", s.Check(start+0.5, start+1-999./16384), "want within")
}
