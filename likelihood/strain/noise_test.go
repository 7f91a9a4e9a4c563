package strain

import (
	"math"
	"testing"

	"knell/internal/random"
)

func synthetic(t testing.TB, seed uint64, rate float64, n int) ([]float64, func(float64) float64) {
	density, err := Curve("second-generation-broadband")
	if err != nil {
		t.Fatal(err)
	}
	x, err := Synthesize(random.New(seed, "noise"), density, rate, n, 20)
	if err != nil {
		t.Fatal(err)
	}
	return x, density
}

// Welch's estimate of synthetic noise is the density it was made with.
func TestSynthesizeHasItsDensity(t *testing.T) {
	const rate, seconds = 2048.0, 128
	x, density := synthetic(t, 3, rate, rate*seconds)
	s, err := Welch(x, rate, 4, Mean)
	if err != nil {
		t.Fatal(err)
	}
	// In bands of 8 Hz, from where the curve is smooth over a bin. Each has 32
	// bins and 128 s of data: relative error 1/sqrt(8*128) = 3 %; five of them.
	for low := 32.0; low < 1000; low += 8 {
		ratio, n := 0.0, 0.0
		for f := low; f < low+8; f += s.Step {
			d, err := s.At(f)
			if err != nil {
				t.Fatal(err)
			}
			ratio += d / density(f)
			n++
		}
		if ratio /= n; math.Abs(ratio-1) > 0.16 {
			t.Errorf("density between %v and %v Hz is %v of the true one", low, low+8, ratio)
		}
	}
}

// Whitened by the true density the noise has variance one, also over its first
// and last seconds, where a periodic series would betray itself, and the first
// and second half do not correlate.
func TestSynthesizeWhitened(t *testing.T) {
	const rate, seconds, low, high = 1024.0, 32, 30.0, 450.0
	x, density := synthetic(t, 4, rate, rate*seconds)
	s, err := SampleCurve(density, 0.125, 4097, 20)
	if err != nil {
		t.Fatal(err)
	}
	w, err := Whiten(x, s, rate, low, high)
	if err != nil {
		t.Fatal(err)
	}
	// Independent numbers in T seconds of a band: 2 (high - low) T; the variance
	// of n of them has the relative error sqrt(2/n); five of them.
	check := func(why string, x []float64, want float64) {
		n := 2 * (high - low) * float64(len(x)) / rate
		sum := 0.0
		for _, v := range x {
			sum += v * v
		}
		if got := sum / float64(len(x)); math.Abs(got-want) > 5*math.Sqrt(2/n) {
			t.Errorf("%s: variance %v, want %v +- %.3f", why, got, want, 5*math.Sqrt(2/n))
		}
	}
	check("all", w, 1)
	for i := range seconds / 4 {
		check("four seconds", w[i*4*rate:(i+1)*4*rate], 1)
	}
	half := len(w) / 2
	dot := 0.0
	for i := range half {
		dot += w[i] * w[i+half]
	}
	n := 2 * (high - low) * seconds / 2
	if z := dot / float64(half) * math.Sqrt(n); math.Abs(z) > 5 {
		t.Errorf("the halves correlate: z = %v", z)
	}
	// First and last sample of the unwhitened noise, over many draws: a periodic
	// series would make them neighbours, with a correlation near one.
	var xy, xx, yy float64
	for seed := range uint64(200) {
		x, _ := synthetic(t, 100+seed, 256, 256)
		a, b := x[0], x[255]
		xy, xx, yy = xy+a*b, xx+a*a, yy+b*b
	}
	if r := xy / math.Sqrt(xx*yy); math.Abs(r) > 5/math.Sqrt(200) {
		t.Errorf("first and last sample correlate by %v", r)
	}
}

func TestSynthesizeIsReproducible(t *testing.T) {
	a, density := synthetic(t, 5, 256, 512)
	b, _ := synthetic(t, 5, 256, 512)
	c, _ := synthetic(t, 6, 256, 512)
	if a[17] != b[17] || a[17] == c[17] || len(a) != 512 {
		t.Errorf("got %v, %v, %v", a[17], b[17], c[17])
	}
	_, err := Synthesize(random.New(1, "x"), density, 256, 16, 5)
	wantError(t, "below the curve", err, "at 5 Hz")
	_, err = Synthesize(random.New(1, "x"), density, 256, 0, 20)
	wantError(t, "no samples", err, "got 0 samples")
	_, err = Synthesize(random.New(1, "x"), density, 256, 16, 129)
	wantError(t, "above Nyquist", err, "128 Hz")
}

