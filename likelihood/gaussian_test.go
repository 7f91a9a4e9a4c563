package likelihood

import (
	"fmt"
	"math"
	"testing"

	"gonum.org/v1/gonum/dsp/fourier"
	"gonum.org/v1/gonum/mat"

	"knell/internal/random"
	"knell/models"
)

// problem is a small synthetic event: coloured density over four decades, two
// sites, random strain, and a random spectrum that stands for a model.
type problem struct {
	sites    []Site
	settings Settings
	h        *models.Polarizations
}

func newProblem(t testing.TB, samples, gate int, scale float64) problem {
	t.Helper()
	const rate = 1024.0
	duration := float64(samples) / rate
	first, last := int(60*duration), int(400*duration)
	p := problem{settings: Settings{
		SampleRate: rate, Gate: gate,
		Grid: models.Grid{First: first, Count: last - first + 1, Step: 1 / duration},
	}}
	rng := random.New(11, "likelihood test")
	for i, code := range []string{"A1", "B1"} {
		density := make([]float64, samples/2+1)
		for k := range density {
			f := math.Max(1, float64(k)/duration)
			density[k] = scale * scale * (math.Pow(f/100, -4) + 1 + math.Pow(f/200, 2)) * (1 + 0.3*float64(i))
		}
		loud, err := Loud(density, density, 1/duration, 60, 400, 20)
		if err != nil {
			t.Fatal(err)
		}
		strain := make([]float64, samples)
		for j := range strain {
			strain[j] = 30 * scale * rng.NormFloat64()
		}
		p.sites = append(p.sites, Site{
			Code: code, Strain: strain, Density: loud,
			Plus: 0.4 - 0.9*float64(i), Cross: -0.7 + 0.2*float64(i),
			Arrival: float64(gate)/rate - 0.0003*float64(i),
		})
	}
	p.h = models.NewPolarizations(p.settings.Grid.Count)
	for _, x := range [][]float64{p.h.PlusRe, p.h.PlusIm, p.h.CrossRe, p.h.CrossIm} {
		for j := range x {
			x[j] = scale * rng.NormFloat64()
		}
	}
	return p
}

// series is the model's strain at a site in the time domain.
func (p problem) series(s Site, h *models.Polarizations) []float64 {
	n := len(s.Strain)
	c := make([]complex128, n/2+1)
	for j := range h.PlusRe {
		plus, cross := complex(h.PlusRe[j], h.PlusIm[j]), complex(h.CrossRe[j], h.CrossIm[j])
		sin, cos := math.Sincos(-2 * math.Pi * p.settings.Grid.Frequency(j) * s.Arrival)
		c[p.settings.Grid.First+j] = (complex(s.Plus, 0)*plus + complex(s.Cross, 0)*cross) * complex(cos, sin)
	}
	x := fourier.NewFFT(n).Sequence(nil, c)
	for i := range x {
		x[i] *= p.settings.SampleRate / float64(n)
	}
	return x
}

// denseLogLikelihood is the log-density of the samples outside the gate by a
// Cholesky factorisation of their own covariance: gonum's general-purpose linear
// algebra, no formula of this package.
func (p problem) denseLogLikelihood(t testing.TB, s Site, model []float64) float64 {
	t.Helper()
	n, g := len(s.Strain), p.settings.Gate
	c := make([]complex128, n/2+1)
	for k, v := range s.Density {
		c[k] = complex(v*p.settings.SampleRate/2/float64(n), 0)
	}
	row := fourier.NewFFT(n).Sequence(nil, c)
	kept := n - g
	cov := mat.NewSymDense(kept, nil)
	for i := range kept {
		for j := 0; j <= i; j++ {
			cov.SetSym(i, j, row[i-j])
		}
	}
	var chol mat.Cholesky
	if !chol.Factorize(cov) {
		t.Fatal("the dense covariance is not positive definite")
	}
	r := mat.NewVecDense(kept, nil)
	for i := range kept {
		r.SetVec(i, s.Strain[g+i]-model[g+i])
	}
	var solved mat.VecDense
	if err := chol.SolveVecTo(&solved, r); err != nil {
		t.Log(err) // a condition number, not a failure
	}
	return -0.5 * (mat.Dot(r, &solved) + chol.LogDet() + float64(kept)*math.Log(2*math.Pi))
}

