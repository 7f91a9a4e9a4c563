package kerr

import (
	"math"
	"math/cmplx"
	"testing"

	"knell/internal/random"
)

// TestModeTrack compares with the direct calculation at random spins, and with the
// table's ω.
func TestModeTrack(t *testing.T) {
	rng := random.New(1, "track")
	most := math.Atanh(MaxSpin)
	var worstOmega, worstS float64
	for l := minMultipole; l <= maxMultipole; l++ {
		for m := -l; m <= l; m++ {
			for n := 0; n <= maxOvertone; n++ {
				theta := math.Pi * rng.Float64()
				track, err := NewModeTrack(l, m, n, theta)
				if err != nil {
					t.Error(err)
					continue
				}
				for range 2 {
					spin := math.Tanh(most * rng.Float64())
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
					offW := cmplx.Abs(omega/mode.Omega - 1)
					offS := max(cmplx.Abs(north-wantN), cmplx.Abs(south-wantS)) / (1e-3 + cmplx.Abs(wantN) + cmplx.Abs(wantS))
					worstOmega, worstS = max(worstOmega, offW), max(worstS, offS)
					if offW > 1e-11 || offS > 1e-10 {
						t.Errorf("(%d,%d,%d) θ=%.4f a=%.6f: ω off by %.1e, S by %.1e", l, m, n, theta, spin, offW, offS)
					}
				}
			}
		}
	}
	t.Logf("largest relative differences: ω %.1e, S %.1e", worstOmega, worstS)
}

// TestSphericalModeTrack: the same ω, and the angular factors of the sphere,
// -2Y_22 = √(5/64π) (1±cosθ)² (arXiv:0709.0093).
func TestSphericalModeTrack(t *testing.T) {
	const theta = 0.8
	track, err := NewSphericalModeTrack(2, 2, 1, theta)
	if err != nil {
		t.Fatal(err)
	}
	full, err := NewModeTrack(2, 2, 1, theta)
	if err != nil {
		t.Fatal(err)
	}
	for _, spin := range []float64{0, 0.3, 0.69, MaxSpin} {
		omega, north, south, err := track.At(spin)
		if err != nil {
			t.Fatal(err)
		}
		want, wantNorth, _, _ := full.At(spin)
		if cmplx.Abs(omega-want) > 1e-14 {
			t.Errorf("a=%g: ω = %.15g, spheroidal track has %.15g", spin, omega, want)
		}
		for sign, s := range map[float64]complex128{1: north, -1: south} {
			y := math.Sqrt(5/(64*math.Pi)) * math.Pow(1+sign*math.Cos(theta), 2)
			if cmplx.Abs(s-complex(y, 0)) > 1e-15 {
				t.Errorf("a=%g: S = %.15g, want %.15g", spin, s, y)
			}
		}
		if off := cmplx.Abs(north - wantNorth); (off > 1e-6) != (spin > 0) {
			t.Errorf("a=%g: spherical and spheroidal factor differ by %.1e", spin, off)
		}
	}
	for _, err := range []error{
		third(NewSphericalModeTrack(2, 2, 8, 1)), third(NewSphericalModeTrack(2, 2, 0, -1)), third(NewSphericalModeTrack(5, 2, 0, 1)),
	} {
		if err == nil {
			t.Error("no error for an argument out of range")
		}
	}
	if n := testing.AllocsPerRun(100, func() { track.At(0.7) }); n != 0 {
		t.Errorf("At allocates %g times, want 0", n)
	}
}

func third(_ *ModeTrack, err error) error { return err }

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
		if cmplx.Abs(omega/mode.Omega-1) > 1e-11 {
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

func BenchmarkNewSphericalModeTrack(b *testing.B) {
	for b.Loop() {
		if _, err := NewSphericalModeTrack(2, 2, 1, 1); err != nil {
			b.Fatal(err)
		}
	}
}
