package event

import (
	"errors"
	"fmt"
	"math"
	"os"

	"gonum.org/v1/gonum/dsp/fourier"

	"knell/internal/random"
	"knell/likelihood/strain"
	"knell/models"
)

// series reads a site's strain or makes it, with the injection if there is one,
// and says where it is from.
func (p *Prepared) series(i int, plus, cross, delay float64) (*strain.Series, string, error) {
	c, s := p.Config, p.Config.Sites[i]
	var series *strain.Series
	var source string
	var err error
	if s.Synthetic != nil {
		series, err = p.synthesize(i)
		source = "synthetic, " + s.Synthetic.Curve
	} else {
		path := c.path(s.Strain)
		if info, e := os.Stat(path); e == nil && info.IsDir() {
			return nil, "", c.fault(c.sourceKey(i), fmt.Errorf("%s is a folder, want a strain file", path))
		}
		series, err = strain.ReadFile(path, s.Code)
		source = s.Strain
	}
	if unfit := new(InputError); errors.As(err, &unfit) {
		return nil, "", unfit
	}
	if err != nil {
		return nil, "", c.fault(c.sourceKey(i), err)
	}
	if c.Injection != nil {
		if err := p.inject(series, plus, cross, delay); err != nil {
			return nil, "", err
		}
		source += ", with an injected signal"
	}
	return series, source, nil
}

// synthesize makes a site's noise; its stream depends on the noise's own seed
// and the site's place in the list, not on the sampler's seed.
func (p *Prepared) synthesize(i int) (*strain.Series, error) {
	s, a := p.Config.Sites[i], p.Config.Analysis
	y := s.Synthetic
	if a.SampleRate != math.Floor(a.SampleRate) {
		const key = "analysis.sample_rate"
		return nil, &InputError{File: p.Config.File, Line: p.Config.lines.line(key), Key: key, Got: fmt.Sprint(a.SampleRate), Want: "a whole number of Hz for synthetic strain"}
	}
	if y.Length > 4096 || y.Length*a.SampleRate > 1<<26 {
		return nil, fmt.Errorf("length %g s, want at most 4096 s and %d samples", y.Length, 1<<26)
	}
	n := int(y.Length * a.SampleRate)
	series := &strain.Series{
		File: "synthetic", Site: s.Code, SampleRate: a.SampleRate,
		StartSeconds: int64(math.Floor(p.geocentre - y.Length/2)),
	}
	if y.Quiet {
		series.Values = make([]float64, n)
		return series, nil
	}
	curve, err := strain.Curve(y.Curve)
	if err != nil {
		return nil, err
	}
	// A few hertz below the conditioning filter's reach nothing matters.
	lowest := math.Max(a.Low/2, lowestOf(curve, a.Low))
	series.Values, err = strain.Synthesize(random.New(y.Seed, "noise", uint64(i)), curve, a.SampleRate, n, lowest)
	return series, err
}

// lowestOf is the lowest whole frequency up to limit at which a curve holds.
func lowestOf(curve func(float64) float64, limit float64) float64 {
	for f := 1.0; f < limit; f++ {
		if v := curve(f); v > 0 && !math.IsInf(v, 0) {
			return f
		}
	}
	return limit
}

// injectionLength is the shortest stretch on which an injection is computed, s.
const injectionLength = 8.0

// injectionRise is how long before its start an injected ringdown begins, s, where the
// start is not after the analysis start.
const injectionRise = 0.05

// inject adds the known signal to a site's strain.
func (p *Prepared) inject(series *strain.Series, plus, cross, delay float64) error {
	c := p.Config
	rate := series.SampleRate
	length := math.Max(injectionLength, 2*c.Analysis.Duration)
	n := 2 * int(length*rate/2)
	length = float64(n) / rate
	// A quarter of the stretch lies before the signal.
	const before = 0.25
	settings := c.injectionSettings()
	settings.Grid = models.Grid{First: 1, Count: n/2 - 1, Step: 1 / length}
	settings.Length = (1 - before) * length
	// Rising before its start as a merger does, within a few cycles, where that is not
	// analysed: a hypothesis whose start lies in the data begins with a jump there.
	if c.Injection.Values["start_time"] <= c.Analysis.Start {
		settings.Lead = injectionRise
	}
	model, err := models.New(settings)
	if err != nil {
		return c.fault("injection", err)
	}
	theta := make([]float64, 0, len(c.Injection.Values))
	for _, parameter := range model.Parameters() {
		v, given := c.Injection.Values[parameter.Name]
		if !given {
			v = parameter.Default
		}
		theta = append(theta, v)
	}
	h := models.NewPolarizations(settings.Grid.Count)
	if err := model.Fill(theta, h); err != nil {
		return c.fault("injection", err)
	}
	at := series.Offset(p.geocentre+delay) - before*length
	first := int(math.Floor(at * rate))
	late := at - float64(first)/rate + before*length
	spectrum := make([]complex128, n/2+1)
	for j := range settings.Grid.Count {
		f := settings.Grid.Frequency(j)
		sin, cos := math.Sincos(-2 * math.Pi * f * late)
		// Rolled off towards Nyquist, as an anti-alias filter does.
		roll := 1.0
		if x := (f/(rate/2) - strain.PassHigh) / (1 - strain.PassHigh); x > 0 {
			roll = 0.5 + 0.5*math.Cos(math.Pi*x)
		}
		re := plus*h.PlusRe[j] + cross*h.CrossRe[j]
		im := plus*h.PlusIm[j] + cross*h.CrossIm[j]
		spectrum[j+1] = complex(re, im) * complex(roll*cos, roll*sin)
	}
	wave := fourier.NewFFT(n).Sequence(nil, spectrum)
	for k, v := range wave {
		if i := first + k; i >= 0 && i < len(series.Values) {
			series.Values[i] += v / length
		}
	}
	return nil
}

// injectionSettings is the injection's model without its grid; its t = 0 is the
// event's time.
func (c *Config) injectionSettings() models.Settings {
	s := c.Injection.settings()
	s.Inclination = c.Event.Inclination
	return s
}
