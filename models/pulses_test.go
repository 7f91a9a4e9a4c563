package models

import (
	"fmt"
	"math"
	"math/cmplx"
	"math/rand/v2"
	"testing"

	"gonum.org/v1/gonum/dsp/fourier"

	"knell/internal/checktable"
)

// pulsesTheta is one mode with mass 68, spin 0.69 and a start at 0; then delay,
// spacing ratio, amplitude, damping, turn and rise.
func pulsesTheta(own ...float64) []float64 {
	return append([]float64{68, 0.69, 0, 1e-21, 1.1}, own...)
}

func mustEqual(t *testing.T, what string, got, want *Polarizations) {
	t.Helper()
	for j := range want.PlusRe {
		if got.PlusRe[j] != want.PlusRe[j] || got.PlusIm[j] != want.PlusIm[j] || got.CrossRe[j] != want.CrossRe[j] || got.CrossIm[j] != want.CrossIm[j] {
			t.Fatalf("%s: differs at bin %d", what, j)
		}
	}
}

func TestPulsesWithoutCopiesAreTheRingdown(t *testing.T) {
	s := Settings{Modes: []string{"2,2,0", "3,3,0"}, Grid: Grid{First: 60, Count: 1500, Step: 0.5}, Inclination: 0.6, Length: 1.75, Start: 0.002}
	for _, lead := range []float64{0, 0.25} {
		for _, angular := range []string{"", "spherical"} {
			s.Lead, s.Angular = lead, angular
			ring := []float64{68, 0.69, 0.001, 1e-21, 1.1, 2e-21, 3}
			s.Model = "ringdown"
			want := fill(t, newTestModel(t, s), ring, s.Grid.Count)
			s.Model = "pulses"
			m := newTestModel(t, s)
			mustEqual(t, "amplitude 0", fill(t, m, append(ring[:7:7], 0.1, 1, 0, 0.5, math.Pi, 1e-3), s.Grid.Count), want)
			mustEqual(t, "first copy after the data", fill(t, m, append(ring[:7:7], 1.8, 1, 0.7, 0.5, math.Pi, 1e-3), s.Grid.Count), want)
			if h := fill(t, m, append(ring[:7:7], 1.7, 1, 0.7, 0.5, math.Pi, 1e-3), s.Grid.Count); h.PlusRe[300] == want.PlusRe[300] {
				t.Error("a copy within the data changes nothing: this test sees nothing")
			}
			ring[2] += 0.06
			s.Model = "ringdown"
			want = fill(t, newTestModel(t, s), ring, s.Grid.Count)
			mustEqual(t, "a late start puts the first copy after the data", fill(t, m, append(ring[:7:7], 1.7, 1, 0.7, 0.5, math.Pi, 1e-3), s.Grid.Count), want)
		}
	}
}

