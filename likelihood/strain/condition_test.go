package strain

import (
	"math"
	"testing"

	"gonum.org/v1/gonum/dsp/fourier"

	"knell/internal/random"
)

// covariance is the autocovariance of a spectrum from 0 Hz, by lag in samples.
func covariance(s *Spectrum) []float64 {
	last := len(s.Density) - 1
	c := make([]complex128, last+1)
	for k, d := range s.Density {
		c[k] = complex(d, 0)
	}
	return fourier.NewFFT(2*last).Sequence(nil, c)
}

// wall is strain with a loud slow part, a line and white noise: six orders of
// magnitude in amplitude at 3 Hz, more than real strain has.
func wall(rate float64, n int) []float64 {
	rng := random.New(8, "wall")
	x := make([]float64, n)
	for i := range x {
		t := float64(i) / rate
		x[i] = 1e-22*rng.NormFloat64() + 1e-20*math.Sin(2*math.Pi*60*t) + 1e-16*math.Sin(2*math.Pi*3*t+1) + 3e-15
	}
	return x
}

// In the band, between the edges, conditioning changes nothing but the rate.
func TestConditionKeepsTheBand(t *testing.T) {
	const rate, low = 4096.0, 30.0
	n := int(16 * rate)
	x := make([]float64, n)
	tone := func(t float64) float64 {
		return math.Sin(2*math.Pi*24.5*t+0.3) + math.Cos(2*math.Pi*250*t) + math.Sin(2*math.Pi*900*t)
	}
	for i := range x {
		s := float64(i) / rate
		// Out of the band: below 15 Hz and above the new Nyquist frequency.
		x[i] = 1e-21*tone(s) + 1e-17*math.Sin(2*math.Pi*14*s) + 1e-17*math.Sin(2*math.Pi*1100*s) + 1e-16
	}
	in := &Series{File: "f", Site: "H1", StartSeconds: 1400000000, StartFraction: 1 / rate, SampleRate: rate, Values: x}
	out, err := Condition(in, 2048, low)
	if err != nil {
		t.Fatal(err)
	}
	// The first sample is off the grid of whole seconds by one, so one is skipped.
	if out.StartFraction != 2/rate || out.SampleRate != 2048 || len(out.Values) != n/2-1 || out.Edge == 0 {
		t.Fatalf("got %d samples at %v Hz from %v, edge %d", len(out.Values), out.SampleRate, out.StartFraction, out.Edge)
	}
	worst := 0.0
	for i := out.Edge; i < len(out.Values)-out.Edge; i++ {
		worst = max(worst, math.Abs(out.Values[i]/1e-21-tone((1+2*float64(i))/rate)))
	}
	t.Logf("edge %.2f s, largest deviation %.1e of the amplitude", float64(out.Edge)/2048, worst)
	// What the filters' ringing has fallen to, 1e-7, of 1e-17, over 1e-21.
	if worst > 1e-3 {
		t.Errorf("the band changed by %v of its amplitude", worst)
	}
}

// What lies between the edges does not depend on where the stretch ends.
func TestConditionForgetsTheEnds(t *testing.T) {
	const rate, low = 2048.0, 30.0
	x := wall(rate, int(24*rate))
	whole := &Series{File: "f", Site: "H1", StartSeconds: 10, SampleRate: rate, Values: x}
	a, err := Condition(whole, 1024, low)
	if err != nil {
		t.Fatal(err)
	}
	const cut = 6 * 2048
	b, err := Condition(whole.Slice(cut, len(x)-777), 1024, low)
	if err != nil {
		t.Fatal(err)
	}
	worst, size := 0.0, 0.0
	for i := b.Edge; i < len(b.Values)-b.Edge; i++ {
		worst = max(worst, math.Abs(b.Values[i]-a.Values[i+cut/2]))
		size = max(size, math.Abs(a.Values[i+cut/2]))
	}
	t.Logf("edge %.2f s, largest difference %.1e, signal %.1e", float64(b.Edge)/1024, worst, size)
	if worst > 1e-3*1e-22 {
		t.Errorf("the same samples differ by %v, noise 1e-22", worst)
	}
}

func TestConditionErrors(t *testing.T) {
	s := &Series{File: "f", Site: "H1", StartSeconds: 10, SampleRate: 4096, Values: make([]float64, 8*4096)}
	for _, tc := range []struct {
		why       string
		rate, low float64
		want      string
	}{
		{"ratio", 3000, 30, "one of 4096 2048 1024 512"}, {"upwards", 8192, 30, "got sample rate 8192"}, {"NaN", math.NaN(), 30, "got sample rate NaN"},
		{"low", 2048, 0, "above 0"}, {"low above Nyquist", 2048, 1000, "below 921.6 Hz"}, {"too short", 2048, 5, "spoils"},
	} {
		_, err := Condition(s, tc.rate, tc.low)
		wantError(t, tc.why, err, "f: strain of H1", tc.want)
	}
	s.Gaps = []Gap{{5, 6, "hole"}}
	_, err := Condition(s, 2048, 30)
	wantError(t, "gap", err, "hole")
}

func TestGoodSize(t *testing.T) {
	for _, tc := range []struct{ n, want int }{{1, 2}, {2, 2}, {7, 8}, {13, 16}, {17, 18}, {1025, 1080}, {131072, 131072}} {
		if got := goodSize(tc.n); got != tc.want {
			t.Errorf("goodSize(%d) = %d, want %d", tc.n, got, tc.want)
		}
	}
}

func BenchmarkWelch(b *testing.B) {
	x, _ := synthetic(b, 9, 4096, 32*4096)
	b.ReportAllocs()
	b.SetBytes(int64(8 * len(x)))
	for range b.N {
		if s, err := Welch(x, 4096, 4, Median); err != nil || s.Segments != 15 {
			b.Fatal(s, err)
		}
	}
}

func BenchmarkCondition(b *testing.B) {
	x, _ := synthetic(b, 9, 4096, 32*4096)
	s := &Series{SampleRate: 4096, Values: x}
	b.ReportAllocs()
	for range b.N {
		if _, err := Condition(s, 2048, 30); err != nil {
			b.Fatal(err)
		}
	}
}
