package event

import (
	"bytes"
	"errors"
	"fmt"
	"math"
	"os"
	"path/filepath"
	"regexp"
	"sort"
	"strings"

	"github.com/BurntSushi/toml"

	"knell/likelihood/site"
	"knell/likelihood/strain"
	"knell/models"
	"knell/priors"
)

// Defaults of keys that a file may leave out.
const (
	DefaultGate          = 0.25 // s
	DefaultSegment       = 2.0  // s
	DefaultLength        = 32.0 // s
	DefaultLivePoints    = 1000
	DefaultEvidenceError = 0.15
	DefaultRemaining     = 0.001 // nat
)

// ReadConfig reads and checks the event file at path.
func ReadConfig(path string) (*Config, error) {
	text, err := os.ReadFile(path)
	if err != nil {
		var p *os.PathError
		if errors.As(err, &p) {
			// The message names the path already.
			err = p.Err
		}
		return nil, &InputError{File: path, Got: "event file", Err: err, Want: "a readable TOML file"}
	}
	return Decode(path, text)
}

// Decode checks the text of an event file; name stands for it in messages, and
// relative paths in it start at name's folder. Every fault is an *InputError.
func Decode(name string, text []byte) (*Config, error) {
	// Some editors begin a file with a byte order mark. It must not end up in
	// the middle of what AsRun gives back.
	text = bytes.TrimPrefix(text, []byte("\xef\xbb\xbf"))
	values := map[string]any{}
	if _, err := toml.Decode(string(text), &values); err != nil {
		e := &InputError{File: name, Got: err.Error(), Want: "TOML 1.0"}
		var syntax toml.ParseError
		if errors.As(err, &syntax) {
			e.Line, e.Got = syntax.Position.Line, strings.TrimSuffix(syntax.Message, ".")
			if e.Got == "" {
				e.Got = strings.TrimPrefix(syntax.Error(), "toml: ")
			}
			e.Key = syntax.LastKey
			if e.Key != "" {
				e.Key, e.Got = "near the key "+e.Key+": "+e.Got, ""
			}
		}
		return nil, e
	}
	d := &decoder{file: name, lines: newLineIndex(string(text))}
	c := &Config{File: name, Folder: filepath.Dir(name), Source: text, lines: d.lines, inserted: map[int][]string{}}
	d.config(c, &table{d: d, values: values})
	if d.err != nil {
		return nil, d.err
	}
	return c, nil
}

func positive(x float64) bool    { return x > 0 }
func notNegative(x float64) bool { return x >= 0 }

const (
	wantSeconds  = "seconds, a number above zero"
	wantAngle    = "an angle in rad"
	wantTable    = "a table { key = value, ... }"
	wantFilePath = "the path of a file, in quotes"
)

func (d *decoder) config(c *Config, t *table) {
	c.Title = t.textOr("title", strings.TrimSuffix(filepath.Base(c.File), ".toml"), "a text")
	c.Seed = uint64(t.integerOr("seed", 1, "a whole number, 0 or more", func(n int64) bool { return n >= 0 }))
	d.event(&c.Event, t.sub("event", "a table [event] with time and sky"))
	for _, s := range t.subs("site", "at least one [[site]]") {
		c.Sites = append(c.Sites, d.site(s, c.Sites))
	}
	d.analysis(&c.Analysis, t.sub("analysis", "a table [analysis]"))
	d.sampler(&c.Sampler, t)
	if t.has("injection") {
		c.Injection = d.injection(t.sub("injection", wantTable))
	}
	shared := map[string]NamedPrior{}
	if t.has("prior") {
		shared = d.priors(t.sub("prior", "a table [prior] of priors by parameter"))
	}
	used := map[string]bool{}
	for _, h := range t.subs("hypothesis", "at least one [[hypothesis]]") {
		c.Hypotheses = append(c.Hypotheses, d.hypothesis(h, c, shared, used))
	}
	t.known = append(t.known, "injection", "prior", "sampler")
	t.finish()
	if d.err != nil {
		return
	}
	if c.Injection != nil {
		d.checkInjection(c)
	}
	for _, s := range c.Sites {
		if c.Analysis.Gate == 0 && s.Strain != "" {
			d.fail("analysis.gate", "0", fmt.Sprintf("above 0 s: the strain of %s does not begin and end in silence, and without a gate the segment's ends would be taken to join", s.Code))
		}
	}
	if c.Event.TimeAt != "" && !c.hasSite(c.Event.TimeAt) {
		d.fail("event.time_at", show(c.Event.TimeAt), "the code of a [[site]], or no such key for the geocentre")
	}
	for _, name := range sortedKeys(shared) {
		if !used[name] {
			d.fail("prior."+name, "a prior", "a parameter of one of the hypotheses")
		}
	}
}

