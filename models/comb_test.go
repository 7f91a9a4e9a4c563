package models

import (
	"fmt"
	"math"
	"math/cmplx"
	"testing"

	"gonum.org/v1/gonum/dsp/fourier"

	"knell/internal/checktable"
	"knell/models/kerr"
)

// combTheta is a start at 0 and the comb: amplitude, phase, delay, spacing, shift,
// width, stretch, centre and width of the band.
func combTheta(own ...float64) []float64 { return append([]float64{0}, own...) }

func TestCombReducesToTheRingdownAndToNothing(t *testing.T) {
	s := Settings{Modes: []string{"2,2,0", "2,2,1"}, Grid: Grid{First: 60, Count: 1500, Step: 0.5}, Inclination: 0.6, Length: 1.75, Start: 0.002}
	own := []float64{0, 1, 0.01, 3.4, 0.3, 0.2, 0.1, 250, 100}
	for _, lead := range []float64{0, 0.25} {
		s.Lead, s.Angular = lead, "spherical"
		ring := []float64{68, 0.69, 0.001, 1e-21, 1.1, 2e-21, 3}
		s.Model = "ringdown"
		want := fill(t, newTestModel(t, s), ring, s.Grid.Count)
		s.Model = "comb"
		mustEqual(t, "amplitude 0", fill(t, newTestModel(t, s), append(ring, own...), s.Grid.Count), want)
	}
	s.Modes, s.Angular = nil, ""
	m := newTestModel(t, s)
	zero := NewPolarizations(s.Grid.Count)
	mustEqual(t, "amplitude 0 without modes", fill(t, m, append([]float64{0.001}, own...), s.Grid.Count), zero)
	own[0] = 1e-21
	if h := fill(t, m, append([]float64{0.001}, own...), s.Grid.Count); h.PlusRe[300] == 0 {
		t.Error("an amplitude changes nothing: this test sees nothing")
	}
	own[2] = 1.8
	mustEqual(t, "first pulse after the data", fill(t, m, append([]float64{0.001}, own...), s.Grid.Count), zero)
	own[2] = 1.7
	mustEqual(t, "a late start puts the first pulse after the data", fill(t, m, append([]float64{0.06}, own...), s.Grid.Count), zero)
}

// The spectrum is the FFT of the sampled train of pulses, written out in time. The
// pulses begin with zero value, slope and curvature, so the sum over samples errs
// by far less than the trapezoidal rule's (omega dt)^2 / 12.
func TestCombIsTheFFT(t *testing.T) {
	const (
		n        = 1 << 20
		duration = 1.0
		dt       = duration / n
		length   = 0.5
	)
	for _, iota := range []float64{0.4, 1.9} {
		const amplitude, phase, delay, spacing, shift, width, centre, band = 3e-21, 0.9, 0.02, 8.0, 0.3, 1.1, 230.0, 90.0
		grid := Grid{First: 20, Count: 1000, Step: 1 / duration}
		m := newTestModel(t, Settings{Model: "comb", Grid: grid, Inclination: iota, Length: length})
		h := fill(t, m, combTheta(amplitude, phase, delay, spacing, shift, width, 0, centre, band), grid.Count)
		// -2Y_22 = sqrt(5/64 pi) (1 + cos)^2: arXiv:0709.0093.
		y := math.Sqrt(5 / (64 * math.Pi))
		north, south := y*math.Pow(1+math.Cos(iota), 2), y*math.Pow(1-math.Cos(iota), 2)
		peak := 3 * 2 * math.Sqrt(math.Pow(2, 0.25)-1) / (2 * math.Pi * band)
		plus, cross := make([]float64, n), make([]float64, n)
		for k := 0; delay+float64(k)/spacing < length; k++ {
			arrive := delay + float64(k)/spacing
			c := cmplx.Rect(amplitude*math.Exp(-math.Pi*width*float64(k)/spacing), phase-2*math.Pi*shift*float64(k))
			for j := int(arrive/dt) + 1; j < n && float64(j)*dt-arrive < 0.4; j++ {
				at := float64(j)*dt - arrive
				e := cmplx.Rect(math.Pow(at/peak, 3)*math.Exp(3-3*at/peak), -2*math.Pi*centre*at)
				x := c*complex(north, 0)*e + cmplx.Conj(c*complex(south, 0)*e)
				plus[j] += real(x)
				cross[j] -= imag(x)
			}
		}
		fft := fourier.NewFFT(n)
		fp, fc := fft.Coefficients(nil, plus), fft.Coefficients(nil, cross)
		largest := 0.0
		for j := range grid.Count {
			largest = max(largest, cmplx.Abs(complex(h.PlusRe[j], h.PlusIm[j])), cmplx.Abs(complex(h.CrossRe[j], h.CrossIm[j])))
		}
		for j := range grid.Count {
			k := grid.First + j
			if d := cmplx.Abs(complex(h.PlusRe[j], h.PlusIm[j]) - fp[k]*dt); !(d <= 1e-9*largest) {
				t.Fatalf("plus at %d Hz: %v, FFT %v", k, complex(h.PlusRe[j], h.PlusIm[j]), fp[k]*dt)
			}
			if d := cmplx.Abs(complex(h.CrossRe[j], h.CrossIm[j]) - fc[k]*dt); !(d <= 1e-9*largest) {
				t.Fatalf("cross at %d Hz: %v, FFT %v", k, complex(h.CrossRe[j], h.CrossIm[j]), fc[k]*dt)
			}
		}
	}
}

