package models

import (
	"fmt"
	"math"
	"math/cmplx"
	"testing"

	"gonum.org/v1/gonum/dsp/fourier"

	"knell/internal/constants"
	"knell/models/kerr"
)

// timeDomain is h+ and hx of one mode and its partner from the definition
//
//	h+ - i hx = C S(iota) exp(-i omega t) + conj(C S(pi - iota) exp(-i omega t))
//
// straight from the solved mode, for t in s.
func timeDomain(t *testing.T, l, m, n int, mass, spin, iota float64, c complex128) func(float64) (plus, cross float64) {
	t.Helper()
	mode, err := kerr.QuasiNormalMode(l, m, n, spin)
	if err != nil {
		t.Fatal(err)
	}
	gamma := complex(spin, 0) * mode.Omega
	north, err := kerr.Spheroidal(l, m, gamma, iota)
	if err != nil {
		t.Fatal(err)
	}
	south, err := kerr.Spheroidal(l, m, gamma, math.Pi-iota)
	if err != nil {
		t.Fatal(err)
	}
	scale := mass * constants.SolarMassSeconds
	return func(at float64) (float64, float64) {
		e := cmplx.Exp(complex(0, -at/scale) * mode.Omega)
		h := c*north*e + cmplx.Conj(c*south*e)
		return real(h), -imag(h)
	}
}

// The transform is the FFT of the sampled time series in the limit of a high
// rate: sampled with half weight at t = 0 (trapezoidal rule), the error is
// (omega dt)^2 / 12 of the largest value.
func TestTransformIsTheFFT(t *testing.T) {
	const (
		n        = 1 << 20
		duration = 1.0
		dt       = duration / n
	)
	for _, tc := range []struct {
		mode       string
		l, m, n    int
		spin, iota float64
		phase      float64
	}{
		{"2,2,0", 2, 2, 0, 0.69, 0.4, 0.3},
		{"2,2,1", 2, 2, 1, 0.69, 2.2, 5.1},
		{"2,-2,0", 2, -2, 0, 0.5, 0.9, 1.0},
		{"3,3,0", 3, 3, 0, 0.9, 1.2, 2.0},
		{"2,0,0", 2, 0, 0, 0.3, 1.0, 4.0},
	} {
		t.Run(tc.mode, func(t *testing.T) {
			const mass, amplitude = 68.0, 1e-21
			grid := Grid{First: 20, Count: 1000, Step: 1 / duration}
			model, err := New(Settings{Model: "ringdown", Modes: []string{tc.mode}, Grid: grid, Inclination: tc.iota})
			if err != nil {
				t.Fatal(err)
			}
			h := NewPolarizations(grid.Count)
			if err := model.Fill([]float64{mass, tc.spin, 0, amplitude, tc.phase}, h); err != nil {
				t.Fatal(err)
			}
			series := timeDomain(t, tc.l, tc.m, tc.n, mass, tc.spin, tc.iota, cmplx.Rect(amplitude, tc.phase))
			plus, cross := make([]float64, n), make([]float64, n)
			for j := range plus {
				plus[j], cross[j] = series(float64(j) * dt)
			}
			plus[0], cross[0] = plus[0]/2, cross[0]/2
			fft := fourier.NewFFT(n)
			fp, fc := fft.Coefficients(nil, plus), fft.Coefficients(nil, cross)
			largest := 0.0
			for j := range grid.Count {
				largest = max(largest, cmplx.Abs(complex(h.PlusRe[j], h.PlusIm[j])), cmplx.Abs(complex(h.CrossRe[j], h.CrossIm[j])))
			}
			// omega < 6000 rad/s at these modes and frequencies.
			tol := math.Pow(6500*dt, 2) / 12 * largest * 2
			for j := range grid.Count {
				k := grid.First + j
				if d := cmplx.Abs(complex(h.PlusRe[j], h.PlusIm[j]) - fp[k]*dt); !(d <= tol) {
					t.Fatalf("plus at %d Hz: %v, FFT %v", k, complex(h.PlusRe[j], h.PlusIm[j]), fp[k]*dt)
				}
				if d := cmplx.Abs(complex(h.CrossRe[j], h.CrossIm[j]) - fc[k]*dt); !(d <= tol) {
					t.Fatalf("cross at %d Hz: %v, FFT %v", k, complex(h.CrossRe[j], h.CrossIm[j]), fc[k]*dt)
				}
			}
		})
	}
}