func TestGatedLikelihoodIsTheDenseOne(t *testing.T) {
	for _, gate := range []int{0, 1, 32, 100, 200} {
		for _, scale := range []float64{1, 1e-23} {
			t.Run(fmt.Sprintf("gate=%d,scale=%g", gate, scale), func(t *testing.T) {
				p := newProblem(t, 512, gate, scale)
				g, err := New(p.sites, p.settings)
				if err != nil {
					t.Fatal(err)
				}
				wantNoise, wantSignal := 0.0, 0.0
				for _, s := range p.sites {
					wantNoise += p.denseLogLikelihood(t, s, make([]float64, len(s.Strain)))
					wantSignal += p.denseLogLikelihood(t, s, p.series(s, p.h))
				}
				// Both routes solve systems of condition number up to 1e9 (the
				// loud frequencies over the quietest), in double precision.
				const tol = 1e-6
				if got := g.LogNoise(); !(math.Abs(got-wantNoise) <= tol*math.Abs(wantNoise)) {
					t.Errorf("LogNoise = %.10g, dense %.10g", got, wantNoise)
				}
				got, want := g.Worker().LogRatio(p.h), wantSignal-wantNoise
				if !(math.Abs(got-want) <= tol*(math.Abs(want)+math.Abs(wantNoise)*1e-3)) {
					t.Errorf("LogRatio = %.12g, dense %.12g", got, want)
				}
			})
		}
	}
}

// Whatever the data hold inside the gate has no say.
func TestGateHidesTheData(t *testing.T) {
	p := newProblem(t, 1024, 128, 1e-23)
	before, err := New(p.sites, p.settings)
	if err != nil {
		t.Fatal(err)
	}
	for i := range p.sites {
		for j := range p.settings.Gate {
			p.sites[i].Strain[j] += 500e-23 * math.Sin(float64(j))
		}
	}
	after, err := New(p.sites, p.settings)
	if err != nil {
		t.Fatal(err)
	}
	if a, b := before.LogNoise(), after.LogNoise(); math.Abs(a-b) > 1e-9*math.Abs(a) {
		t.Errorf("LogNoise %.12g changes to %.12g", a, b)
	}
	if a, b := before.Worker().LogRatio(p.h), after.Worker().LogRatio(p.h); math.Abs(a-b) > 1e-8*math.Abs(a) {
		t.Errorf("LogRatio %.12g changes to %.12g", a, b)
	}
}

// An injection in no noise, at its own parameters, has ln L over noise of half
// the squared optimal SNR.
func TestInjectionInNoNoise(t *testing.T) {
	for _, gate := range []int{0, 64, 256} {
		p := newProblem(t, 2048, gate, 1e-23)
		for i := range p.sites {
			p.sites[i].Strain = p.series(p.sites[i], p.h)
		}
		g, err := New(p.sites, p.settings)
		if err != nil {
			t.Fatal(err)
		}
		w := g.Worker()
		half := 0.0
		for _, snr := range w.OptimalSNR(p.h, nil) {
			half += snr * snr / 2
		}
		if got := w.LogRatio(p.h); math.Abs(got-half) > 1e-10*half {
			t.Errorf("gate %d: LogRatio = %.15g, want SNR^2/2 = %.15g", gate, got, half)
		}
	}
}

// The folded route and the full transform give the same gated products.
func TestWindowIsTheFullTransform(t *testing.T) {
	for _, tc := range []struct{ samples, gate int }{{4096, 64}, {4096, 511}, {3000, 150}, {8192, 512}} {
		p := newProblem(t, tc.samples, tc.gate, 1e-23)
		folded, err := New(p.sites, p.settings)
		if err != nil {
			t.Fatal(err)
		}
		if folded.window == nil {
			t.Fatalf("%d samples, gate %d: no window", tc.samples, tc.gate)
		}
		full := *folded
		full.window = nil
		full.sites = nil
		for _, s := range p.sites {
			prepared, _, err := full.prepare(s)
			if err != nil {
				t.Fatal(err)
			}
			full.sites = append(full.sites, prepared)
		}
		a, b := folded.Worker(), full.Worker()
		for i := range full.sites {
			_, got := a.products(&folded.sites[i], p.h)
			_, want := b.products(&full.sites[i], p.h)
			// 1e-10 of the largest sample, in amplitude, is the window's promise;
			// the square of the gated part is at most that of the whole.
			if math.Abs(got/want-1) > 4e-10 {
				t.Errorf("%d samples, gate %d: <h|h> = %.12g, by a full transform %.12g", tc.samples, tc.gate, got, want)
			}
			t.Logf("%d samples, gate %d: relative difference %.1e", tc.samples, tc.gate, got/want-1)
		}
	}
}

