package event

import (
	"errors"
	"fmt"
	"io/fs"
	"math"
	"path/filepath"
	"strings"

	"knell/internal/report"
	"knell/likelihood"
	"knell/likelihood/site"
	"knell/likelihood/strain"
)

// Prepared is an event with its data read and its hypotheses built.
type Prepared struct {
	Config     *Config
	Notes      []string // what the reader of a result must know about the data
	likelihood *likelihood.Gaussian
	hypotheses []*hypothesis
	sites      []report.Site
	geocentre  float64 // GPS s of the event at the geocentre
}

// Load reads the data and builds the likelihood and the hypotheses. What the user
// gave wrongly is an *InputError.
func Load(c *Config) (*Prepared, error) {
	p := &Prepared{Config: c}
	detectors := make([]site.Site, len(c.Sites))
	for i, s := range c.Sites {
		d, err := s.detector()
		if err != nil {
			return nil, c.geometryFault(i, err)
		}
		detectors[i] = d
	}
	e := c.Event
	p.geocentre = e.Time
	for i, s := range c.Sites {
		if s.Code == e.TimeAt {
			p.geocentre -= detectors[i].Delay(e.RightAscension, e.Declination, e.Time)
		}
	}
	data := make([]likelihood.Site, len(c.Sites))
	for i := range c.Sites {
		var err error
		if data[i], err = p.siteData(i, detectors[i]); err != nil {
			return nil, err
		}
	}
	var err error
	p.likelihood, err = likelihood.New(data, likelihood.Settings{
		SampleRate: c.Analysis.SampleRate, Gate: c.Analysis.gateSamples(), Grid: c.Analysis.grid(),
	})
	if err != nil {
		return nil, c.fault("site", err)
	}
	if c.Analysis.Gate == 0 {
		p.Notes = append(p.Notes, "No gate: signal from before the analysis start enters the likelihood as if the model described it.")
	}
	for _, h := range c.Hypotheses {
		built, err := newHypothesis(h, c, p.likelihood)
		if err != nil {
			return nil, err
		}
		// The sampler's own bound, met here because here it has a line.
		if least := 4 * (built.set.Dim() + 1); c.Sampler.LivePoints < least {
			return nil, &InputError{File: c.File, Line: c.lines.line("sampler.live_points"), Key: "sampler.live_points", Got: fmt.Sprint(c.Sampler.LivePoints), Want: fmt.Sprintf("at least %d for the %d free parameters of %s", least, built.set.Dim(), h.Name)}
		}
		p.hypotheses = append(p.hypotheses, built)
	}
	return p, nil
}

// fault turns a complaint of a package below into one that points into the file.
func (c *Config) fault(key string, err error) error {
	e := &InputError{File: c.File, Line: c.lines.line(key), Key: key, Err: err}
	if unreadable := new(fs.PathError); errors.As(err, &unreadable) {
		e.Err = fmt.Errorf("%s: %w", unreadable.Path, unreadable.Err)
		e.Want = "a file that can be read"
	}
	return e
}

// geometryFault names the key of a geometry that is wrong.
func (c *Config) geometryFault(i int, err error) error {
	key := fmt.Sprintf("site[%d].geometry", i)
	var f *site.FieldError
	if !errors.As(err, &f) {
		return c.fault(key, err)
	}
	name := strings.NewReplacer("Azimuth", "_azimuth", "Tilt", "_tilt").Replace(f.Field)
	return &InputError{File: c.File, Line: c.lines.line(key + "." + name), Key: key + "." + name, Got: f.Got, Want: f.Want}
}

// sourceKey is the key that says where a site's strain is from.
func (c *Config) sourceKey(i int) string {
	if c.Sites[i].Synthetic != nil {
		return fmt.Sprintf("site[%d].synthetic", i)
	}
	return fmt.Sprintf("site[%d].strain", i)
}

