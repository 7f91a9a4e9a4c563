package kerr

import (
	"fmt"
	"math"
	"math/cmplx"
	"strings"
	"testing"
)

// TestQuasiNormalModesReachMaxSpin follows every mode over the whole range and
// holds its end against things that are known there without the fraction's
// help: decay, Re ω > 0, and a root that neither depth nor inversion moves
// (QuasiNormalMode checks that itself).
func TestQuasiNormalModesReachMaxSpin(t *testing.T) {
	for l := minMultipole; l <= maxMultipole; l++ {
		for m := -l; m <= l; m++ {
			seen := map[int]complex128{}
			for n := 0; n <= maxOvertone; n++ {
				mode, err := QuasiNormalMode(l, m, n, MaxSpin)
				if err != nil {
					t.Error(err)
					continue
				}
				if imag(mode.Omega) >= 0 || real(mode.Omega) <= 0 {
					t.Errorf("(%d,%d,%d): ω = %.6f, want Re > 0 > Im", l, m, n, mode.Omega)
				}
				for k, other := range seen {
					if cmplx.Abs(other-mode.Omega) < 1e-4 {
						t.Errorf("(%d,%d,%d) and overtone %d end on one root %.6f", l, m, n, k, mode.Omega)
					}
				}
				seen[n] = mode.Omega
			}
		}
	}
}

func TestQuasiNormalModeRange(t *testing.T) {
	for _, tc := range []struct {
		l, m, n int
		spin    float64
		want    string
	}{
		{1, 0, 0, 0.5, "l = 1, want 2 to 4"},
		{5, 0, 0, 0.5, "l = 5, want 2 to 4"},
		{2, 3, 0, 0.5, "m = 3, want -2 to 2"},
		{2, 2, -1, 0.5, "n = -1, want 0 to 7"},
		{2, 2, 8, 0.5, "n = 8, want 0 to 7"},
		{2, 2, 0, -0.1, "spin = -0.1, want 0 to 0.998"},
		{2, 2, 0, 0.9985, "spin = 0.9985, want 0 to 0.998"},
		{2, 2, 0, math.NaN(), "spin = NaN, want 0 to 0.998"},
	} {
		t.Run(fmt.Sprint(tc.l, tc.m, tc.n, tc.spin), func(t *testing.T) {
			if _, err := QuasiNormalMode(tc.l, tc.m, tc.n, tc.spin); err == nil || !strings.Contains(err.Error(), tc.want) {
				t.Errorf("error %v, want one with %q", err, tc.want)
			}
		})
	}
}

func BenchmarkQuasiNormalMode(b *testing.B) {
	for b.Loop() {
		if _, err := QuasiNormalMode(2, 2, 0, 0.69); err != nil {
			b.Fatal(err)
		}
	}
}
