package strain

import (
	"fmt"
	"math"
	"slices"
	"strings"
	"testing"

	"knell/internal/random"
)

// want: expectation of the median order statistic of n exponential variables,
// sum of 1/j over j from n-k+1 to n for the k-th smallest; digits as printed.
func TestMedianBias(t *testing.T) {
	for _, tc := range []struct {
		n    int
		want float64
	}{{1, 1}, {2, 1}, {3, 0.833333}, {4, 0.833333}, {5, 0.783333}, {7, 0.759524}, {8, 0.759524}, {9, 0.745635}, {11, 0.736544},
		{15, 0.725372}, {31, 0.709016}, {63, 0.701021}, {127, 0.697069}, {255, 0.695104}} {
		if got := MedianBias(tc.n); math.Abs(got-tc.want) > 6e-7 {
			t.Errorf("MedianBias(%d) = %.7f, want %.6f", tc.n, got, tc.want)
		}
		// And the order statistics themselves.
		k := (tc.n + 1) / 2
		middle := 0.0
		for j := tc.n - k + 1; j <= tc.n; j++ {
			middle += 1 / float64(j)
		}
		if tc.n%2 == 0 {
			middle += 1 / float64(tc.n-k) / 2
		}
		if got := MedianBias(tc.n); math.Abs(got-middle) > 1e-14 {
			t.Errorf("MedianBias(%d) = %v, order statistics give %v", tc.n, got, middle)
		}
	}
}

// White noise of standard deviation sigma has the density 2 sigma^2/rate.
func TestWelchOfWhiteNoise(t *testing.T) {
	const rate, sigma, n = 256.0, 3e-21, 256 * 64
	want := 2 * sigma * sigma / rate
	for _, average := range []Average{Median, Mean} {
		for _, segment := range []float64{1, 2, 4} {
			t.Run(fmt.Sprintf("%v/%gs", average, segment), func(t *testing.T) {
				rng := random.New(1, "white", uint64(segment))
				x := make([]float64, n)
				for i := range x {
					x[i] = sigma * rng.NormFloat64()
				}
				s, err := Welch(x, rate, segment, average)
				if err != nil {
					t.Fatal(err)
				}
				// Averaged over the bins: they share the n samples, so the relative
				// error is sqrt(2/n), more for the median by its efficiency (1.2)
				// and by the window's loss. Twice that at four standard errors, and
				// 1 % for what overlap does to the median's expectation.
				sum := 0.0
				for _, d := range s.Density[2 : len(s.Density)-2] {
					sum += d
				}
				got := sum / float64(len(s.Density)-4) / want
				if tol := 8*math.Sqrt(2./n) + 0.01; math.Abs(got-1) > tol {
					t.Errorf("mean density over the true one is %v, want 1 +- %.3f", got, tol)
				}
				if s.Step != 1/segment || s.End() != rate/2 || s.Segments != int(2*64/segment)-1 {
					t.Errorf("got step %v, end %v, %d segments", s.Step, s.End(), s.Segments)
				}
				// One bin scatters by 1/sqrt(segments) or so.
				for k, d := range s.Density[2 : len(s.Density)-2] {
					if r := d / want; math.Abs(r-1) > 6.5/math.Sqrt(float64(s.Segments)) {
						t.Errorf("bin %d is off by a factor %v", k+2, r)
					}
				}
			})
		}
	}
}

// The expectation of the median over many realisations: exact without overlap,
// and within the hundredth that Welch's overlap is said to cost. Each of 3000
// realisations has about 13 independent bins of relative error 1.2/sqrt(n).
func TestMedianIsUnbiased(t *testing.T) {
	const size, realisations = 64, 3000
	for _, n := range []int{2, 3, 4, 15} {
		for _, overlap := range []bool{false, true} {
			rng := random.New(6, "median", uint64(n))
			parts := make([][]float64, n)
			for i := range parts {
				parts[i] = make([]float64, size)
			}
			if overlap {
				parts = [][]float64{make([]float64, size*(n+1)/2)}
			}
			sum, count := 0.0, 0.0
			for range realisations {
				for _, x := range parts {
					for i := range x {
						x[i] = rng.NormFloat64()
					}
				}
				s, err := WelchStretches(parts, 1, size, Median)
				if err != nil || s.Segments != n {
					t.Fatal(s, err)
				}
				for _, d := range s.Density[3:30] {
					sum, count = sum+d/2, count+1
				}
			}
			tol := 4 * 1.2 / math.Sqrt(float64(n)*13*realisations)
			if overlap {
				tol += 0.01
			}
			if got := sum / count; math.Abs(got-1) > tol {
				t.Errorf("%d segments, overlap %v: expectation %.4f, want 1 +- %.4f", n, overlap, got, tol)
			}
		}
	}
}