func (c *Config) hasSite(code string) bool {
	for _, s := range c.Sites {
		if s.Code == code {
			return true
		}
	}
	return false
}

// maxTime is the last GPS time that a strain file may declare, s.
const maxTime = 1e11

func (d *decoder) event(e *Event, t *table) {
	e.Time = t.number("time", "the GPS time of the peak in s", func(x float64) bool { return x > 0 && x < maxTime })
	e.TimeAt = t.textOr("time_at", "", "the code of a [[site]]")
	sky := t.sub("sky", "{ right_ascension = rad, declination = rad }")
	e.RightAscension = sky.number("right_ascension", wantAngle, nil)
	e.Declination = sky.number("declination", "an angle from -pi/2 to pi/2 rad", func(x float64) bool { return math.Abs(x) <= math.Pi/2 })
	sky.finish()
	e.Polarization = t.numberOr("polarization", 0, wantAngle, nil)
	e.Inclination = t.numberOr("inclination", 0, "an angle from 0 to pi rad", func(x float64) bool { return x >= 0 && x <= math.Pi })
	t.finish()
}

var siteCode = regexp.MustCompile(`^[A-Z][A-Z0-9]$`)

func (d *decoder) site(t *table, before []Site) Site {
	const wantCode = `two characters, e.g. "H1"`
	s := Site{Code: t.text("code", wantCode)}
	if d.err == nil && !siteCode.MatchString(s.Code) {
		t.fail("code", wantCode)
	}
	for _, b := range before {
		if b.Code == s.Code {
			t.fail("code", "each site once")
		}
	}
	if t.has("geometry") {
		g := t.sub("geometry", wantTable)
		s.Geometry = &Geometry{
			Latitude:  g.number("latitude", "an angle from -pi/2 to pi/2 rad", func(x float64) bool { return math.Abs(x) <= math.Pi/2 }),
			Longitude: g.number("longitude", "an angle in rad, east positive", nil),
			Height:    g.numberOr("height", 0, "metres", nil),
			XAzimuth:  g.number("x_azimuth", "an angle in rad, clockwise from north", nil),
			YAzimuth:  g.number("y_azimuth", "an angle in rad, clockwise from north", nil),
			XTilt:     g.numberOr("x_tilt", 0, wantAngle, nil),
			YTilt:     g.numberOr("y_tilt", 0, wantAngle, nil),
		}
		g.finish()
	} else if d.err == nil {
		if _, err := site.Lookup(s.Code); err != nil {
			t.fail("code", fmt.Sprintf("a site of the catalogue (%s), or a geometry = {...} beside it", strings.Join(site.Codes(), ", ")))
		}
	}
	switch {
	case t.has("strain") && t.has("synthetic"):
		t.fail("strain", "either strain or synthetic, not both")
	case t.has("synthetic"):
		y := t.sub("synthetic", wantTable)
		s.Synthetic = &Synthetic{
			Curve:  y.choiceOr("curve", "", strain.CurveNames()),
			Seed:   uint64(y.integerOr("seed", 1, "a whole number, 0 or more", func(n int64) bool { return n >= 0 })),
			Length: y.numberOr("length", DefaultLength, wantSeconds, positive),
			Quiet:  y.flagOr("quiet", false),
		}
		y.finish()
	default:
		s.Strain = t.text("strain", wantFilePath+", or synthetic = {...}")
	}
	s.Noise = d.noise(t, s)
	t.finish()
	return s
}