// sumOfLines is the V of the comb as the sum of its Lorentzian lines, each with the
// band's envelope at the bin, pairwise out from the bin: their far tails cancel.
func sumOfLines(f, spacing, shift, width, centre, band float64) complex128 {
	b := band / (2 * math.Sqrt(math.Pow(2, 0.25)-1))
	envelope := complex(2*math.Exp(3)/27*3/(2*math.Pi*b), 0) / cmplx.Pow(complex(1, (f-centre)/b), 4)
	near := math.Round(f/spacing - shift)
	line := func(j float64) complex128 {
		return complex(spacing, 0) / complex(math.Pi*width, 2*math.Pi*(f-(j+shift)*spacing))
	}
	sum := 0.5 + line(near)
	for j := 1.0; j < 20000; j++ {
		sum += line(near+j) + line(near-j)
	}
	return envelope * sum
}

// With enough pulses for the rest to have died out the closed form is the sum of
// lines.
func TestCombIsTheSumOfItsLines(t *testing.T) {
	const spacing, shift, width, centre, band = 3.4, 0.3, 0.4, 230.0, 90.0
	grid := Grid{First: 150 * 8, Count: 200 * 8, Step: 0.125}
	// exp(-pi 0.4 Hz 20 s) = 1e-11. Seen along the spin the signal is circular and,
	// well above 0 Hz, U of it is faint: (1 + (460/52)^2)^-2 = 2e-4 of V's peak, times
	// the lines. hx = -i h+ beside V and +i beside U takes it out.
	m := newTestModel(t, Settings{Model: "comb", Grid: grid, Length: 20})
	h := fill(t, m, combTheta(1, 0, 0, spacing, shift, width, 0, centre, band), grid.Count)
	y := math.Sqrt(5/(64*math.Pi)) * 4
	v := func(j int) complex128 {
		return complex(h.PlusRe[j], h.PlusIm[j]) + 1i*complex(h.CrossRe[j], h.CrossIm[j])
	}
	largest := 0.0
	for j := range grid.Count {
		largest = max(largest, cmplx.Abs(v(j)))
	}
	for j := 0; j < grid.Count; j += 7 {
		want := complex(y, 0) * sumOfLines(grid.Frequency(j), spacing, shift, width, centre, band)
		// 20000 pairs of lines leave 2 (f - f_0) / (spacing 20000) / 2 pi < 1e-5 of a
		// line's spacing over its distance.
		if d := cmplx.Abs(v(j) - want); d > 2e-5*largest {
			t.Fatalf("at %g Hz: %v, sum of lines %v", grid.Frequency(j), v(j), want)
		}
	}
}