// A sinusoid of amplitude a on a bin adds a^2/2 to the integral of the density.
func TestWelchOfSinusoid(t *testing.T) {
	const rate, a = 128.0, 2.0
	x := make([]float64, 128*8)
	for i := range x {
		x[i] = 5 + a*math.Sin(2*math.Pi*20*float64(i)/rate+0.3)
	}
	for _, average := range []Average{Mean, Median} {
		s, err := Welch(x, rate, 2, average)
		if err != nil {
			t.Fatal(err)
		}
		sum := 0.0
		for _, d := range s.Density {
			sum += d * s.Step
		}
		want := a * a / 2
		if average == Median {
			want /= MedianBias(s.Segments)
		}
		if math.Abs(sum/want-1) > 1e-12 {
			t.Errorf("%v: power %v, want %v", average, sum, want)
		}
	}
}

// A loud stretch must not leak into the segments of another, nor a short one be used.
func TestWelchStretches(t *testing.T) {
	a := make([]float64, 1000)
	b := make([]float64, 700)
	rng := random.New(2, "stretches")
	for i := range a {
		a[i] = rng.NormFloat64()
	}
	for i := range b {
		b[i] = rng.NormFloat64()
	}
	both, err := WelchStretches([][]float64{a, make([]float64, 100), b}, 100, 2, Mean)
	if err != nil {
		t.Fatal(err)
	}
	one, _ := Welch(a, 100, 2, Mean)
	two, _ := Welch(b, 100, 2, Mean)
	if both.Segments != one.Segments+two.Segments || one.Segments != 9 || two.Segments != 6 {
		t.Fatalf("segments: %d, %d, %d", both.Segments, one.Segments, two.Segments)
	}
	for k, d := range both.Density {
		if want := (9*one.Density[k] + 6*two.Density[k]) / 15; math.Abs(d/want-1) > 1e-12 {
			t.Errorf("bin %d: %v, want %v", k, d, want)
		}
	}
}

func TestWelchErrors(t *testing.T) {
	x := make([]float64, 64)
	for _, tc := range []struct {
		why     string
		x       []float64
		segment float64
		average Average
		want    string
	}{
		{"too long", x, 128, Mean, "want at most the longest stretch, 64 s"},
		{"odd", x, 9, Mean, "even number"},
		{"fraction", x, 8.5, Mean, "even number"},
		{"NaN", x, math.NaN(), Mean, "even number"},
		{"NaN in data", append(slices.Clone(x), math.NaN()), 8, Mean, "sample 64: got NaN"},
		{"average", x, 8, 7, "want median or mean"},
		{"no data", nil, 8, Mean, "longest stretch, 0 s"},
	} {
		_, err := Welch(tc.x, 1, tc.segment, tc.average)
		wantError(t, tc.why, err, tc.want)
	}
	s, err := Welch(x, 1, 8, Median)
	if err != nil {
		t.Fatal(err)
	}
	_, err = s.At(0.25)
	wantError(t, "zeros", err, "got density 0 at 0.25 Hz")
}

func TestInterpolation(t *testing.T) {
	s := &Spectrum{Start: 10, Step: 0.5, Density: []float64{1, 100, 1e-40, 4}}
	for _, tc := range []struct{ f, want float64 }{
		{10, 1}, {10.5, 100}, {10.25, 10}, {11.5, 4}, {10.125, math.Pow(10, 0.5)}, {11.25, 2e-20},
	} {
		got, err := s.At(tc.f)
		if err != nil || math.Abs(got/tc.want-1) > 1e-12 {
			t.Errorf("At(%v) = %v, %v, want %v", tc.f, got, err, tc.want)
		}
	}
	for _, f := range []float64{9.99, 11.51, math.NaN(), math.Inf(1)} {
		_, err := s.At(f)
		wantError(t, "off the grid", err, "want 10 to 11.5 Hz")
	}
	r, err := s.Resample(10, 0.25, 7)
	if err != nil || r.End() != 11.5 || math.Abs(r.Density[1]-10) > 1e-12 || r.Density[6] != 4 {
		t.Errorf("Resample: %+v, %v", r, err)
	}
	_, err = s.Resample(10, 0.25, 8)
	wantError(t, "grid too long", err, "want 10 to 11.5 Hz")
	s.Density[1] = math.NaN()
	_, err = s.At(10.3)
	wantError(t, "NaN beside", err, "got density NaN at 10.5 Hz")
}

