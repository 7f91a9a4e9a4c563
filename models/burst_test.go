package models

import (
	"math"
	"math/cmplx"
	"math/rand/v2"
	"testing"

	"gonum.org/v1/gonum/dsp/fourier"

	"knell/internal/checktable"
)

// packet is amplitude, phase, time, frequency, width, ellipticity, orientation.
type packet [7]float64

// at returns h+ and hx of the packet at t, from its definition.
func (p packet) at(t float64) (plus, cross float64) {
	e := cmplx.Rect(p[0]*math.Exp(-math.Pow((t-p[2])/p[4], 2)/2), p[1]-2*math.Pi*p[3]*(t-p[2]))
	// The ellipse's axes are along plus and cross: Re e and Re (i ellipticity e).
	h := complex(real(e), p[5]*imag(e))
	h *= cmplx.Rect(1, -2*p[6])
	return real(h), -imag(h)
}

func thetaOf(packets ...packet) []float64 {
	var theta []float64
	for _, p := range packets {
		theta = append(theta, p[:]...)
	}
	return theta
}

func TestBurstWithoutAmplitudeIsNothing(t *testing.T) {
	s := Settings{Model: "burst", Count: 2, Grid: Grid{First: 10, Count: 500, Step: 1}}
	m := newTestModel(t, s)
	a, b := packet{0, 1, 0.1, 200, 0.01, 0.5, 1}, packet{0, 2, 0.2, 100, 0.02, -1, 1.2}
	mustEqual(t, "amplitude 0", fill(t, m, thetaOf(a, b), s.Grid.Count), NewPolarizations(s.Grid.Count))
	// A packet without amplitude leaves the other alone.
	a[0] = 1e-21
	two := fill(t, m, thetaOf(b, a), s.Grid.Count)
	s.Count = 1
	one := fill(t, newTestModel(t, s), thetaOf(a), s.Grid.Count)
	mustEqual(t, "one of two", two, one)
	if one.PlusRe[190] == 0 {
		t.Error("an amplitude changes nothing: this test sees nothing")
	}
}

// The spectrum is the FFT of the sampled packets. Sampled above twice its highest
// frequency, a Gaussian loses nothing but rounding.
func TestBurstIsTheFFT(t *testing.T) {
	const (
		n        = 1 << 14
		duration = 2.0
		dt       = duration / n
		start    = 0.003 // of the analysis, after the event time
		before   = 0.5   // of the segment, before the start
	)
	packets := []packet{
		{1e-21, 0.4, 0.1, 200, 0.02, 0.3, 0.5},
		{2e-21, 5, 0.5, 35, 0.01, -1, 1.5},
		{5e-22, 2, 0.303, 0, 0.004, 0, 1.2}, // no oscillation at all
		{3e-21, 3, -0.05, 700, 0.001, 1, 0},
	}
	grid := Grid{First: 1, Count: n/2 - 1, Step: 1 / duration}
	m := newTestModel(t, Settings{Model: "burst", Count: len(packets), Grid: grid, Start: start})
	h := fill(t, m, thetaOf(packets...), grid.Count)
	plus, cross := make([]float64, n), make([]float64, n)
	for j := range plus {
		for _, p := range packets {
			a, b := p.at(float64(j)*dt - before + start)
			plus[j] += a
			cross[j] += b
		}
	}
	fft := fourier.NewFFT(n)
	fp, fc := fft.Coefficients(nil, plus), fft.Coefficients(nil, cross)
	largest := 0.0
	for j := range grid.Count {
		largest = max(largest, cmplx.Abs(complex(h.PlusRe[j], h.PlusIm[j])))
	}
	for j := range grid.Count {
		turn := cmplx.Rect(dt, 2*math.Pi*grid.Frequency(j)*before)
		if d := cmplx.Abs(complex(h.PlusRe[j], h.PlusIm[j]) - fp[j+1]*turn); !(d <= 1e-12*largest) {
			t.Fatalf("plus at %g Hz: %v, FFT %v", grid.Frequency(j), complex(h.PlusRe[j], h.PlusIm[j]), fp[j+1]*turn)
		}
		if d := cmplx.Abs(complex(h.CrossRe[j], h.CrossIm[j]) - fc[j+1]*turn); !(d <= 1e-12*largest) {
			t.Fatalf("cross at %g Hz: %v, FFT %v", grid.Frequency(j), complex(h.CrossRe[j], h.CrossIm[j]), fc[j+1]*turn)
		}
	}
}