// Seen along the spin, m = 2 is circular: h+ - i hx = A exp(-i omega t), so at
// positive frequency the transform of hx is -i times that of h+ where the mode
// resonates; seen from below the handedness is the other one.
func TestChirality(t *testing.T) {
	grid := Grid{First: 240, Count: 20, Step: 1}
	for _, tc := range []struct {
		iota float64
		want complex128
	}{{0, -1i}, {math.Pi, 1i}} {
		model, err := New(Settings{Model: "ringdown", Modes: []string{"2,2,0"}, Grid: grid, Inclination: tc.iota})
		if err != nil {
			t.Fatal(err)
		}
		h := NewPolarizations(grid.Count)
		if err := model.Fill([]float64{68, 0.69, 0, 1e-21, 1}, h); err != nil {
			t.Fatal(err)
		}
		plus, cross := complex(h.PlusRe[10], h.PlusIm[10]), complex(h.CrossRe[10], h.CrossIm[10])
		// The tail from negative frequency is about gamma / 2 omega = 8 % here.
		if d := cmplx.Abs(cross/plus - tc.want); d > 0.2 {
			t.Errorf("inclination %g: hx/h+ = %v, want near %v", tc.iota, cross/plus, tc.want)
		}
	}
}

func TestStartTimeDelays(t *testing.T) {
	grid := Grid{First: 100, Count: 300, Step: 0.5}
	model, err := New(Settings{Model: "ringdown", Modes: []string{"2,2,0"}, Grid: grid, Inclination: 1, Start: 0.003})
	if err != nil {
		t.Fatal(err)
	}
	now, late := NewPolarizations(grid.Count), NewPolarizations(grid.Count)
	theta := []float64{68, 0.69, 0.003, 1e-21, 1}
	if err := model.Fill(theta, now); err != nil {
		t.Fatal(err)
	}
	theta[2] = 0.0105
	if err := model.Fill(theta, late); err != nil {
		t.Fatal(err)
	}
	for j := range grid.Count {
		turn := cmplx.Exp(complex(0, -2*math.Pi*grid.Frequency(j)*0.0075))
		want := complex(now.PlusRe[j], now.PlusIm[j]) * turn
		if got := complex(late.PlusRe[j], late.PlusIm[j]); cmplx.Abs(got-want) > 1e-12*cmplx.Abs(want) {
			t.Fatalf("at %g Hz: %v, want %v", grid.Frequency(j), got, want)
		}
	}
}