func TestRejects(t *testing.T) {
	for _, tc := range []struct {
		why   string
		spoil func(*problem)
	}{
		{"NaN strain", func(p *problem) { p.sites[1].Strain[5] = math.NaN() }},
		{"zero density", func(p *problem) { p.sites[0].Density[9] = 0 }},
		{"infinite density", func(p *problem) { p.sites[0].Density[9] = math.Inf(1) }},
		{"unequal lengths", func(p *problem) { p.sites[1].Strain = p.sites[1].Strain[:500] }},
		{"gate of the whole segment", func(p *problem) { p.settings.Gate = 512 }},
		{"band at Nyquist", func(p *problem) { p.settings.Grid.Count = 512 }},
		{"no site", func(p *problem) { p.sites = nil }},
	} {
		p := newProblem(t, 512, 16, 1e-23)
		tc.spoil(&p)
		if _, err := New(p.sites, p.settings); err == nil {
			t.Errorf("%s: no error", tc.why)
		}
	}
}

func TestLogRatioAllocatesNothing(t *testing.T) {
	p := newProblem(t, 1024, 128, 1e-23)
	g, err := New(p.sites, p.settings)
	if err != nil {
		t.Fatal(err)
	}
	w := g.Worker()
	if n := testing.AllocsPerRun(10, func() { w.LogRatio(p.h) }); n != 0 {
		t.Errorf("LogRatio allocates %g times", n)
	}
}

func TestLoud(t *testing.T) {
	density := make([]float64, 101)
	for k := range density {
		density[k] = 2
	}
	density[0] = 0            // as conditioned data have it
	density[90] = 2000        // a line above the band
	density[95] = math.Inf(1) // no measurement
	out, err := Loud(density, density, 1, 20, 60, 10)
	if err != nil {
		t.Fatal(err)
	}
	for k, v := range out {
		switch {
		case k == 90 && v != loudMargin*2000:
			t.Errorf("density at the line = %g, want %g", v, loudMargin*2000.0)
		case k == 90:
		case k >= 20 && k <= 60 && v != 2:
			t.Errorf("density at %d Hz inside the band changes to %g", k, v)
		case k <= 10 && math.Abs(v/(2*loudBelow)-1) > 1e-12:
			t.Errorf("density at %d Hz = %g, want %g", k, v, 2*loudBelow)
		case k >= 70 && math.Abs(v/(2*loudAbove)-1) > 1e-12:
			t.Errorf("density at %d Hz = %g, want %g", k, v, 2.0*loudAbove)
		case k > 0 && k <= 20 && v > out[k-1], k > 60 && k < 70 && v < out[k-1]:
			t.Errorf("density is not monotone across the ramp at %d Hz", k)
		}
	}
	if _, err := Loud(density, density, 1, 0.5, 60, 10); err != nil {
		t.Errorf("a band from the first bin: %v", err)
	}
	if _, err := Loud(density, density, 1, 20, 100, 10); err == nil {
		t.Error("a band that reaches Nyquist gives no error")
	}
	density[30] = math.NaN()
	if _, err := Loud(density, density, 1, 20, 60, 10); err == nil {
		t.Error("a NaN in the band gives no error")
	}
}

func BenchmarkLogRatio(b *testing.B) {
	for _, gate := range []int{0, 128, 256, 512} {
		b.Run(fmt.Sprintf("gate=%d", gate), func(b *testing.B) {
			p := newProblem(b, 8192, gate, 1e-23)
			g, err := New(p.sites, p.settings)
			if err != nil {
				b.Fatal(err)
			}
			w := g.Worker()
			b.ReportAllocs()
			for b.Loop() {
				w.LogRatio(p.h)
			}
			bins := float64(b.N) * float64(p.settings.Grid.Count*len(p.sites))
			b.ReportMetric(float64(b.Elapsed().Nanoseconds())/bins, "ns/bin")
		})
	}
}