// Time, frequency and width from the moments of the energy.
func TestPhysicsBurstMoments(t *testing.T) {
	table := checktable.New(t, "moments of a wave packet's energy, from its spectrum and its inverse FFT")
	const source = "the packet's definition"
	const duration, n = 2.0, 1 << 14
	const time, frequency, width, start = 0.2, 180.0, 0.015, 0.05
	s := Settings{Model: "burst", Count: 1, Grid: wholeGrid(duration, n), Start: start}
	h := fill(t, newTestModel(t, s), thetaOf(packet{1, 1, time, frequency, width, 1, 0}), s.Grid.Count)
	moments := func(weight func(int) float64, x func(int) float64, count int) (mean, deviation float64) {
		var w, s1, s2 float64
		for i := range count {
			w += weight(i)
			s1 += weight(i) * x(i)
			s2 += weight(i) * x(i) * x(i)
		}
		return s1 / w, math.Sqrt(s2/w - s1*s1/(w*w))
	}
	mean, deviation := moments(func(j int) float64 { return h.PlusRe[j]*h.PlusRe[j] + h.PlusIm[j]*h.PlusIm[j] }, s.Grid.Frequency, s.Grid.Count)
	// The energy is the square: a Gaussian of 1/(2 pi width sqrt 2) in frequency.
	table.Absolute("mean frequency (Hz)", mean, frequency, 1e-6, source)
	table.Relative("deviation in frequency (Hz)", deviation, 1/(2*math.Sqrt2*math.Pi*width), 1e-4, source)
	// With the window of inTime the mean frequency moves, the time and width hardly.
	plus, cross := inTime(t, s, thetaOf(packet{1, 1, time, frequency, width, 1, 0}))
	mean, deviation = moments(func(i int) float64 { return plus[i]*plus[i] + cross[i]*cross[i] }, func(i int) float64 { return float64(i)*duration/n - duration/4 + start }, n)
	table.Absolute("mean time (s)", mean, time, 1e-6, source)
	table.Relative("deviation in time (s)", deviation, width/math.Sqrt2, 2e-3, source)
}

// At ellipticity 1 the handedness is that of an m = 2 mode from above, at -1 that
// from below, at 0 the polarisation is linear along the orientation.
func TestBurstEllipticity(t *testing.T) {
	s := Settings{Model: "burst", Count: 1, Grid: Grid{First: 63, Count: 1, Step: 4}}
	m := newTestModel(t, s)
	ratio := func(h *Polarizations) complex128 {
		return complex(h.CrossRe[0], h.CrossIm[0]) / complex(h.PlusRe[0], h.PlusIm[0])
	}
	for _, tc := range []struct{ ellipticity, iota float64 }{{1, 0}, {-1, math.Pi}} {
		got := ratio(fill(t, m, thetaOf(packet{1, 0.7, 0, 252, 0.02, tc.ellipticity, 1}), 1))
		if want := complex(0, -tc.ellipticity); cmplx.Abs(got-want) > 1e-12 {
			t.Errorf("ellipticity %g: hx/h+ = %v, want %v", tc.ellipticity, got, want)
		}
		r := Settings{Model: "ringdown", Modes: []string{"2,2,0"}, Grid: s.Grid, Inclination: tc.iota}
		mode := ratio(fill(t, newTestModel(t, r), []float64{68, 0.69, 0, 1, 0.7}, 1))
		// The tail of a mode from negative frequency is about 8 %.
		if cmplx.Abs(got-mode) > 0.2 {
			t.Errorf("ellipticity %g: hx/h+ = %v, that of a mode %v", tc.ellipticity, got, mode)
		}
	}
	for _, orientation := range []float64{0, 0.3, 1.2} {
		got := ratio(fill(t, m, thetaOf(packet{1, 0.7, 0, 252, 0.02, 0, orientation}), 1))
		// h+ - i hx = exp(-2 i orientation) h.
		if want := math.Tan(2 * orientation); cmplx.Abs(got-complex(want, 0)) > 1e-12*math.Abs(want)+1e-15 {
			t.Errorf("orientation %g: hx/h+ = %v, want %g", orientation, got, want)
		}
	}
}