// Places and widths of the lines, read off the spectrum.
func TestPhysicsCombLines(t *testing.T) {
	table := checktable.New(t, "lines of the comb, read off its spectrum")
	const source = "psi(f) = (j + line_shift) line_spacing"
	for _, stretch := range []float64{0, 0.05, -0.2} {
		const spacing, shift, width, centre, band = 4.0, 0.3, 0.05, 230.0, 90.0
		const step = 1.0 / 1024
		grid := Grid{First: 200 * 1024, Count: 64 * 1024, Step: step}
		m := newTestModel(t, Settings{Model: "comb", Grid: grid, Length: 150}) // exp(-pi 0.05 150) = 6e-11
		h := fill(t, m, combTheta(1, 0, 0, spacing, shift, width, stretch, centre, band), grid.Count)
		power := func(j int) float64 {
			v := complex(h.PlusRe[j], h.PlusIm[j]) + 1i*complex(h.CrossRe[j], h.CrossIm[j])
			return real(v)*real(v) + imag(v)*imag(v)
		}
		lines, last := 0, 0.0
		place, apart, wide := 0.0, 0.0, 0.0 // largest errors, Hz
		for j := 1024; j < grid.Count-1024; j++ {
			if !(power(j) > power(j-1) && power(j) >= power(j+1) && power(j) > 100*power(j+512)) {
				continue
			}
			f := grid.Frequency(j)
			lines++
			// psi(f) - shift spacing is a multiple of the spacing.
			u := (f - centre) / band
			psi := f - stretch*band*(math.Sqrt(1+u*u)-1)
			place = max(place, math.Abs(math.Remainder(psi-shift*spacing, spacing)))
			if last > 0 {
				middle := ((f+last)/2 - centre) / band
				want := spacing / (1 - stretch*middle/math.Sqrt(1+middle*middle))
				apart = max(apart, math.Abs(f-last-want))
			}
			last = f
			left, right := j, j
			for power(left) > power(j)/2 {
				left--
			}
			for power(right) > power(j)/2 {
				right++
			}
			// Where psi runs slower than f a line is as much broader.
			want := width / (1 - stretch*u/math.Sqrt(1+u*u))
			wide = max(wide, math.Abs(float64(right-left)*step-want))
		}
		// A maximum is on the grid to half a step, its edges to one.
		table.Worst(fmt.Sprintf("places of %d lines, stretch %g (Hz)", lines, stretch), place, 1.5*step, source)
		table.Worst(fmt.Sprintf("distances of neighbours, stretch %g (Hz)", stretch), apart, 2*step, source)
		table.Worst(fmt.Sprintf("full widths at half power, stretch %g (Hz)", stretch), wide, 2*step, source)
		if lines < 12 || lines > 18 {
			t.Errorf("stretch %g: %d lines in 62 Hz", stretch, lines)
		}
	}
}

// The envelope of the lines has the width and the centre asked for.
func TestCombBand(t *testing.T) {
	const centre, band = 400.0, 60.0
	grid := Grid{First: 4 * 300, Count: 4 * 200, Step: 0.25}
	// A single pulse: lines as wide as the spacing and more.
	m := newTestModel(t, Settings{Model: "comb", Grid: grid, Length: 0.5})
	h := fill(t, m, combTheta(1, 0, 0, 1, 0, 1, 0, centre, band), grid.Count)
	best, above := 0, 0
	power := func(j int) float64 { return h.PlusRe[j]*h.PlusRe[j] + h.PlusIm[j]*h.PlusIm[j] }
	for j := range grid.Count {
		if power(j) > power(best) {
			best = j
		}
	}
	for j := range grid.Count {
		if power(j) > power(best)/2 {
			above++
		}
	}
	if f := grid.Frequency(best); math.Abs(f-centre) > 0.5 {
		t.Errorf("the band's centre is at %g Hz, want %g", f, centre)
	}
	if w := float64(above) * grid.Step; math.Abs(w-band) > 1 {
		t.Errorf("the band is %g Hz wide, want %g", w, band)
	}
}

