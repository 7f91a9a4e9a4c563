package models

import (
	"fmt"
	"math"
	"math/cmplx"
	"strings"
	"testing"

	"gonum.org/v1/gonum/dsp/fourier"

	"knell/internal/checktable"
	"knell/internal/constants"
	"knell/models/kerr"
)

// The FFT of the sampled series, the first sample taken at half its value, is the
// trapezoidal rule for the transform. Its error is a sum over the images of the
// spectrum at multiples of the rate; for a jump and a mode of angular frequency w it
// is, to first order, the transform times (w dt)^2 / 12. So it falls by four
// whenever the rate doubles.
func TestPhysicsTransformIsTheLimitOfTheFFT(t *testing.T) {
	const (
		mass     = 68.0
		duration = 1.0 // s; the slowest mode is down by exp(-60) then
	)
	table := checktable.New(t, "error of the FFT of the sampled ringdown against the model, factor from 65536 to 131072 Hz")
	for _, tc := range []struct {
		mode        string
		spin, iota  float64
		angular     string
		phase, late float64
	}{
		{"2,2,0", 0.69, 0.4, "", 0.3, 0},
		{"2,2,1", 0.69, 2.2, "", 5.1, 0},
		{"2,2,3", 0.8, 1.0, "", 2.5, 0},
		{"2,-2,0", 0.5, 0.9, "", 1.0, 0},
		{"2,1,0", 0.95, 1.3, "", 0, 0},
		{"2,0,0", 0.3, 1.0, "", 4.0, 0},
		{"3,3,0", 0.9, 1.2, "", 2.0, 0},
		{"3,2,0", 0.69, 0.2, "spherical", 2.0, 0},
		{"4,4,0", 0.69, 1.2, "", 2.0, 0},
		{"4,-3,1", 0.2, 2.0, "", 3.0, 0},
	} {
		l, m, n, err := ParseMode(tc.mode)
		if err != nil {
			t.Fatal(err)
		}
		grid := Grid{First: 20, Count: 1000, Step: 1 / duration}
		h := fill(t, newTestModel(t, Settings{Model: "ringdown", Modes: []string{tc.mode}, Grid: grid, Inclination: tc.iota, Angular: tc.angular}),
			[]float64{mass, tc.spin, 0, 1, tc.phase}, grid.Count)
		at := waveform(t, l, m, n, mass, tc.spin, tc.iota, tc.angular, cmplx.Rect(1, tc.phase))
		miss := func(rate int) float64 {
			plus, cross := make([]float64, rate), make([]float64, rate)
			for i := range plus {
				z := at(float64(i) / float64(rate))
				plus[i], cross[i] = real(z), -imag(z)
			}
			plus[0], cross[0] = plus[0]/2, cross[0]/2
			fft := fourier.NewFFT(rate)
			fp, fc := fft.Coefficients(nil, plus), fft.Coefficients(nil, cross)
			worst, most := 0.0, 0.0
			for j := range grid.Count {
				k, dt := grid.First+j, complex(1/float64(rate), 0)
				p, x := complex(h.PlusRe[j], h.PlusIm[j]), complex(h.CrossRe[j], h.CrossIm[j])
				worst = max(worst, cmplx.Abs(p-fp[k]*dt), cmplx.Abs(x-fc[k]*dt))
				most = max(most, cmplx.Abs(p), cmplx.Abs(x))
			}
			return worst / most
		}
		coarse, fine := miss(65536), miss(131072)
		name := fmt.Sprintf("(%s) spin %g %s", tc.mode, tc.spin, tc.angular)
		// The next order is (w dt)^2 / 60 of the first: 1e-4 at w = 6000 rad/s.
		table.Relative(strings.TrimSpace(name), coarse/fine, 4, 1e-3, "Euler-Maclaurin formula")
		if fine > math.Pow(1e4/131072, 2) {
			t.Errorf("mode %s: the FFT at 131072 Hz is off by %.2g of the largest value", tc.mode, fine)
		}
	}
}

// waveform is h+ - i hx of one mode and its partner from the definition,
//
//	C S(iota) exp(-i omega t) + conj(C S(pi - iota) exp(-i omega t)),
//
// straight from the solved mode.
func waveform(t *testing.T, l, m, n int, mass, spin, iota float64, angular string, c complex128) func(float64) complex128 {
	t.Helper()
	mode, err := kerr.QuasiNormalMode(l, m, n, spin)
	if err != nil {
		t.Fatal(err)
	}
	gamma := complex(spin, 0) * mode.Omega
	if angular == "spherical" {
		gamma = 0
	}
	north, err := kerr.Spheroidal(l, m, gamma, iota)
	if err != nil {
		t.Fatal(err)
	}
	south, err := kerr.Spheroidal(l, m, gamma, math.Pi-iota)
	if err != nil {
		t.Fatal(err)
	}
	scale := mass * constants.SolarMassSeconds
	return func(at float64) complex128 {
		e := cmplx.Exp(complex(0, -at/scale) * mode.Omega)
		return c*north*e + cmplx.Conj(c*south*e)
	}
}

// With exp(-i omega t), an m = 2 mode seen along the spin is h+ - i hx =
// C exp(-i omega t): the tip of (h+, hx) moves with phase -omega_R t. Seen against the
// spin it moves the other way, and so does m = -2 seen along it. From the samples of the
// inverse FFT, after the probe has passed the start, one step turns by the mode's
// complex frequency.
func TestPhysicsChirality(t *testing.T) {
	const mass, spin = 68.0, 0.69
	table := checktable.New(t, "h+ - i hx one sample later, as frequency in rad/s and decay in 1/s; spin 0.69, 68 solar masses")
	for _, tc := range []struct {
		mode, view string
		iota       float64
		sense      float64
	}{
		{"2,2,0", "along the spin", 0, 1},
		{"2,2,0", "against the spin", math.Pi, -1},
		{"2,-2,0", "along the spin", 0, -1},
		{"2,-2,0", "against the spin", math.Pi, 1},
	} {
		l, m, n, err := ParseMode(tc.mode)
		if err != nil {
			t.Fatal(err)
		}
		mode, err := kerr.QuasiNormalMode(l, m, n, spin)
		if err != nil {
			t.Fatal(err)
		}
		name := amplitudeName(tc.mode)
		z := timeSeries(t, timeCase{
			s:      Settings{Model: "ringdown", Modes: []string{tc.mode}, Inclination: tc.iota},
			values: map[string]float64{"mass": mass, "spin": spin, name: 1, strings.Replace(name, "amplitude", "phase", 1): 0.7},
		}, 1, 1, probe)
		i := 2 * probeSamples
		// exp(-i omega dt) or its conjugate, to the power of the rate.
		omega := complex(0, timeRate) * cmplx.Log(z[i+1]/z[i])
		scale := complex(mass*constants.SolarMassSeconds, 0)
		want := mode.Omega / scale
		if tc.sense < 0 {
			want = -cmplx.Conj(want)
		}
		table.Complex(fmt.Sprintf("(%s) seen %s", tc.mode, tc.view), omega, want, 1e-6, "exp(-i omega t), the mode's own frequency")
	}
}