// Any pair of responses in two sites is within reach, also one that is zero.
func TestBurstReachesAnyPairOfResponses(t *testing.T) {
	rng := rand.New(rand.NewPCG(1, 2))
	s := Settings{Model: "burst", Count: 1, Grid: Grid{First: 500, Count: 1, Step: 1}}
	m := newTestModel(t, s)
	const width = 0.02
	for i := range 200 {
		var f [2][2]float64 // response of each site to plus and cross
		var want [2]complex128
		for k := range 2 {
			f[k] = [2]float64{2*rng.Float64() - 1, 2*rng.Float64() - 1}
			want[k] = complex(0.02*rng.Float64()-0.01, 0.02*rng.Float64()-0.01)
		}
		if i%2 == 0 {
			want[1] = 0
		}
		det := f[0][0]*f[1][1] - f[0][1]*f[1][0]
		if math.Abs(det) < 0.05 {
			continue
		}
		// Amplitudes P and X with h+ = Re(P e), hx = Re(X e) that give them.
		p := (want[0]*complex(f[1][1], 0) - want[1]*complex(f[0][1], 0)) / complex(det, 0)
		x := (want[1]*complex(f[0][0], 0) - want[0]*complex(f[1][0], 0)) / complex(det, 0)
		// P -+ iX = C (1 +- ellipticity) exp(-+ 2 i orientation).
		a, b := p-1i*x, p+1i*x
		turn := func(angle, period float64) float64 { return angle - period*math.Floor(angle/period) }
		theta := thetaOf(packet{
			(cmplx.Abs(a) + cmplx.Abs(b)) / 2, turn((cmplx.Phase(a)+cmplx.Phase(b))/2, 2*math.Pi), 0, 500, width,
			(cmplx.Abs(a) - cmplx.Abs(b)) / (cmplx.Abs(a) + cmplx.Abs(b)), turn((cmplx.Phase(b)-cmplx.Phase(a))/4, math.Pi),
		})
		// A quarter turn more is the opposite sign.
		if theta[6] > math.Pi/2 {
			theta[6] -= math.Pi / 2
			theta[1] = turn(theta[1]+math.Pi, 2*math.Pi)
		}
		h := fill(t, m, theta, 1)
		for k := range 2 {
			got := complex(f[k][0]*h.PlusRe[0]+f[k][1]*h.CrossRe[0], f[k][0]*h.PlusIm[0]+f[k][1]*h.CrossIm[0])
			// At its frequency a packet's transform is conj(C) width sqrt(2 pi) / 2.
			wanted := cmplx.Conj(want[k]) * complex(width*math.Sqrt(2*math.Pi)/2, 0)
			if cmplx.Abs(got-wanted) > 1e-13 {
				t.Fatalf("draw %d, site %d: %v, want %v", i, k, got, wanted)
			}
		}
	}
}

func TestBurstAnywhere(t *testing.T) {
	checkFamily(t, Settings{Model: "burst", Count: 3, Grid: Grid{First: 10, Count: 200, Step: 4}})
}

func TestBurstParameters(t *testing.T) {
	list, err := Describe(Settings{Model: "burst", Count: MaxPackets})
	if err != nil {
		t.Fatal(err)
	}
	if len(list) != 7*MaxPackets || list[0].Name != "amplitude_1" || list[len(list)-1].Name != "orientation_16" {
		t.Errorf("%d parameters from %s to %s", len(list), list[0].Name, list[len(list)-1].Name)
	}
}

func BenchmarkFillBurst(b *testing.B) {
	grid := Grid{First: 120, Count: 3481, Step: 0.25}
	for _, tc := range []struct {
		name  string
		width float64
	}{{"width 10 ms", 0.01}, {"width 1 ms", 0.001}} {
		b.Run(tc.name, func(b *testing.B) {
			m := newTestModel(b, Settings{Model: "burst", Count: 1, Grid: grid})
			benchmarkFamily(b, m, thetaOf(packet{1e-21, 1, 0.1, 250, tc.width, 0.3, 1}), grid.Count)
		})
	}
}

// In straight coordinates the two ends of the orientation are one place: the same
// signal with the phase that the bend gives.
func TestBurstOrientationGoesRound(t *testing.T) {
	s := Settings{Model: "burst", Count: 2, Grid: Grid{First: 100, Count: 300, Step: 1}}
	m := newTestModel(t, s)
	b := m.(Bender)
	if got := b.Bent(); len(got) != 2 || got[0] != 1 || got[1] != 8 {
		t.Fatalf("bent %v, want the phases 1 and 8", got)
	}
	at := func(straight, orientation float64) *Polarizations {
		theta := thetaOf(packet{0.5, 0, 0, 240, 0.02, 0.4, orientation}, packet{0.2, 1, 0.1, 180, 0.01, -0.2, 1.5})
		phase := straight + b.Bend(0, theta, theta)
		theta[1] = phase - 2*math.Pi*math.Floor(phase/(2*math.Pi))
		return fill(t, m, theta, s.Grid.Count)
	}
	low, high, other := at(0.7, 0), at(0.7, math.Pi/2), at(0.7, math.Pi/4)
	var off, differs float64
	for j := range low.PlusRe {
		off = max(off, math.Abs(low.PlusRe[j]-high.PlusRe[j]), math.Abs(low.CrossIm[j]-high.CrossIm[j]))
		differs = max(differs, math.Abs(low.PlusRe[j]-other.PlusRe[j]))
	}
	if off > 1e-15 || differs < 1e-4 {
		t.Errorf("the ends differ by %g, a place between by %g", off, differs)
	}
}
