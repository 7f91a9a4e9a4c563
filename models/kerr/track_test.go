package kerr

import (
	"math"
	"math/cmplx"
	"testing"
)

// TestModeTrack compares the interpolation with the direct calculation between
// its points.
func TestModeTrack(t *testing.T) {
	const theta = 0.9
	var worst float64
	finest := 0
	modes := [][3]int{
		{3, 3, 0}, {3, 3, 1}, {3, 2, 0}, {4, 4, 0}, {4, -1, 3},
		{3, 1, 5}, {3, 1, 6}, {4, 2, 5}, {4, 2, 6}, // near a branch point
	}
	for m := -2; m <= 2; m++ {
		for n := 0; n <= maxOvertone; n++ {
			modes = append(modes, [3]int{2, m, n})
		}
	}
	for _, lmn := range modes {
		l, m, n := lmn[0], lmn[1], lmn[2]
		track, err := NewModeTrack(l, m, n, theta)
		if err != nil {
			t.Error(err)
			continue
		}
		for i, points := range track.points {
			if i%8 > 1 && len(points)-1 < 8*coarsestPiece {
				continue // enough of the easy ones
			}
			// Mid-step: of the first step of a piece, or of one inside.
			finest = max(finest, len(points)-1)
			step := float64(i%2*(len(points)/3)) + 0.5
			u := (float64(i) + step/float64(len(points)-1)) / track.perPiece
			spin := math.Tanh(u)
			omega, north, south, err := track.At(spin)
			if err != nil {
				t.Fatal(err)
			}
			mode, err := QuasiNormalMode(l, m, n, spin)
			if err != nil {
				t.Fatal(err)
			}
			gamma := complex(spin, 0) * mode.Omega
			wantN, errN := Spheroidal(l, m, gamma, theta)
			wantS, errS := Spheroidal(l, m, gamma, math.Pi-theta)
			if errN != nil || errS != nil {
				t.Fatal(errN, errS)
			}
			scale := cmplx.Abs(wantN) + cmplx.Abs(wantS)
			off := max(cmplx.Abs(omega/mode.Omega-1), cmplx.Abs(north-wantN)/scale, cmplx.Abs(south-wantS)/scale)
			worst = max(worst, off)
			if off > 1e-8 {
				t.Errorf("(%d,%d,%d) a=%.6f: interpolation off by %.1e, want below 1e-8", l, m, n, spin, off)
			}
		}
	}
	t.Logf("largest relative difference %.1e; finest piece %d steps", worst, finest)
}

// TestModeTrackOnAxis: seen along the axis only m = 2 (north) and m = -2 (south)
// are left, and the frequency does not care.
func TestModeTrackOnAxis(t *testing.T) {
	for _, m := range []int{-2, -1, 1, 2} {
		track, err := NewModeTrack(3, m, 1, 0)
		if err != nil {
			t.Fatal(err)
		}
		omega, north, south, err := track.At(0.83)
		if err != nil {
			t.Fatal(err)
		}
		mode, err := QuasiNormalMode(3, m, 1, 0.83)
		if err != nil {
			t.Fatal(err)
		}
		if cmplx.Abs(omega/mode.Omega-1) > 1e-8 {
			t.Errorf("m=%d: ω = %.10f, want %.10f", m, omega, mode.Omega)
		}
		if (cmplx.Abs(north) > 1e-12) != (m == 2) || (cmplx.Abs(south) > 1e-12) != (m == -2) {
			t.Errorf("m=%d: S = %.3g and %.3g on the axis", m, north, south)
		}
	}
}

func TestModeTrackRange(t *testing.T) {
	track, err := NewModeTrack(2, 2, 0, 1)
	if err != nil {
		t.Fatal(err)
	}
	for _, spin := range []float64{-1e-9, 0.9981, math.NaN(), math.Inf(1)} {
		if _, _, _, err := track.At(spin); err == nil {
			t.Errorf("spin %g: no error", spin)
		}
	}
	for _, spin := range []float64{0, MaxSpin} {
		if _, _, _, err := track.At(spin); err != nil {
			t.Errorf("spin %g: %v", spin, err)
		}
	}
	if _, err := NewModeTrack(2, 2, 8, 1); err == nil {
		t.Error("overtone 8: no error")
	}
	if _, err := NewModeTrack(2, 2, 0, 4); err == nil {
		t.Error("theta 4: no error")
	}
	if n := testing.AllocsPerRun(100, func() { track.At(0.7) }); n != 0 {
		t.Errorf("At allocates %g times, want 0", n)
	}
}

func BenchmarkModeTrackAt(b *testing.B) {
	track, err := NewModeTrack(2, 2, 1, 1)
	if err != nil {
		b.Fatal(err)
	}
	spin := 0.0
	for b.Loop() {
		spin += 0.001
		if spin > MaxSpin {
			spin = 0
		}
		if _, _, _, err := track.At(spin); err != nil {
			b.Fatal(err)
		}
	}
}

func BenchmarkNewModeTrack(b *testing.B) {
	for b.Loop() {
		if _, err := NewModeTrack(2, 2, 1, 1); err != nil {
			b.Fatal(err)
		}
	}
}
