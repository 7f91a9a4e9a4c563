package validation

import (
	"errors"
	"fmt"
	"math"
	"strconv"
	"strings"
	"testing"

	"knell/internal/event"
	"knell/models"
)

// domainEvent is an event file with an injection, to be filled with the keys that name
// the signal, the injection's values and the hypothesis's priors.
const domainEvent = `title = "Domain"
seed  = 7

[event]
time         = 1400000123.250
sky          = { right_ascension = 1.95, declination = 0.62 }
polarization = 0.7
inclination  = 0.5

[[site]]
code      = "H1"
synthetic = { curve = "second-generation-broadband", seed = 4, length = 8.0, quiet = true }
noise     = { from = "curve" }

[injection]
%[1]svalues = { %[2]s }

[analysis]
sample_rate = 1024.0
duration    = 1.0
band        = [40.0, 460.0]
start       = 0.0
gate        = 0.125

[sampler]
live_points    = 100
evidence_error = 1.0

[[hypothesis]]
name = "signal"
%[1]s
[hypothesis.prior]
%[3]s`

// domainSettings name every model, with every law and excitation of a cavity.
func domainSettings() (list []models.Settings) {
	for _, name := range models.Names() {
		s := models.Settings{Model: name, Modes: []string{"2,2,0"}}
		switch name {
		case "burst":
			s.Modes, s.Count = nil, 2
		case "cavity":
			for i, law := range models.ReflectivityNames() {
				s.Reflectivity, s.Excitation = law, []string{"barrier", "source", "infall"}[i%3]
				list = append(list, s)
			}
			continue
		}
		list = append(list, s)
	}
	return list
}

// inside is a value of a parameter that the event's segment allows too.
func inside(p models.Parameter) float64 {
	switch {
	case p.HasDefault:
		return p.Default
	case p.Name == "mass":
		return 68
	case strings.HasPrefix(p.Name, "time_"), p.Name == "start_time":
		return 0
	case math.IsInf(p.High, 1):
		return p.Low + 1
	}
	return (p.Low + p.High) / 2
}

func keysOf(s models.Settings) string {
	text := fmt.Sprintf("model = %q\n", s.Model)
	if len(s.Modes) > 0 {
		text += fmt.Sprintf("modes = [%q]\n", s.Modes[0])
	}
	if s.Reflectivity != "" {
		text += fmt.Sprintf("reflectivity = %q\nexcitation = %q\n", s.Reflectivity, s.Excitation)
	}
	if s.Count > 0 {
		text += fmt.Sprintf("count = %d\n", s.Count)
	}
	return text
}

// decodeWith decodes the event with one parameter's value or prior replaced.
func decodeWith(list []models.Parameter, s models.Settings, name string, value, prior float64) error {
	number := func(v float64) string {
		// TOML writes nan and inf in small letters, and 1e+300 as Go does.
		return strings.ToLower(strconv.FormatFloat(v, 'e', 17, 64))
	}
	var values, priors []string
	for i, p := range list {
		v, w := inside(p), inside(p)
		if p.Name == name {
			v, w = value, prior
		}
		values = append(values, p.Name+" = "+number(v))
		kind := fmt.Sprintf(`{ kind = "fixed", value = %s }`, number(w))
		if i == 0 && p.Name != name {
			// One parameter has to be free.
			kind = fmt.Sprintf(`{ kind = "uniform", low = %s, high = %s }`, number(w), number(w+math.Max(1e-3, 1e-3*w)))
		}
		priors = append(priors, p.Name+" = "+kind)
	}
	_, err := event.Decode("domain.toml", []byte(fmt.Sprintf(domainEvent, keysOf(s), strings.Join(values, ", "), strings.Join(priors, "\n"))))
	return err
}

// A value outside the domain of any parameter of any model, injected or as a prior, is
// refused by an error that names the parameter and, unless it is no number at all, the
// range.
func TestOutsideTheDomainIsAClearError(t *testing.T) {
	for _, s := range domainSettings() {
		list, err := models.Describe(s)
		if err != nil {
			t.Fatal(err)
		}
		if err := decodeWith(list, s, "", 0, 0); err != nil {
			t.Fatalf("%s: inside the domain: %v", keysOf(s), err)
		}
		for _, p := range list {
			outside := []float64{math.NaN(), math.Inf(-1)}
			for _, v := range []float64{p.Low - 1e-9*math.Max(1, math.Abs(p.Low)), -math.MaxFloat64, p.High * (1 + 1e-9), math.MaxFloat64} {
				if !(v >= p.Low && v <= p.High) {
					outside = append(outside, v)
				}
			}
			for _, v := range outside {
				for i, err := range []error{decodeWith(list, s, p.Name, v, inside(p)), decodeWith(list, s, p.Name, inside(p), v)} {
					what := []string{"injected", "prior"}[i]
					var input *event.InputError
					if !errors.As(err, &input) {
						t.Errorf("%s%s %s = %g: error %v, want one on the input", keysOf(s), what, p.Name, v, err)
						continue
					}
					ranged := strings.Contains(input.Want, fmt.Sprintf("%g to %g", p.Low, p.High))
					number := math.IsNaN(v) || math.IsInf(v, 0)
					if !strings.Contains(input.Key, p.Name) || !ranged && !number {
						t.Errorf("%s%s %s = %g: %v, want a complaint about %s that says %g to %g", keysOf(s), what, p.Name, v, err, p.Name, p.Low, p.High)
					}
				}
			}
		}
	}
}