// The spectrum is the FFT of the sampled sum of copies, written out in time, in
// the limit of a high rate. The trapezoidal rule errs by (omega dt)^2 / 12 of the
// largest value; the sample at a jump counts half.
func TestPulsesAreTheFFT(t *testing.T) {
	const (
		n        = 1 << 20
		duration = 1.0
		dt       = duration / n
		mass     = 68.0
		length   = 0.4
	)
	for _, tc := range []struct {
		name    string
		l, m, n int
		mode    string
		own     []float64
		arrive  []float64 // in samples
	}{
		{"flipped, sharp", 2, 2, 0, "2,2,0", []float64{dt * 100000, 1, 0.8, 0.6, math.Pi, 0}, []float64{100000, 200000, 300000, 400000}},
		{"turned, smooth", 2, 2, 1, "2,2,1", []float64{dt * 100000, 0.5, 0.8, 1, 1.3, 2e-3}, []float64{100000, 150000, 200000, 250000, 300000, 350000, 400000}},
		{"counter-rotating", 3, -3, 0, "3,-3,0", []float64{dt * 300000, 2, 1.5, 0.3, 5, 1e-4}, []float64{300000}},
		{"slow rise", 2, 2, 0, "2,2,0", []float64{dt * 100000, 1, 40, 0, 0, 0.1}, []float64{100000}},
	} {
		t.Run(tc.name, func(t *testing.T) {
			const iota, amplitude, phase, spin = 0.7, 1e-21, 0.9, 0.6
			grid := Grid{First: 20, Count: 1000, Step: 1 / duration}
			model := newTestModel(t, Settings{Model: "pulses", Modes: []string{tc.mode}, Grid: grid, Inclination: iota, Length: length})
			h := fill(t, model, append([]float64{mass, spin, 0, amplitude, phase}, tc.own...), grid.Count)
			plus, cross := make([]float64, n), make([]float64, n)
			place := func(c complex128, first int, rise float64) {
				series := timeDomain(t, tc.l, tc.m, tc.n, mass, spin, iota, c)
				for j := first; j < n; j++ {
					at := float64(j-first) * dt
					factor := 1.0
					if rise > 0 {
						factor = math.Pow(1-math.Exp(-at/rise), 2)
					} else if j == first {
						factor = 0.5
					}
					p, x := series(at)
					plus[j] += factor * p
					cross[j] += factor * x
					if at > 0.2 {
						break // below exp(-40)
					}
				}
			}
			c := cmplx.Rect(amplitude, phase)
			place(c, 0, 0)
			for i, arrive := range tc.arrive {
				factor := cmplx.Rect(tc.own[2]*math.Pow(tc.own[3], float64(i)), float64(i+1)*tc.own[4])
				place(c*factor, int(arrive), tc.own[5])
			}
			fft := fourier.NewFFT(n)
			fp, fc := fft.Coefficients(nil, plus), fft.Coefficients(nil, cross)
			largest := 0.0
			for j := range grid.Count {
				largest = max(largest, cmplx.Abs(complex(h.PlusRe[j], h.PlusIm[j])), cmplx.Abs(complex(h.CrossRe[j], h.CrossIm[j])))
			}
			// omega < 6500 rad/s at these modes and frequencies, over at most 8 pulses.
			tol := math.Pow(6500*dt, 2) / 12 * largest * 8
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

// inTime returns h+ and hx at n samples per segment, with t = 0 a quarter of the
// segment in. The window cos^8 over the whole band up to half the rate takes away
// its edge; its kernel falls below 1e-7 eight samples off. The missing zero
// frequency is restored by making the first eighth of the segment zero on average.
func inTime(t *testing.T, s Settings, theta []float64) (plus, cross []float64) {
	t.Helper()
	grid := s.Grid
	n := 2 * (grid.Count + 1)
	h := fill(t, newTestModel(t, s), theta, grid.Count)
	back := func(re, im []float64) []float64 {
		c := make([]complex128, n/2+1)
		for j := range grid.Count {
			k := grid.First + j
			window := math.Pow(math.Cos(math.Pi*float64(k)/float64(n)), 8)
			turn := cmplx.Rect(window*grid.Step, -2*math.Pi*float64(k)/4)
			c[k] = complex(re[j], im[j]) * turn
		}
		x := fourier.NewFFT(n).Sequence(nil, c)
		mean := 0.0
		for _, v := range x[:n/8] {
			mean += v / float64(n/8)
		}
		for i := range x {
			x[i] -= mean
		}
		return x
	}
	return back(h.PlusRe, h.PlusIm), back(h.CrossRe, h.CrossIm)
}

// wholeGrid is every frequency of a segment but zero and half the rate.
func wholeGrid(duration float64, n int) Grid {
	return Grid{First: 1, Count: n/2 - 1, Step: 1 / duration}
}

// energyBefore is the share of the energy that lies before sample end.
func energyBefore(x []float64, end int) float64 {
	before, all := 0.0, 0.0
	for i, v := range x {
		all += v * v
		if i < end {
			before += v * v
		}
	}
	return before / all
}

func TestPhysicsPulses(t *testing.T) {
	table := checktable.New(t, "copies of the ringdown, by correlation with it in the inverse FFT at 16384 Hz")
	const duration, n = 2.0, 1 << 15
	const rate = n / duration
	s := Settings{Model: "pulses", Modes: []string{"2,2,0"}, Grid: wholeGrid(duration, n), Inclination: 0.4, Length: 1.4}
	s.Model = "ringdown"
	ring, _ := inTime(t, s, pulsesTheta())
	s.Model = "pulses"
	const delay, ratio, amplitude, damping = 0.2937, 0.8, 0.7, 0.6
	for _, rise := range []float64{0, 2e-3} {
		theta := pulsesTheta(delay, ratio, amplitude, damping, math.Pi, rise)
		all, cross := inTime(t, s, theta)
		for _, x := range [][]float64{all, cross} {
			if share := energyBefore(x, n/4-8); share > 1e-6 {
				t.Errorf("rise %g: %.1e of the energy comes before the start", rise, share)
			}
		}
		copies := make([]float64, n)
		for i := range copies {
			copies[i] = all[i] - ring[i]
		}
		if share := energyBefore(copies, n/4+int(theta[5]*rate)-8); share > 1e-6 {
			t.Errorf("rise %g: %.1e of the copies' energy comes before the first", rise, share)
		}
		if rise > 0 {
			continue
		}
		// A copy is where the correlation with the ringdown is largest.
		const wide = 600
		for k := range 4 {
			want := delay * (1 + float64(k)*ratio) * rate
			best, at := 0.0, 0
			for lag := int(want) - 300; lag < int(want)+300; lag++ {
				sum := 0.0
				for i := n/4 - 20; i < n/4+wide; i++ {
					sum += ring[i] * copies[i+lag]
				}
				if math.Abs(sum) > math.Abs(best) {
					best, at = sum, lag
				}
			}
			norm := 0.0
			for i := n/4 - 20; i < n/4+wide; i++ {
				norm += ring[i] * ring[i]
			}
			table.Absolute(fmt.Sprintf("copy %d: arrival (samples)", k+1), float64(at), want, 1, "delay (1 + (n-1) ratio)")
			// The largest correlation over whole samples is within (omega dt / 2)^2 / 2
			// = 0.2 % of the true one.
			factor := amplitude * math.Pow(-damping, float64(k)) * -1
			table.Relative(fmt.Sprintf("copy %d: factor, every other one flipped", k+1), best/norm, factor, 5e-3, "amplitude damping^(n-1) (-1)^n")
		}
	}
}

// A segment twice as long holds the same signal in its first half.
func TestPulsesDoNotWrapAround(t *testing.T) {
	const n = 1 << 14
	// One copy every 0.1 s of which none is quieter than the one before; mean-free
	// signal, so that the missing zero frequency of the two segments agrees.
	at := func(duration float64, n int) []float64 {
		s := Settings{Model: "pulses", Modes: []string{"2,2,0"}, Grid: wholeGrid(duration, n), Inclination: 0.4, Length: 0.75*duration - 0.1}
		x, _ := inTime(t, s, pulsesTheta(0.1003, 1, 1, 1, math.Pi, 1e-3))
		return x
	}
	short, long := at(2, n), at(4, 2*n)
	largest := 0.0
	for i := range n / 4 * 3 {
		largest = max(largest, math.Abs(short[i]))
	}
	// t = 0 stands at n/4 and 2n/4. The short segment's last copy begins 0.1 s or
	// more before its end: 0.21 s are 1720 samples.
	for i := n/4 - 100; i < n-1720; i++ {
		if d := math.Abs(short[i] - long[i+n/4]); d > 1e-6*largest {
			t.Fatalf("at %.4f s the segment's length changes the signal by %.2g of its peak", float64(i-n/4)/(n/2), d/largest)
		}
	}
}

func TestPulsesDerive(t *testing.T) {
	m := newTestModel(t, Settings{Model: "pulses", Modes: []string{"2,2,0"}, Grid: Grid{First: 60, Count: 10, Step: 1}, Length: 1})
	derived := m.Derived()
	out := make([]float64, len(derived))
	if err := m.Derive(pulsesTheta(0.3, 0.8, 0.5, 0.5, math.Pi, 0), out); err != nil {
		t.Fatal(err)
	}
	if derived[2].Name != "echo_delay" || math.Abs(out[2]-0.24) > 1e-15 {
		t.Errorf("%s = %g, want 0.24 s", derived[2].Name, out[2])
	}
}

// checkFamily draws parameters over the whole domain and wants finite spectra, no
// allocation, and clones that do not touch one another.
func checkFamily(t *testing.T, s Settings) {
	t.Helper()
	m := newTestModel(t, s)
	rng := rand.New(rand.NewPCG(3, 14))
	draw := func() []float64 {
		theta := make([]float64, len(m.Parameters()))
		for i, p := range m.Parameters() {
			switch u := rng.Float64(); {
			case rng.IntN(8) == 0:
				theta[i] = p.Low
			case rng.IntN(8) == 0:
				theta[i] = p.High
			case p.Low > 0 && p.High > 100*p.Low:
				theta[i] = p.Low * math.Pow(p.High/p.Low, u)
			default:
				theta[i] = p.Low + u*(p.High-p.Low)
			}
		}
		return theta
	}
	h := NewPolarizations(s.Grid.Count)
	out := make([]float64, len(m.Derived()))
	loud := 0
	for range 3000 {
		theta := draw()
		if err := m.Fill(theta, h); err != nil {
			t.Fatalf("%v: %v", theta, err)
		}
		if err := m.Derive(theta, out); err != nil {
			t.Fatalf("%v: %v", theta, err)
		}
		sum := 0.0
		for _, list := range [][]float64{h.PlusRe, h.PlusIm, h.CrossRe, h.CrossIm, out} {
			for j, v := range list {
				if math.IsNaN(v) || math.IsInf(v, 0) {
					t.Fatalf("%v: %g at %d", theta, v, j)
				}
				sum += math.Abs(v)
			}
		}
		if sum > 0 {
			loud++
		}
	}
	if loud == 0 {
		t.Error("no signal at all: this test sees nothing")
	}

	theta, other := draw(), draw()
	want := fill(t, m, theta, s.Grid.Count)
	twin := m.Clone()
	done := make(chan error)
	go func() {
		scratch := NewPolarizations(s.Grid.Count)
		var err error
		for range 200 {
			if err == nil {
				err = twin.Fill(other, scratch)
			}
		}
		done <- err
	}()
	for range 200 {
		if err := m.Fill(theta, h); err != nil {
			t.Fatal(err)
		}
		mustEqual(t, "a clone at work changes the model", h, want)
	}
	if err := <-done; err != nil {
		t.Fatal(err)
	}
	mustEqual(t, "a clone is another model", fill(t, twin, theta, s.Grid.Count), want)
	if n := testing.AllocsPerRun(10, func() {
		if err := m.Fill(theta, h); err != nil {
			t.Fatal(err)
		}
	}); n != 0 {
		t.Errorf("Fill allocates %g times", n)
	}
}

func TestPulsesAnywhere(t *testing.T) {
	checkFamily(t, Settings{Model: "pulses", Modes: []string{"2,2,0", "2,-2,1"}, Grid: Grid{First: 10, Count: 200, Step: 4}, Inclination: 2, Length: 2, Lead: 0.2})
}

func TestFamiliesCheckSettings(t *testing.T) {
	mode := []string{"2,2,0"}
	for _, tc := range []struct {
		s   Settings
		key string
	}{
		{Settings{Model: "ringdown", Modes: mode, Count: 2}, "count"},
		{Settings{Model: "cavity", Modes: mode, Reflectivity: "constant", Count: 1}, "count"},
		{Settings{Model: "pulses"}, "modes"},
		{Settings{Model: "pulses", Modes: []string{"2,2"}}, "modes"},
		{Settings{Model: "pulses", Modes: mode, Angular: "flat"}, "angular"},
		{Settings{Model: "pulses", Modes: mode, Reflectivity: "constant"}, "reflectivity"},
		{Settings{Model: "pulses", Modes: mode, Parity: "odd"}, "parity"},
		{Settings{Model: "pulses", Modes: mode, Excitation: "barrier"}, "excitation"},
		{Settings{Model: "pulses", Modes: mode, Count: 3}, "count"},
		{Settings{Model: "comb", Angular: "spherical"}, "angular"},
		{Settings{Model: "comb", Modes: mode, Angular: "flat"}, "angular"},
		{Settings{Model: "comb", Modes: []string{"2,2,0", "2,2,0"}}, "modes"},
		{Settings{Model: "comb", Reflectivity: "constant"}, "reflectivity"},
		{Settings{Model: "comb", Parity: "odd"}, "parity"},
		{Settings{Model: "comb", Excitation: "barrier"}, "excitation"},
		{Settings{Model: "comb", Count: 3}, "count"},
		{Settings{Model: "burst"}, "count"},
		{Settings{Model: "burst", Count: -1}, "count"},
		{Settings{Model: "burst", Count: MaxPackets + 1}, "count"},
		{Settings{Model: "burst", Count: 1, Modes: mode}, "modes"},
		{Settings{Model: "burst", Count: 1, Reflectivity: "constant"}, "reflectivity"},
		{Settings{Model: "burst", Count: 1, Parity: "odd"}, "parity"},
		{Settings{Model: "burst", Count: 1, Excitation: "barrier"}, "excitation"},
		{Settings{Model: "burst", Count: 1, Angular: "spherical"}, "angular"},
	} {
		_, err := Describe(tc.s)
		s, ok := err.(*SettingError)
		if !ok || s.Key != tc.key || s.Got == "" || s.Want == "" {
			t.Errorf("%+v: %v, want a complaint about %s", tc.s, err, tc.key)
		}
	}
}

func BenchmarkFillPulses(b *testing.B) {
	grid := Grid{First: 120, Count: 3481, Step: 0.25}
	for _, tc := range []struct {
		name  string
		modes []string
		theta []float64
	}{
		{"flipped", []string{"2,2,0"}, pulsesTheta(0.29, 1, 0.5, 0.8, math.Pi, 1e-3)},
		{"turned", []string{"2,2,0"}, pulsesTheta(0.29, 1, 0.5, 0.8, 1, 1e-3)},
		{"turned two modes", []string{"2,2,0", "2,2,1"}, []float64{68, 0.69, 0, 1e-21, 1, 1e-21, 2, 0.29, 1, 0.5, 0.8, 1, 1e-3}},
	} {
		b.Run(tc.name, func(b *testing.B) {
			m := newTestModel(b, Settings{Model: "pulses", Modes: tc.modes, Grid: grid, Inclination: 0.4, Length: 3.75})
			benchmarkFamily(b, m, tc.theta, grid.Count)
		})
	}
}

func benchmarkFamily(b *testing.B, m Model, theta []float64, n int) {
	h := NewPolarizations(n)
	b.ReportAllocs()
	for b.Loop() {
		if err := m.Fill(theta, h); err != nil {
			b.Fatal(err)
		}
	}
	b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(b.N*n), "ns/bin")
}
