package likelihood

import (
	"fmt"
	"math"

	"gonum.org/v1/gonum/dsp/fourier"

	"knell/models"
)

// Site is one site's data.
type Site struct {
	Code string
	// Strain has N samples, N even; the first Gate of them are gated.
	Strain []float64
	// Density is the noise's one-sided spectral density in 1/Hz at the N/2+1
	// frequencies k/D, finite and above zero everywhere (see Loud).
	Density []float64
	// Plus and Cross are the antenna response.
	Plus, Cross float64
	// Arrival is when the model's t = 0 arrives, s after the first sample.
	Arrival float64
}

// Settings is what the sites have in common.
type Settings struct {
	SampleRate float64 // Hz
	Gate       int     // samples at the start of each segment that are marginalised over
	// Grid is the analysed band: the frequencies at which the model is
	// computed. Its step is SampleRate over N.
	Grid models.Grid
}

// Gaussian is the likelihood of one event's data. It is read-only once built
// and may be used by any number of workers at once.
type Gaussian struct {
	settings Settings
	samples  int
	sites    []prepared
	logNoise float64
	window   *window // nil: the gate's samples come from a full transform
}

// prepared is one site's half of the inner products, over the grid.
type prepared struct {
	code        string
	plus, cross float64
	// dataRe and dataIm are (4/D) conj(rotor) (d - e) / S, where e is what the
	// gate takes off the data: the sum of their products with the model's
	// spectrum is <d|h> with the gate accounted for.
	dataRe, dataIm []float64
	weight         []float64 // 4 / (D S)
	// gateRe and gateIm are rotor * 2 / (N S): the model times these are the
	// coefficients of the sequence P h, with the gate's centre at sample 0.
	gateRe, gateIm []float64
	gate           *gate
}

// New prepares the likelihood: one factorisation of the gate per site, O(Gate^3).
// A density that is not finite and above zero, strain that is not finite, or a
// gate that cannot be factorised is an error naming site and place.
func New(sites []Site, s Settings) (*Gaussian, error) {
	if len(sites) == 0 {
		return nil, fmt.Errorf("likelihood: no site, want at least one")
	}
	n := len(sites[0].Strain)
	if n < 2 || n%2 != 0 {
		return nil, fmt.Errorf("likelihood: site %s has %d samples, want an even number", sites[0].Code, n)
	}
	if s.Gate < 0 || s.Gate >= n {
		return nil, fmt.Errorf("likelihood: a gate of %d samples in a segment of %d, want fewer", s.Gate, n)
	}
	if s.Grid.First < 1 || s.Grid.First+s.Grid.Count > n/2 {
		return nil, fmt.Errorf("likelihood: band from bin %d to %d, want within 1 to %d", s.Grid.First, s.Grid.First+s.Grid.Count-1, n/2-1)
	}
	g := &Gaussian{settings: s, samples: n, window: newWindow(n, s.Gate, s.Grid.First, s.Grid.Count)}
	for _, site := range sites {
		if len(site.Strain) != n || len(site.Density) != n/2+1 {
			return nil, fmt.Errorf("likelihood: site %s has %d samples and %d densities, want %d and %d", site.Code, len(site.Strain), len(site.Density), n, n/2+1)
		}
		for k, v := range site.Density {
			if !(v > 0) || math.IsInf(v, 0) {
				return nil, fmt.Errorf("likelihood: site %s: noise density at %g Hz = %g, want a finite number above zero", site.Code, float64(k)*s.SampleRate/float64(n), v)
			}
		}
		for i, v := range site.Strain {
			if math.IsNaN(v) || math.IsInf(v, 0) {
				return nil, fmt.Errorf("likelihood: site %s: strain sample %d = %g, want a finite number", site.Code, i, v)
			}
		}
		p, logNoise, err := g.prepare(site)
		if err != nil {
			return nil, fmt.Errorf("site %s: %w", site.Code, err)
		}
		g.sites = append(g.sites, p)
		g.logNoise += logNoise
	}
	return g, nil
}

// prepare computes what does not depend on the model.
func (g *Gaussian) prepare(site Site) (prepared, float64, error) {
	s, n := g.settings, g.samples
	fft := fourier.NewFFT(n)
	half := n/2 + 1
	precision := make([]float64, half)
	logDet := 0.0
	for k, v := range site.Density {
		eigenvalue := v * s.SampleRate / 2
		precision[k] = 1 / eigenvalue
		logDet += multiplicity(k, n) * math.Log(eigenvalue)
	}
	gate, err := newGate(precision, n, s.Gate)
	if err != nil {
		return prepared{}, 0, err
	}

	// Fill the gate with the values e that make (P (d - e))_G vanish.
	filled := append([]float64(nil), site.Strain...)
	spectrum := fft.Coefficients(nil, filled)
	for k := range spectrum {
		spectrum[k] *= complex(precision[k]/float64(n), 0)
	}
	e := fft.Sequence(nil, spectrum)[:s.Gate]
	gate.solve(e)
	for i, v := range e {
		filled[i] -= v
	}
	spectrum = fft.Coefficients(spectrum, filled)
	quadratic := 0.0
	for k, c := range spectrum {
		quadratic += multiplicity(k, n) * (real(c)*real(c) + imag(c)*imag(c)) * precision[k] / float64(n)
	}
	kept := float64(n - s.Gate)
	logNoise := -0.5 * (quadratic + logDet + gate.logDet + kept*math.Log(2*math.Pi))

	count := s.Grid.Count
	duration := float64(n) / s.SampleRate
	p := prepared{
		code: site.Code, plus: site.Plus, cross: site.Cross, gate: gate,
		dataRe: make([]float64, count), dataIm: make([]float64, count),
		weight: make([]float64, count),
		gateRe: make([]float64, count), gateIm: make([]float64, count),
	}
	for j := range count {
		k := s.Grid.First + j
		f := s.Grid.Frequency(j)
		sin, cos := math.Sincos(-2 * math.Pi * f * site.Arrival)
		w := 4 / (duration * site.Density[k])
		p.weight[j] = w
		// The continuous-transform convention: d = DFT / f_s.
		dr, di := real(spectrum[k])/s.SampleRate, imag(spectrum[k])/s.SampleRate
		p.dataRe[j], p.dataIm[j] = w*(dr*cos+di*sin), w*(di*cos-dr*sin)
		// P h has DFT coefficients h f_s / eigenvalue; the inverse transform's
		// 1/N goes in here too.
		c := 2 / (site.Density[k] * float64(n))
		if g.window != nil {
			sin, cos = math.Sincos(2 * math.Pi * (float64(k*g.window.shift)/float64(n) - f*site.Arrival))
		}
		p.gateRe[j], p.gateIm[j] = c*cos, c*sin
	}
	if g.window != nil {
		p.gate.scale(g.window.taper)
	}
	return p, logNoise, nil
}

// multiplicity is how often bin k of a half spectrum stands in the full one.
func multiplicity(k, n int) float64 {
	if k == 0 || 2*k == n {
		return 1
	}
	return 2
}

// LogNoise is ln L of the data under noise alone, with its constant: the log of
// the density of the samples outside the gate, all sites together, in nats (per
// strain^count).
func (g *Gaussian) LogNoise() float64 { return g.logNoise }

// Grid returns the analysed band.
func (g *Gaussian) Grid() models.Grid { return g.settings.Grid }
