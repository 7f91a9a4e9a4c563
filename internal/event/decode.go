package event

import (
	"bytes"
	"errors"
	"fmt"
	"math"
	"os"
	"path/filepath"
	"sort"
	"strings"

	"github.com/BurntSushi/toml"
)

// Defaults of keys that a file may leave out.
const (
	DefaultGate          = 0.25 // s
	DefaultSegment       = 2.0  // s
	DefaultLength        = 32.0 // s
	DefaultLivePoints    = 1000
	DefaultEvidenceError = 0.15
	DefaultRemaining     = 0.01 // nat
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

func positive(x float64) bool { return x > 0 }

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

func sortedKeys[V any](m map[string]V) []string {
	keys := make([]string, 0, len(m))
	for k := range m {
		keys = append(keys, k)
	}
	sort.Strings(keys)
	return keys
}
