package kerr

import (
	"fmt"
	"math"
	"math/cmplx"
	"strings"
	"testing"
)

// TestQuasiNormalModeTable compares with numbers computed at 34 digits by two
// other methods; see testdata/qnm.csv.
func TestQuasiNormalModeTable(t *testing.T) {
	// The roots of the fraction move by 1e-13 with its depth and inversion;
	// their conditioning at these overtones costs at most one digit more.
	const tol = 2e-12
	var worst float64
	for _, row := range readTable(t, "qnm.csv") {
		l, m, n, spin := int(row["l"]), int(row["m"]), int(row["n"]), row["a"]
		got, err := QuasiNormalMode(l, m, n, spin)
		if err != nil {
			t.Error(err)
			continue
		}
		wantW, wantA := complex(row["re_omega"], row["im_omega"]), complex(row["re_A"], row["im_A"])
		errW, errA := cmplx.Abs(got.Omega-wantW), cmplx.Abs(got.Separation-wantA)
		worst = max(worst, errW, errA)
		if errW > tol || errA > 10*tol {
			t.Errorf("(%d,%d,%d) a=%g: ω = %.15g, A = %.15g, want %.15g, %.15g", l, m, n, spin, got.Omega, got.Separation, wantW, wantA)
		}
	}
	t.Logf("largest difference in ω and A: %.1e", worst)
}

// TestQuasiNormalModeNonSpinning compares with the printed table of Proc. R.
// Soc. A 402, 285 (1985), in its units 2M = 1 and with its six decimals.
func TestQuasiNormalModeNonSpinning(t *testing.T) {
	for l, rows := range map[int][]complex128{
		2: {0.747343 - 0.177925i, 0.693422 - 0.547830i, 0.602107 - 0.956554i, 0.503010 - 1.410296i,
			0.415029 - 1.893690i, 0.338599 - 2.391216i, 0.266505 - 2.895822i},
		3: {1.198887 - 0.185406i, 1.165288 - 0.562596i, 1.103370 - 0.958186i, 1.023924 - 1.380674i},
		4: {1.618357 - 0.188328i, 1.593263 - 0.568669i},
	} {
		for n, want := range rows {
			got, err := QuasiNormalMode(l, 0, n, 0)
			if err != nil {
				t.Error(err)
				continue
			}
			d := 2*got.Omega - want
			// Half a unit of the last place; the last row of l = 2 is printed
			// one unit off.
			if tol := 1.01e-6; math.Abs(real(d)) > tol || math.Abs(imag(d)) > tol {
				t.Errorf("l=%d n=%d: 2Mω = %.6f, want %.6f", l, n, 2*got.Omega, want)
			}
		}
	}
}

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