// path is a file named in the event file, which is relative to its folder.
func (c *Config) path(name string) string {
	if filepath.IsAbs(name) {
		return name
	}
	return filepath.Join(c.Folder, name)
}

func (s Site) detector() (site.Site, error) {
	if g := s.Geometry; g != nil {
		return site.New(s.Code, g.Latitude, g.Longitude, g.Height, g.XAzimuth, g.YAzimuth, g.XTilt, g.YTilt)
	}
	return site.Lookup(s.Code)
}

// siteData reads one site's strain and noise and cuts its segment.
func (p *Prepared) siteData(i int, d site.Site) (likelihood.Site, error) {
	c, s, a := p.Config, p.Config.Sites[i], p.Config.Analysis
	key := c.sourceKey(i)
	e := c.Event
	delay := d.Delay(e.RightAscension, e.Declination, p.geocentre)
	plus, cross := d.Response(e.RightAscension, e.Declination, e.Polarization, p.geocentre)
	series, source, err := p.series(i, plus, cross, delay)
	if err != nil {
		return likelihood.Site{}, err
	}
	start := p.geocentre + a.Start + delay
	whole := series
	if series, err = series.Stretch(start); err != nil {
		return likelihood.Site{}, c.fault(key, err)
	}
	rate := series.SampleRate
	if series, err = strain.Condition(series, a.SampleRate, a.Low); err != nil {
		if q := rate / a.SampleRate; q < 1 || q != math.Floor(q) {
			return likelihood.Site{}, c.fault("analysis.sample_rate", err)
		}
		return likelihood.Site{}, c.fault(key, besideGap(err, whole, start))
	}
	if high := strain.PassHigh * a.SampleRate / 2; rate > a.SampleRate && a.High > high {
		return likelihood.Site{}, c.fault("analysis.band", fmt.Errorf("%g Hz at a sample rate of %g Hz, want at most %g Hz: above it lies the filter that lowers the rate of %s from %g Hz", a.High, a.SampleRate, high, s.Code, rate))
	}
	// The first sample outside the gate is the first at or after the start.
	from := series.Index(start) - a.gateSamples()
	to := from + a.samples()
	if err := series.Check(series.Time(from), series.Time(to)); err != nil {
		err = fmt.Errorf("the analysed segment (analysis.gate and analysis.duration around analysis.start): %w", err)
		return likelihood.Site{}, c.fault(key, besideGap(err, whole, start))
	}
	noise, described, err := p.density(fmt.Sprintf("site[%d]", i), s, series, from, to)
	if err != nil {
		return likelihood.Site{}, err
	}
	p.sites = append(p.sites, report.Site{
		Code: s.Code, Strain: source, Noise: described, Delay: report.Number(delay),
		AntennaPlus: report.Number(plus), AntennaCross: report.Number(cross),
	})
	return likelihood.Site{
		Code: s.Code, Strain: series.Values[from:to], Density: noise, Plus: plus, Cross: cross,
		Arrival: series.Offset(start) - float64(from)/series.SampleRate,
	}, nil
}

// besideGap adds to a complaint about the stretch around GPS time at which gaps
// bound it; a series without gaps leaves the complaint as it is.
func besideGap(err error, s *strain.Series, at float64) error {
	i, before, after := s.Index(at), -1, -1
	for k, g := range s.Gaps {
		if g.End <= i && (before < 0 || g.End > s.Gaps[before].End) {
			before = k
		}
		if g.First > i && after < 0 {
			after = k
		}
	}
	text := ""
	for _, k := range []int{before, after} {
		if k >= 0 {
			g := s.Gaps[k]
			text += fmt.Sprintf(", gap from GPS %.6f to %.6f (%s)", s.Time(g.First), s.Time(g.End), g.Why)
		}
	}
	if text == "" {
		return err
	}
	return fmt.Errorf("%w; what can be used ends at the%s", err, strings.TrimPrefix(text, ","))
}