func TestCombIsACausalTrain(t *testing.T) {
	const duration, n = 2.0, 1 << 14
	const rate = n / duration
	const delay, spacing, width, centre, band = 0.05, 5.0, 0.8, 300.0, 120.0
	s := Settings{Model: "comb", Grid: wholeGrid(duration, n), Inclination: 0.4, Length: 1.4}
	for _, stretch := range []float64{0, 0.1, -maxStretch} {
		plus, cross := inTime(t, s, combTheta(1e-21, 1, delay, spacing, 0.6, width, stretch, centre, band))
		begin := n/4 + 409 // 0.05 s
		for _, x := range [][]float64{plus, cross} {
			if share := energyBefore(x, begin-8); share > 1e-6 {
				t.Errorf("stretch %g: %.1e of the energy comes before the first pulse", stretch, share)
			}
		}
		if stretch != 0 {
			continue
		}
		// The pulses' peaks: h+^2 + hx^2 of a nearly circular wave is its envelope.
		envelope := func(i int) float64 { return plus[i]*plus[i] + cross[i]*cross[i] }
		last := 0.0
		for k := range 6 {
			from := begin + k*1638 // 0.2 s
			best, energy := from, 0.0
			for i := from - 8; i < from+800; i++ {
				energy += envelope(i)
				if envelope(i) > envelope(best) {
					best = i
				}
			}
			// 0.415 / band_width after the arrival: 28 samples; the ellipse of
			// inclination 0.4 and the grid move it by a part of a cycle, 27 samples.
			if off := best - from - 28; off < -10 || off > 10 {
				t.Errorf("pulse %d peaks %d samples from where it should", k, off)
			}
			if k > 0 {
				if want := math.Exp(-2 * math.Pi * width / spacing); math.Abs(energy/last-want) > 1e-3*want {
					t.Errorf("pulse %d has %.5f of the energy of the one before, want %.5f", k, energy/last, want)
				}
			}
			last = energy
		}
		// The first pulse's peak is the amplitude times the angular factor.
		y := math.Sqrt(5/(64*math.Pi)) * math.Pow(1+math.Cos(0.4), 2)
		largest := 0.0
		for i := range n {
			largest = max(largest, math.Sqrt(envelope(i)))
		}
		// The other handedness adds up to (1-cos)^2 / (1+cos)^2 = 0.2 %.
		// inTime's window takes off cos^8.
		if want := 1e-21 * y * math.Pow(math.Cos(math.Pi*centre/rate), 8); math.Abs(largest-want) > 0.02*want {
			t.Errorf("peak %.4g, want %.4g", largest, want)
		}
	}
}

// A segment twice as long holds the same signal in its first half.
func TestCombDoesNotWrapAround(t *testing.T) {
	const n = 1 << 13
	for _, stretch := range []float64{0, maxStretch, -maxStretch} {
		at := func(duration float64, n int) []float64 {
			s := Settings{Model: "comb", Grid: wholeGrid(duration, n), Inclination: 0.4, Length: 0.75*duration - 0.1}
			x, _ := inTime(t, s, combTheta(1, 0.3, 0.02, 10.03, 0.2, 0, stretch, 300, 150))
			return x
		}
		short, long := at(2, n), at(4, 2*n)
		largest := 0.0
		for _, v := range short {
			largest = max(largest, math.Abs(v))
		}
		// t = 0 stands at n/4 and 2n/4, the data end 0.1 s before the segment
		// does, at 1.4 s; of that 60 % are 3440 samples.
		for i := n/4 - 100; i < n/4+3300; i++ {
			if d := math.Abs(short[i] - long[i+n/4]); d > 1e-6*largest {
				t.Fatalf("stretch %g: at %.4f s the segment's length changes the signal by %.2g of its peak", stretch, float64(i-n/4)/(n/2), d/largest)
			}
		}
	}
}