func (d *decoder) noise(t *table, s Site) Noise {
	n := Noise{From: "data", Average: "median", Segment: DefaultSegment, Smooth: -1}
	if !t.has("noise") {
		t.known = append(t.known, "noise")
		return n
	}
	t = t.sub("noise", wantTable)
	n.From = t.choiceOr("from", "data", []string{"data", "curve", "file"})
	switch n.From {
	case "data":
		n.Average = t.choiceOr("average", "median", []string{"median", "mean"})
		n.Segment = t.numberOr("segment", DefaultSegment, wantSeconds, positive)
	case "curve":
		fallback := ""
		if s.Synthetic != nil {
			fallback = s.Synthetic.Curve
		}
		n.Curve = t.choiceOr("curve", fallback, strain.CurveNames())
	case "file":
		n.File = t.text("file", wantFilePath)
	}
	n.Smooth = t.numberOr("smooth", -1, "seconds, 0 or more", notNegative)
	t.finish()
	return n
}

func (d *decoder) analysis(a *Analysis, t *table) {
	a.SampleRate = t.number("sample_rate", "Hz, a number above zero", positive)
	a.Duration = t.number("duration", wantSeconds, positive)
	a.Start = t.numberOr("start", 0, "seconds after event.time", nil)
	a.Gate = t.numberOr("gate", DefaultGate, "seconds, 0 or more", notNegative)
	const wantBand = "[low, high] in Hz with 0 < low < high"
	v, _ := t.take("band")
	list, _ := v.([]any)
	if len(list) != 2 {
		t.fail("band", wantBand)
	} else {
		low, ok1 := asNumber(list[0])
		high, ok2 := asNumber(list[1])
		a.Low, a.High = low, high
		if !ok1 || !ok2 || !(low > 0 && low < high) {
			t.fail("band", wantBand)
		}
	}
	t.finish()
	if d.err != nil {
		return
	}
	if nyquist := a.SampleRate / 2; a.High >= nyquist {
		t.fail("band", fmt.Sprintf("a band below the Nyquist frequency of %g Hz (half of analysis.sample_rate)", nyquist))
	}
	// 1.1 s at 1000 Hz are 1100.0000000000002 samples in binary.
	n := a.Duration * a.SampleRate
	switch whole := math.Round(n); {
	case !(math.Abs(n-whole) <= 1e-9*n) || math.Mod(whole, 2) != 0:
		t.fail("duration", fmt.Sprintf("an even number of samples; %g s at %g Hz are %.12g", a.Duration, a.SampleRate, n))
	case n > maxSamples:
		t.fail("duration", fmt.Sprintf("at most %d samples; %g s at %g Hz are %.12g", maxSamples, a.Duration, a.SampleRate, n))
	default:
		a.Duration = whole / a.SampleRate
	}
	if a.Gate >= a.Duration/2 {
		t.fail("gate", fmt.Sprintf("less than half of the duration of %g s", a.Duration))
	}
	if a.Gate > 0 && a.gateSamples() < 1 {
		t.fail("gate", fmt.Sprintf("0 or at least one sample, %g s", 1/a.SampleRate))
	}
	if a.Gate*a.SampleRate > maxGate {
		t.fail("gate", fmt.Sprintf("at most %d samples, %g s at this sample rate", maxGate, maxGate/a.SampleRate))
	}
	if a.Low < 2/a.Duration {
		t.fail("band", fmt.Sprintf("a lower edge of at least %g Hz, two cycles in the duration", 2/a.Duration))
	}
	if d.err == nil && math.Floor(a.High*a.Duration+1e-9) < math.Ceil(a.Low*a.Duration-1e-9) {
		t.fail("band", fmt.Sprintf("at least one multiple of %g Hz, one over the duration, within it", 1/a.Duration))
	}
}

const (
	maxSamples = 1 << 24 // of a segment
	maxGate    = 8192    // samples; bounds the factorised matrix to 512 MiB
)

func (d *decoder) sampler(s *Sampler, top *table) {
	t := &table{d: d, path: "sampler"}
	if top.has("sampler") {
		t = top.sub("sampler", "a table [sampler]")
	}
	s.LivePoints = int(t.integerOr("live_points", DefaultLivePoints, "a whole number from 100 to 1000000", func(n int64) bool { return n >= 100 && n <= 1e6 }))
	s.EvidenceError = t.numberOr("evidence_error", DefaultEvidenceError, "nat, 0.01 or more", func(x float64) bool { return x >= 0.01 })
	s.Remaining = t.numberOr("remaining", DefaultRemaining, "nat, above 0 and at most 1", func(x float64) bool { return x > 0 && x <= 1 })
	s.MaxCalls = t.integerOr("max_calls", 0, "0 for no limit, or at least live_points", func(n int64) bool { return n == 0 || n >= int64(s.LivePoints) })
	t.finish()
}

