package event

import (
	"fmt"
	"math"
	"path/filepath"
	"slices"
	"strings"
	"testing"

	"knell/configs"
	"knell/internal/random"
	"knell/likelihood"
	"knell/likelihood/site"
)

// twoSites is tiny with a second site far from the first, both without noise.
var twoSites = strings.Replace(tiny, "[injection]", `[[site]]
code      = "L1"
synthetic = { curve = "second-generation-broadband", seed = 4, length = 8.0, quiet = true }
noise     = { from = "curve" }

[injection]`, 1)

// injected holds the values of tiny's injection in the ringdown's order: mass,
// spin, start_time, amplitude, phase.
var injected = []float64{68, 0.69, 0, 4e-21, 1.3}

func mustLoad(t *testing.T, text string) *Prepared {
	t.Helper()
	p, err := load(t, filepath.Join(t.TempDir(), "event.toml"), text)
	if err != nil {
		t.Fatal(err)
	}
	return p
}

// demo is an embedded demo event's config.
func demo(t testing.TB, name string) *Config {
	t.Helper()
	file, text, err := configs.Demo(name)
	if err != nil {
		t.Fatal(err)
	}
	c, err := Decode(file, text)
	if err != nil {
		t.Fatal(err)
	}
	return c
}

func (p *Prepared) mustAt(t *testing.T, g *likelihood.Gaussian, theta []float64) float64 {
	t.Helper()
	h := *p.hypotheses[0]
	h.likelihood = g
	v, err := h.target().at(theta)
	if err != nil {
		t.Fatal(err)
	}
	return v
}

// siteList is the likelihood's input, for tests that change it.
func siteList(t *testing.T, p *Prepared) []likelihood.Site {
	t.Helper()
	again := &Prepared{Config: p.Config, geocentre: p.geocentre}
	var list []likelihood.Site
	for i, s := range p.Config.Sites {
		d, err := s.detector()
		if err != nil {
			t.Fatal(err)
		}
		data, err := again.siteData(i, d)
		if err != nil {
			t.Fatal(err)
		}
		list = append(list, data)
	}
	return list
}

func rebuilt(t *testing.T, p *Prepared, list []likelihood.Site) *likelihood.Gaussian {
	t.Helper()
	a := p.Config.Analysis
	g, err := likelihood.New(list, likelihood.Settings{SampleRate: a.SampleRate, Gate: a.gateSamples(), Grid: a.grid()})
	if err != nil {
		t.Fatal(err)
	}
	return g
}

// TestInjectedSignal: with no noise in the data the likelihood at the injected
// values is half the squared optimal signal-to-noise ratio, and is the highest.
// The injection is computed on a stretch of 8 s and conditioned with the strain,
// so this also tests the time origin, the response and the units of the whole
// road. The two differ because the data hold the signal at all frequencies and
// the model only those of the band and its joins; the noise outside is loud.
func TestInjectedSignal(t *testing.T) {
	for _, tc := range []struct {
		why, text string
		tolerance float64
	}{
		{"one site", tiny, 3e-4},
		{"two sites", twoSites, 3e-4},
		{"later start", strings.NewReplacer("start       = 0.0", "start = 0.003", "[prior]", "[prior]\nstart_time = { kind = \"fixed\", value = 0.0 }").Replace(twoSites), 1.5e-3},
		{"narrower band", strings.NewReplacer("460.0]", "400.0]").Replace(tiny), 3e-4},
	} {
		t.Run(tc.why, func(t *testing.T) {
			p := mustLoad(t, tc.text)
			h := p.hypotheses[0]
			target := h.target()
			got, err := target.at(injected)
			if err != nil {
				t.Fatal(err)
			}
			half := 0.0
			for _, snr := range p.likelihood.Worker().OptimalSNR(target.h, nil) {
				half += snr * snr / 2
			}
			if half < 20 {
				t.Fatalf("half the squared signal-to-noise ratio = %g: too faint to test anything", half)
			}
			t.Logf("ln L over noise %.6f, half the squared SNR %.6f: relative difference %.1e", got, half, got/half-1)
			if math.Abs(got/half-1) > tc.tolerance {
				t.Errorf("ln L over noise = %.4f, want %.4f", got, half)
			}
			// Near by and anywhere in the prior. A match of 1 - x at the injected
			// values leaves of the order of x^2 to gain elsewhere.
			rng := random.New(1, "around the injection")
			slack := 0.1 * math.Abs(got-half)
			u, theta := make([]float64, h.set.Dim()), make([]float64, len(injected))
			for i := range 200 {
				if i%2 == 0 {
					for j := range u {
						u[j] = rng.Float64()
					}
					h.place(u, theta)
				} else {
					copy(theta, injected)
					for _, j := range []int{0, 1, 3, 4} {
						theta[j] *= 1 + 0.05*rng.NormFloat64()
					}
				}
				if v := p.mustAt(t, p.likelihood, theta); v > got+slack {
					t.Errorf("at %v: ln L over noise = %.5f, above the %.5f at the injected values", theta, v, got)
				}
			}
		})
	}
}