// The comb is as circular as an m = 2 mode, and of the same handedness.
func TestCombChirality(t *testing.T) {
	for _, iota := range []float64{0, 0.8, 2.1, math.Pi} {
		s := Settings{Model: "comb", Grid: Grid{First: 100, Count: 1, Step: 4}, Inclination: iota, Length: 0.1}
		comb := fill(t, newTestModel(t, s), combTheta(1, 0.3, 0, 1, 0, 0, 0, 400, 10), 1)
		ratio := complex(comb.CrossRe[0], comb.CrossIm[0]) / complex(comb.PlusRe[0], comb.PlusIm[0])
		north, err := kerr.Spheroidal(2, 2, 0, iota)
		if err != nil {
			t.Fatal(err)
		}
		south, err := kerr.Spheroidal(2, 2, 0, math.Pi-iota)
		if err != nil {
			t.Fatal(err)
		}
		// Beside V: conj(x)/conj(p) with p = S + S', x = i (S - S'); U is down by
		// (5.75/800)^4.
		want := -1i * (north - south) / (north + south)
		if cmplx.Abs(ratio-want) > 1e-6 {
			t.Errorf("inclination %g: hx/h+ = %v, want %v", iota, ratio, want)
		}
		s.Model, s.Modes, s.Angular, s.Grid.First = "ringdown", []string{"2,2,0"}, "spherical", 63
		mode := fill(t, newTestModel(t, s), []float64{68, 0.69, 0, 1, 0}, 1)
		ringing := complex(mode.CrossRe[0], mode.CrossIm[0]) / complex(mode.PlusRe[0], mode.PlusIm[0])
		// The tail of a mode from negative frequency is about 8 %.
		if cmplx.Abs(ratio-ringing) > 0.2 {
			t.Errorf("inclination %g: hx/h+ = %v, that of a mode %v", iota, ratio, ringing)
		}
	}
}

// Along the straight coordinate of the shift a line stays at the band's centre
// whatever the spacing.
func TestCombBend(t *testing.T) {
	m := newTestModel(t, Settings{Model: "comb", Grid: Grid{First: 100, Count: 1, Step: 4}, Length: 1}).(*Comb)
	centre := combTheta(1, 0, 0, 3, 0.5, 0.1, 0, 260, 90)
	for _, spacing := range []float64{2.9, 3, 3.3} {
		theta := combTheta(1, 0, 0, spacing, 0.5, 0.1, 0, 250, 80)
		shift := m.Bend(0, theta, centre)
		if m.Parameters()[m.Bent()[0]].Name != "line_shift" {
			t.Fatal("the bent parameter is not line_shift")
		}
		if off := math.Remainder(260-shift*spacing, spacing); math.Abs(off) > 1e-9 {
			t.Errorf("spacing %g: nearest line %g Hz from the centre", spacing, off)
		}
	}
}

func TestCombDerive(t *testing.T) {
	s := Settings{Model: "comb", Grid: Grid{First: 60, Count: 10, Step: 1}, Length: 1}
	for _, modes := range [][]string{nil, {"2,2,0"}} {
		s.Modes = modes
		m := newTestModel(t, s)
		theta := combTheta(1, 0, 0, 4, 0.5, 0.1, 0, 260, 90)
		if modes != nil {
			theta = append([]float64{68, 0.69, 0, 1e-21, 1}, theta[1:]...)
		}
		derived := m.Derived()
		out := make([]float64, len(derived))
		if err := m.Derive(theta, out); err != nil {
			t.Fatal(err)
		}
		if k := len(out) - 1; len(out) != 1+2*len(modes) || derived[k].Name != "echo_delay" || out[k] != 0.25 {
			t.Errorf("%v: %v", derived, out)
		}
	}
}

func TestCombAnywhere(t *testing.T) {
	s := Settings{Model: "comb", Grid: Grid{First: 10, Count: 200, Step: 4}, Inclination: 2, Length: 2}
	checkFamily(t, s)
	s.Modes, s.Lead = []string{"2,2,0"}, 0.2
	checkFamily(t, s)
}

func BenchmarkFillComb(b *testing.B) {
	grid := Grid{First: 120, Count: 3481, Step: 0.25}
	for _, tc := range []struct {
		name    string
		stretch float64
	}{{"equal spacing", 0}, {"stretched", 0.05}} {
		b.Run(tc.name, func(b *testing.B) {
			m := newTestModel(b, Settings{Model: "comb", Grid: grid, Inclination: 0.4, Length: 3.75})
			benchmarkFamily(b, m, combTheta(1e-21, 1, 0, 3.4, 0.3, 0.1, tc.stretch, 250, 100), grid.Count)
		})
	}
	// What a sum over lines would cost: one Lorentzian over the grid.
	b.Run("one line", func(b *testing.B) {
		h := NewPolarizations(grid.Count)
		for b.Loop() {
			h.add(wave{1500, -0.3, 1, 1i}, grid, 0)
		}
		b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(b.N*grid.Count), "ns/bin")
	})
}