// want: square roots of the densities in 1/sqrt(Hz), to three digits, worked out
// separately from the formulas of the same sources.
func TestCurves(t *testing.T) {
	for _, tc := range []struct {
		name    string
		f, want float64
	}{
		{"second-generation-broadband", 20, 1.90e-23}, {"second-generation-broadband", 100, 3.97e-24},
		{"second-generation-broadband", 250, 3.79e-24}, {"second-generation-broadband", 1000, 5.39e-24},
		{"second-generation-early", 20, 4.26e-23}, {"second-generation-early", 100, 2.86e-24},
		{"second-generation-early", 250, 1.85e-24}, {"second-generation-early", 1000, 1.42e-23},
		{"second-generation-3km", 100, 6.48e-24}, {"second-generation-3km", 500, 4.35e-24},
		{"third-generation-40km", 10, 7.1e-25}, {"third-generation-40km", 100, 2.12e-25}, {"third-generation-40km", 1000, 2.83e-25},
		{"third-generation-triangle", 10, 5.11e-24}, {"third-generation-triangle", 100, 2.52e-25},
		{"third-generation-triangle", 1000, 6.49e-25},
	} {
		density, err := Curve(tc.name)
		if err != nil {
			t.Fatal(err)
		}
		// Half of the last digit, which is a hundredth of 10^exponent, or a tenth.
		digits := 2.0
		if tc.name == "third-generation-40km" && tc.f == 10 {
			digits = 1
		}
		tol := 0.51 * math.Pow(10, math.Floor(math.Log10(tc.want))-digits)
		if got := math.Sqrt(density(tc.f)); math.Abs(got-tc.want) > tol {
			t.Errorf("%s at %v Hz: %.4g, want %.3g", tc.name, tc.f, got, tc.want)
		}
	}
	for _, name := range CurveNames() {
		density, _ := Curve(name)
		if !math.IsNaN(density(0.5)) || !math.IsNaN(density(math.NaN())) {
			t.Errorf("%s goes below its lowest frequency", name)
		}
		if _, err := SampleCurve(density, 0.25, 8193, 20); err != nil {
			t.Error(err)
		}
		_, err := SampleCurve(density, 0.25, 10, 0.5)
		wantError(t, "too low", err, "at 0.5 Hz")
	}
	_, err := Curve("none")
	wantError(t, "unknown", err, `"none"`, "second-generation-broadband", "third-generation-triangle")
}

func TestReadCurve(t *testing.T) {
	for _, column := range []Column{Density, AmplitudeDensity} {
		curve, err := ReadCurve(strings.NewReader("# f h\n10 1e-46\n100, 1e-48\n1000\t1e-48\n"), "c.txt", column)
		if err != nil {
			t.Fatal(err)
		}
		for _, tc := range []struct{ f, want float64 }{{10, 1e-46}, {1000, 1e-48}, {math.Sqrt(1000), 1e-47}, {300, 1e-48}} {
			want := tc.want
			if column == AmplitudeDensity {
				want *= want
			}
			if got := curve(tc.f); math.Abs(got/want-1) > 1e-12 {
				t.Errorf("at %v Hz: %v, want %v", tc.f, got, want)
			}
		}
		for _, f := range []float64{9.9, 1001, 0, -1, math.NaN()} {
			if got := curve(f); !math.IsNaN(got) {
				t.Errorf("at %v Hz, off the table: %v", f, got)
			}
		}
	}
	for _, tc := range []struct{ text, want string }{
		{"1 2 3\n", "c.txt:1: got 3 columns"}, {"1 2\n0 1\n", `c.txt:2: got "0" in column 1`}, {"1 -2\n", "column 2"},
		{"1 1\n1 2\n", "c.txt:2: got frequency 1"}, {"1 x\n", "column 2"}, {"1 1\n", "want at least 2"}, {"", "c.txt:0: got 0 points"},
	} {
		_, err := ReadCurve(strings.NewReader(tc.text), "c.txt", Density)
		wantError(t, tc.text, err, tc.want)
	}
}

func FuzzReadCurve(f *testing.F) {
	f.Add("# f h\n10 1e-46\n100, 1e-48\n1000\t1e-48\n", 50.0)
	f.Fuzz(func(t *testing.T, text string, at float64) {
		curve, err := ReadCurve(strings.NewReader(text), "x", AmplitudeDensity)
		if err == nil && curve(at) < 0 {
			t.Errorf("%q is negative at %v", text, at)
		}
	})
}