// What the smoothed model correlates ends at the lag; a flat spectrum stays; a
// wall below the band does not leak in.
func TestSmooth(t *testing.T) {
	const step, last, lag = 0.25, 4096, 0.25
	flat := &Spectrum{Step: step, Density: make([]float64, last+1), Segments: 7}
	for k := range flat.Density {
		flat.Density[k] = 2e-46
		if float64(k)*step < 30 {
			flat.Density[k] = 1e-30 // 16 orders
		}
		if float64(k)*step > 900 {
			flat.Density[k] = 0
		}
	}
	s, err := Smooth(flat, lag, 30, 900)
	if err != nil {
		t.Fatal(err)
	}
	for k, d := range s.Density {
		if math.Abs(d/2e-46-1) > 1e-12 {
			t.Fatalf("flat spectrum: bin %d became %v", k, d)
		}
	}
	if s.Segments != 7 {
		t.Error("Segments was lost")
	}
	rng := random.New(7, "rough")
	rough := &Spectrum{Step: step, Density: make([]float64, last+1)}
	for k := range rough.Density {
		rough.Density[k] = 1e-46 * rng.ExpFloat64()
	}
	rough.Density[60*4] = 1e-43 // a line
	if s, err = Smooth(rough, lag, 30, 900); err != nil {
		t.Fatal(err)
	}
	r := covariance(s)
	n := len(r)
	for i := range r {
		if float64(min(i, n-i)) >= lag*2048 && math.Abs(r[i]) > 1e-14*r[0] {
			t.Fatalf("covariance at lag %d is %v of the variance", i, r[i]/r[0])
		}
	}
	// The power in the band is kept, line included (edges move a little of it).
	before, after := 0.0, 0.0
	for k := 40 * 4; k < 890*4; k++ {
		before, after = before+rough.Density[k], after+s.Density[k]
	}
	if math.Abs(after/before-1) > 0.01 {
		t.Errorf("power in the band changed by %v", after/before)
	}
	for _, tc := range []struct {
		why            string
		lag, low, high float64
		want           string
	}{
		{"lag too long", 2.1, 30, 900, "at most 2 s"}, {"no lag", 0, 30, 900, "above 0"}, {"band", 0.1, 900, 30, "low < high"},
		{"band above Nyquist", 0.1, 30, 1100, "within 0 to 1024 Hz"},
	} {
		_, err := Smooth(rough, tc.lag, tc.low, tc.high)
		wantError(t, tc.why, err, tc.want)
	}
	rough.Density[400] = 0
	_, err = Smooth(rough, 0.1, 30, 900)
	wantError(t, "zero in the band", err, "density 0 at 100 Hz")
}

// want: sum over a Hann window of 2^16 samples times itself, shifted by u.
func TestLagWindow(t *testing.T) {
	const n = 1 << 16
	w := hann(n)
	for _, u := range []float64{0, 0.125, 0.25, 0.5, 0.75, 0.9375, 1} {
		shift := int(u * n)
		sum := 0.0
		for i := shift; i < n; i++ {
			sum += w[i] * w[i-shift]
		}
		if want := sum / (3. / 8 * n); math.Abs(lagWindow(u)-want) > 1e-12 {
			t.Errorf("lagWindow(%v) = %v, want %v", u, lagWindow(u), want)
		}
	}
}

// A line a million times as strong as the floor is gone 12/lag away from it.
// The kernel there, a Hann window's transform squared, is at most
// (1/(pi x (x^2-1)))^2 of its peak, x being the distance in units of 1/lag.
// (1e-8 is for the aliases of the kernel on a grid.)
func TestSmoothKeepsLinesApart(t *testing.T) {
	const step, lag, line = 0.5, 0.25, 1e6
	s := &Spectrum{Step: step, Density: make([]float64, 2049)}
	for k := range s.Density {
		s.Density[k] = 1
	}
	const at = 1000
	s.Density[at] = line
	out, err := Smooth(s, lag, 30, 900)
	if err != nil {
		t.Fatal(err)
	}
	peak := out.Density[at] - 1
	// The line's power spreads over the kernel's 1.44/lag or so.
	if want := line * step * lag / 1.5; math.Abs(peak/want-1) > 0.01 {
		t.Errorf("peak %v, want %v", peak, want)
	}
	for k := 60; k < 1800; k++ {
		x := math.Abs(float64(k-at)) * step * lag
		if x < 2 {
			continue
		}
		bound := peak * math.Pow(math.Pi*x*(x*x-1), -2)
		if excess := out.Density[k] - 1; excess > 1.01*bound+1e-8 || excess < -1e-9 {
			t.Fatalf("%v/lag from the line the density is raised by %v, want at most %v", x, excess, bound)
		}
	}
}