// TestDelaySign: turning round one site's delay must spoil the match, for the
// sites here are 10 ms apart.
func TestDelaySign(t *testing.T) {
	p := mustLoad(t, twoSites)
	truth := p.mustAt(t, p.likelihood, injected)
	for i, s := range p.sites {
		list := siteList(t, p)
		list[i].Arrival -= 2 * float64(s.Delay)
		if wrong := p.mustAt(t, rebuilt(t, p, list), injected); wrong > truth/2 {
			t.Errorf("ln L with the delay of %s, %.2f ms, turned round = %.2f, of %.2f", s.Code, 1e3*float64(s.Delay), wrong, truth)
		}
	}
	if same := p.mustAt(t, rebuilt(t, p, siteList(t, p)), injected); same != truth {
		t.Errorf("ln L of the same data = %v, want %v", same, truth)
	}
}

// TestArrival: the wave comes first to the site under it. At the right ascension
// with the earliest arrival that is earth radius over the speed of light, 21.3
// ms, before the centre, for a site on the equator.
func TestArrival(t *testing.T) {
	const geometry = `{ latitude = 0.0, longitude = 1.0, x_azimuth = 0.3, y_azimuth = 1.8707963 }`
	text := strings.NewReplacer(`code      = "H1"`, "code = \"E1\"\ngeometry = "+geometry, "declination = 0.62", "declination = 0.0").Replace(tiny)
	where := func(rightAscension float64) string {
		return strings.Replace(text, "right_ascension = 1.95", fmt.Sprintf("right_ascension = %.4f", rightAscension), 1)
	}
	c, err := Decode("x.toml", []byte(text))
	if err != nil {
		t.Fatal(err)
	}
	detector, err := c.Sites[0].detector()
	if err != nil {
		t.Fatal(err)
	}
	earliest := 0.0
	for ra := 0.0; ra < 2*math.Pi; ra += 0.01 {
		if detector.Delay(ra, 0, c.Event.Time) < detector.Delay(earliest, 0, c.Event.Time) {
			earliest = ra
		}
	}
	for _, tc := range []struct {
		why  string
		ra   float64
		want float64 // s
	}{
		// 6378.137 km / 299792.458 km/s, WGS-84.
		{"overhead", earliest, -0.0212752},
		{"underfoot", math.Mod(earliest+math.Pi, 2*math.Pi), 0.0212752},
	} {
		p := mustLoad(t, where(tc.ra))
		if got := float64(p.sites[0].Delay); math.Abs(got-tc.want) > 1e-5 {
			t.Errorf("%s: delay %.5f s, want %.5f", tc.why, got, tc.want)
		}
		series, _, err := p.series(0, 1, 0, float64(p.sites[0].Delay))
		if err != nil {
			t.Fatal(err)
		}
		// The largest sample: the signal rises before its start and decays after
		// it, so within half a cycle of 4 ms, the millisecond by which the rise
		// overshoots, and a sample.
		peak := 0
		for i, v := range series.Values {
			if math.Abs(v) > math.Abs(series.Values[peak]) {
				peak = i
			}
		}
		if at := series.Time(peak) - p.geocentre; math.Abs(at-tc.want) > 0.004 {
			t.Errorf("%s: the signal is largest %.5f s after the event, want %.5f", tc.why, at, tc.want)
		}
	}
}

