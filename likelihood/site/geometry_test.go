package site

import (
	"errors"
	"math"
	"strings"
	"testing"

	"knell/internal/constants"
)

func lookup(t *testing.T, code string) Site {
	t.Helper()
	s, err := Lookup(code)
	if err != nil {
		t.Fatal(err)
	}
	return s
}

func TestCatalogueVectors(t *testing.T) {
	// want: printed vectors of technical note T980044 and arXiv:gr-qc/0008066,
	// table 1 (from memory; H1's X and Y recomputed, because the remembered ones are
	// not of unit length). Positions are printed to 1 cm, directions to six decimals.
	const metres, direction = 0.006, 6e-7
	for _, tc := range []struct {
		code       string
		position   [3]float64
		xArm, yArm [3]float64
	}{
		{"H1", [3]float64{-2161414.93, -3834695.18, 4600350.23},
			[3]float64{-0.223893, 0.799831, 0.556905}, [3]float64{-0.913978, 0.026094, -0.404923}},
		{"L1", [3]float64{-74276.04, -5496283.72, 3224257.02},
			[3]float64{-0.954574, -0.141581, -0.262189}, [3]float64{0.297742, -0.487910, -0.820545}},
		{"V1", [3]float64{4546374.10, 842989.70, 4378576.96},
			[3]float64{-0.700458, 0.208489, 0.682562}, [3]float64{-0.053793, -0.969082, 0.240805}},
	} {
		s := lookup(t, tc.code)
		for i := range 3 {
			if d := s.Position[i] - tc.position[i]; math.Abs(d) > metres {
				t.Errorf("%s position[%d] = %.4f, want %.2f", tc.code, i, s.Position[i], tc.position[i])
			}
			if d := s.X[i] - tc.xArm[i]; math.Abs(d) > direction {
				t.Errorf("%s X[%d] = %.8f, want %.6f", tc.code, i, s.X[i], tc.xArm[i])
			}
			if d := s.Y[i] - tc.yArm[i]; math.Abs(d) > direction {
				t.Errorf("%s Y[%d] = %.8f, want %.6f", tc.code, i, s.Y[i], tc.yArm[i])
			}
		}
		for name, v := range map[string][3]float64{"X": s.X, "Y": s.Y} {
			if d := dot(v, v) - 1; math.Abs(d) > 1e-15 {
				t.Errorf("%s |%s|^2 - 1 = %g", tc.code, name, d)
			}
		}
	}
}

func TestLightTravel(t *testing.T) {
	// want: distances of the printed positions over c, given to 0.1 us.
	for _, tc := range []struct {
		from, to string
		ms       float64
	}{
		{"H1", "L1", 10.0128}, {"H1", "V1", 27.2880}, {"L1", "V1", 26.4483},
	} {
		got := baseline(lookup(t, tc.from), lookup(t, tc.to)) * 1e3
		if math.Abs(got-tc.ms) > 1e-4 {
			t.Errorf("%s-%s = %.5f ms, want %.4f", tc.from, tc.to, got, tc.ms)
		}
	}
}

// baseline returns the light travel time between two sites in seconds.
func baseline(a, b Site) float64 {
	var sum float64
	for i := range 3 {
		d := a.Position[i] - b.Position[i]
		sum += d * d
	}
	return math.Sqrt(sum) / constants.SpeedOfLight
}

func TestNewRejects(t *testing.T) {
	ok := []float64{0.5, 1, 100, 0, math.Pi / 2, 0, 0}
	if _, err := New("Q1", ok[0], ok[1], ok[2], ok[3], ok[4], ok[5], ok[6]); err != nil {
		t.Fatalf("good numbers: %v", err)
	}
	for _, tc := range []struct {
		index int
		value float64
		field string
	}{
		{0, math.NaN(), "latitude"}, {0, 46.5, "latitude"}, {1, math.Inf(1), "longitude"},
		{2, 1e7, "height"}, {3, 36, "xAzimuth"}, {4, 90, "yAzimuth"}, {4, math.Pi, "yAzimuth"},
		{5, 1, "xTilt"}, {6, math.Inf(-1), "yTilt"},
	} {
		a := append([]float64(nil), ok...)
		a[tc.index] = tc.value
		_, err := New("Q1", a[0], a[1], a[2], a[3], a[4], a[5], a[6])
		var field *FieldError
		if !errors.As(err, &field) || field.Field != tc.field || field.Got == "" || field.Want == "" {
			t.Errorf("%s = %g: got %v", tc.field, tc.value, err)
		}
	}
	if _, err := New("", ok[0], ok[1], ok[2], ok[3], ok[4], ok[5], ok[6]); err == nil {
		t.Error("empty code accepted")
	}
	if _, err := Lookup("Z9"); err == nil || !strings.Contains(err.Error(), "H1, L1, V1") {
		t.Errorf("Lookup(Z9): %v", err)
	}
}