func TestSettingsAreChecked(t *testing.T) {
	grid := Grid{First: 100, Count: 10, Step: 1}
	for _, tc := range []struct {
		s   Settings
		key string
	}{
		{Settings{Model: "wave", Modes: []string{"2,2,0"}}, "model"},
		{Settings{Model: "ringdown"}, "modes"},
		{Settings{Model: "ringdown", Modes: []string{"2,2"}}, "modes"},
		{Settings{Model: "ringdown", Modes: []string{"2,x,0"}}, "modes"},
		{Settings{Model: "ringdown", Modes: []string{"2,3,0"}}, "modes"},
		{Settings{Model: "ringdown", Modes: []string{"9,2,0"}}, "modes"},
		{Settings{Model: "ringdown", Modes: []string{"2,2,0", "2, 2, 0"}}, "modes"},
		{Settings{Model: "ringdown", Modes: []string{"2,2,0"}, Reflectivity: "constant"}, "reflectivity"},
		{Settings{Model: "ringdown", Modes: []string{"2,2,0"}, Excitation: "barrier"}, "excitation"},
		{Settings{Model: "ringdown", Modes: []string{"2,2,0"}, Angular: "flat"}, "angular"},
		{Settings{Model: "cavity", Modes: []string{"2,2,0"}, Reflectivity: "constant", Angular: "flat"}, "angular"},
		{Settings{Model: "cavity", Modes: []string{"2,2,0"}}, "reflectivity"},
		{Settings{Model: "cavity", Modes: []string{"2,2,0"}, Reflectivity: "mirror"}, "reflectivity"},
		{Settings{Model: "cavity", Modes: []string{"2,2,0"}, Reflectivity: "constant", Excitation: "hammer"}, "excitation"},
		{Settings{Model: "cavity", Modes: []string{"2,2,0"}, Reflectivity: "constant", Parity: "both"}, "parity"},
	} {
		tc.s.Grid, tc.s.Length = grid, 1
		_, err := New(tc.s)
		s, ok := err.(*SettingError)
		if !ok || s.Key != tc.key {
			t.Errorf("%+v: %v, want a complaint about %s", tc.s, err, tc.key)
		}
	}
}

func TestTurnsStayOnTheCircle(t *testing.T) {
	const offset, step, first, n = 0.4, -0.7731, 120.25, 32 * 1024
	cos, sin := make([]float64, n), make([]float64, n)
	fillTurns(offset, step, first, cos, sin)
	for j := range n {
		angle := offset + step*(first+float64(j))
		wantS, wantC := math.Sincos(angle)
		// The angle itself is rounded, in fillTurns and here.
		tol := 0x1p-53 * (64 + 4*math.Abs(angle))
		if math.Abs(cos[j]-wantC) > tol || math.Abs(sin[j]-wantS) > tol {
			t.Fatalf("step %d: (%.17g, %.17g), want (%.17g, %.17g)", j, cos[j], sin[j], wantC, wantS)
		}
	}
}

func ExampleParseMode() {
	fmt.Println(ParseMode("2,-2,1"))
	// Output: 2 -2 1 <nil>
}

// Spherical factors are -2Y_lm(iota, 0) whatever the spin.
func TestSphericalFactors(t *testing.T) {
	// -2Y_22 and -2Y_21 as printed in arXiv:0709.0093, eqs. II.9-II.13.
	for _, tc := range []struct {
		mode string
		y    func(iota float64) float64
	}{
		{"2,2,0", func(i float64) float64 { return math.Sqrt(5/(64*math.Pi)) * math.Pow(1+math.Cos(i), 2) }},
		{"2,1,0", func(i float64) float64 {
			return math.Sqrt(5/(16*math.Pi)) * math.Sin(i) * (1 + math.Cos(i))
		}},
		{"2,-2,0", func(i float64) float64 { return math.Sqrt(5/(64*math.Pi)) * math.Pow(1-math.Cos(i), 2) }},
	} {
		for _, spin := range []float64{0, 0.69, 0.95} {
			const iota, amplitude, phase, mass = 0.8, 1e-21, 1.3, 68.0
			r, err := newRinging([]string{tc.mode}, iota, "spherical")
			if err != nil {
				t.Fatal(err)
			}
			w, err := r.wave(0, mass, spin, amplitude, phase)
			if err != nil {
				t.Fatal(err)
			}
			c := cmplx.Rect(amplitude, phase)
			north, south := complex(tc.y(iota), 0), complex(tc.y(math.Pi-iota), 0)
			if d := cmplx.Abs(w.p - c*(north+south)); !(d <= 1e-14*amplitude) {
				t.Errorf("%s at spin %g: p = %v, want %v", tc.mode, spin, w.p, c*(north+south))
			}
			if d := cmplx.Abs(w.x - 1i*c*(north-south)); !(d <= 1e-14*amplitude) {
				t.Errorf("%s at spin %g: x = %v, want %v", tc.mode, spin, w.x, 1i*c*(north-south))
			}
		}
	}
}