func (d *decoder) injection(t *table) *Injection {
	in := &Injection{Values: map[string]float64{}}
	in.Model = t.choiceOr("model", "", models.Names())
	in.Modes = t.texts("modes", `a list of modes, e.g. ["2,2,0"]`)
	in.Reflectivity = t.textOr("reflectivity", "", "one of "+strings.Join(models.ReflectivityNames(), ", "))
	in.Parity = t.textOr("parity", "", `"odd" or "even"`)
	values := t.sub("values", "a table of numbers by parameter")
	for _, name := range sortedKeys(values.values) {
		in.Values[name] = values.number(name, "a number", nil)
	}
	t.finish()
	return in
}

// checkInjection compares the injection's values with its model's parameters.
func (d *decoder) checkInjection(c *Config) {
	list, err := models.Describe(c.injectionSettings())
	if err != nil {
		d.setting(err, "injection")
		return
	}
	known := map[string]bool{}
	for _, p := range list {
		known[p.Name] = true
		v, given := c.Injection.Values[p.Name]
		key := "injection.values." + p.Name
		switch {
		case !given && !p.HasDefault:
			d.fail(key, "nothing", fmt.Sprintf("a number (%s)", p.Note))
		case given && !(v >= p.Low && v <= p.High):
			d.fail(key, fmt.Sprint(v), fmt.Sprintf("%g to %g", p.Low, p.High))
		}
	}
	for _, name := range sortedKeys(c.Injection.Values) {
		if !known[name] {
			d.fail("injection.values."+name, fmt.Sprint(c.Injection.Values[name]), "a parameter of the model "+c.Injection.Model+": "+names(list))
		}
	}
}

var hypothesisName = regexp.MustCompile(`^[A-Za-z0-9][A-Za-z0-9_-]{0,63}$`)

func (d *decoder) hypothesis(t *table, c *Config, shared map[string]NamedPrior, used map[string]bool) Hypothesis {
	const wantName = "letters, digits, - and _, at most 64"
	h := Hypothesis{Name: t.text("name", wantName)}
	if d.err == nil && !hypothesisName.MatchString(h.Name) {
		t.fail("name", wantName)
	}
	for _, other := range c.Hypotheses {
		// They become files, and some file systems do not tell capitals apart.
		if strings.EqualFold(other.Name, h.Name) {
			t.fail("name", "each hypothesis under its own name, whatever its capitals")
		}
	}
	h.Model = t.choiceOr("model", "", models.Names())
	h.Modes = t.texts("modes", `a list of modes, e.g. ["2,2,0"]`)
	h.Reflectivity = t.textOr("reflectivity", "", "one of "+strings.Join(models.ReflectivityNames(), ", "))
	h.Parity = t.textOr("parity", "", `"odd" or "even"`)
	own := map[string]NamedPrior{}
	if t.has("prior") {
		own = d.priors(t.sub("prior", wantTable))
	} else {
		t.known = append(t.known, "prior")
	}
	t.finish()
	if d.err != nil {
		return h
	}
	d.assign(&h, t, c, shared, own, used)
	return h
}

func (d *decoder) priors(t *table) map[string]NamedPrior {
	out := map[string]NamedPrior{}
	for _, name := range sortedKeys(t.values) {
		p := t.sub(name, `a prior, e.g. { kind = "uniform", low = 0.0, high = 1.0 }`)
		if d.err != nil {
			return out
		}
		kind := p.text("kind", "one of "+strings.Join(priors.Kinds(), ", "))
		fields := map[string]any{}
		for k, v := range p.values {
			if k != "kind" {
				fields[k] = v
			}
		}
		if d.err != nil {
			return out
		}
		prior, err := priors.Decode(kind, fields)
		if err != nil {
			var fe *priors.FieldError
			if errors.As(err, &fe) {
				d.fail(p.key(fe.Key), fe.Got, fe.Want)
			} else {
				d.fail(p.path, err.Error(), "")
			}
			return out
		}
		out[name] = NamedPrior{prior, p.path}
	}
	return out
}

func sortedKeys[V any](m map[string]V) []string {
	keys := make([]string, 0, len(m))
	for k := range m {
		keys = append(keys, k)
	}
	sort.Strings(keys)
	return keys
}