// TestGateHides: what the data hold inside the gate is nobody's business.
func TestGateHides(t *testing.T) {
	p := mustLoad(t, strings.ReplaceAll(twoSites, "quiet = true", "quiet = false"))
	list := siteList(t, p)
	a, b := p.mustAt(t, p.likelihood, injected), p.likelihood.LogNoise()
	rng := random.New(1, "garbage")
	gate := p.Config.Analysis.gateSamples()
	scale := 0.0
	for i := range list {
		list[i].Strain = slices.Clone(list[i].Strain)
		for k := range gate {
			list[i].Strain[k] = 1e-21 * rng.NormFloat64()
		}
		for _, v := range list[i].Strain {
			scale = max(scale, math.Abs(v))
		}
	}
	g := rebuilt(t, p, list)
	// The garbage's own inner product, about (1e-21/1e-23)^2 per sample, cancels:
	// 1e4 * 128 samples * 2^-52 times the conditioning of the gate's matrix.
	if got := p.mustAt(t, g, injected); math.Abs(got-a) > 1e-5*math.Abs(a) {
		t.Errorf("ln L over noise = %.10g with garbage in the gate, want %.10g", got, a)
	}
	if got := g.LogNoise(); math.Abs(got-b) > 1e-5*math.Abs(b) {
		t.Errorf("ln L of noise = %.10g with garbage in the gate, want %.10g", got, b)
	}
	// Past the gate the same garbage does show.
	for i := range list {
		list[i].Strain[gate+10] += 1e-21
	}
	if got := p.mustAt(t, rebuilt(t, p, list), injected); math.Abs(got-a) < 0.1 {
		t.Errorf("ln L over noise = %.10g with garbage behind the gate, want another than %.10g", got, a)
	}
}

// TestTimeAt: the event's time as a site saw it.
func TestTimeAt(t *testing.T) {
	text := strings.ReplaceAll(twoSites, "quiet = true", "quiet = false")
	p := mustLoad(t, text)
	for i, s := range p.Config.Sites {
		seen := fmt.Sprintf("time = %.7f\ntime_at = %q", p.geocentre+float64(p.sites[i].Delay), s.Code)
		q := mustLoad(t, strings.Replace(text, "time         = 1400000123.250", seen, 1))
		// 2.4e-7 s is the spacing of doubles at such a GPS time.
		if d := q.geocentre - p.geocentre; math.Abs(d) > 5e-7 {
			t.Errorf("event seen at %s: geocentre time off by %g s", s.Code, d)
		}
		a, b := p.mustAt(t, p.likelihood, injected), p.mustAt(t, q.likelihood, injected)
		if math.Abs(a-b) > 1e-3*math.Abs(a) {
			t.Errorf("event seen at %s: ln L over noise = %.6f, want %.6f", s.Code, b, a)
		}
	}
	// Without the key the same number is another time.
	if d, err := site.Lookup("H1"); err != nil || math.Abs(d.Delay(1.95, 0.62, 1400000123.25)) < 1e-3 {
		t.Errorf("delay of H1 too small to test anything (%v)", err)
	}
}

// TestPlaceKeepsPrior: whatever turns place gives to parameters, uniform points of
// the cube must come out as the prior: the shares below the prior's quantiles are
// right within five standard errors, also for the product of pairs.
func TestPlaceKeepsPrior(t *testing.T) {
	p := mustLoad(t, tiny)
	const n = 20000
	for _, h := range p.hypotheses {
		rng := random.New(1, "place", 1)
		dim := len(h.model.Parameters())
		below := make([][3]int, dim)
		both := map[[2]int]int{}
		u, theta := make([]float64, h.set.Dim()), make([]float64, dim)
		levels := [3]float64{0.1, 0.5, 0.9}
		for range n {
			for j := range u {
				u[j] = rng.Float64()
			}
			h.place(u, theta)
			for j, v := range theta {
				low, high := h.set.Prior(j).Support()
				if !(v >= low && v <= high) {
					t.Fatalf("%s: %s = %g, outside [%g, %g]", h.Name, h.model.Parameters()[j].Name, v, low, high)
				}
				for k, level := range levels {
					if v <= h.set.Prior(j).Quantile(level) {
						below[j][k]++
					}
				}
				for i := range j {
					if theta[i] <= h.set.Prior(i).Quantile(0.5) && v <= h.set.Prior(j).Quantile(0.5) {
						both[[2]int{i, j}]++
					}
				}
			}
		}
		free := func(j int) bool {
			low, high := h.set.Prior(j).Support()
			return low != high
		}
		check := func(what string, count int, share float64) {
			if sigma := math.Sqrt(n * share * (1 - share)); math.Abs(float64(count)-n*share) > 5*sigma {
				t.Errorf("%s: %s: %d of %d, want %.0f ± %.0f", h.Name, what, count, n, n*share, sigma)
			}
		}
		for j, q := range h.model.Parameters() {
			for k, level := range levels {
				if free(j) {
					check(fmt.Sprintf("%s below its %g quantile", q.Name, level), below[j][k], level)
				}
			}
			for i := range j {
				if free(i) && free(j) {
					check(q.Name+" and "+h.model.Parameters()[i].Name+" below their medians", both[[2]int{i, j}], 0.25)
				}
			}
		}
	}
}
