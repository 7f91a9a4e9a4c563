package event

import (
	"errors"
	"fmt"
	"math"
	"regexp"
	"strings"

	"knell/models"
	"knell/priors"
)

func (d *decoder) injection(t *table) *Injection {
	in := &Injection{Values: map[string]float64{}}
	in.Signal = d.signal(t)
	values := t.sub("values", "a table of numbers by parameter")
	for _, name := range sortedKeys(values.values) {
		in.Values[name] = values.number(name, "a number", nil)
	}
	t.finish()
	return in
}

// signal reads what names a model; models.Describe judges whether it fits.
func (d *decoder) signal(t *table) Signal {
	s := Signal{Model: t.choiceOr("model", "", models.Names())}
	const wantModes = `a list of modes, e.g. ["2,2,0"]`
	if t.has("modes") {
		s.Modes = t.texts("modes", wantModes)
	} else {
		t.known = append(t.known, "modes")
	}
	s.Reflectivity = t.textOr("reflectivity", "", "one of "+strings.Join(models.ReflectivityNames(), ", "))
	s.Parity = t.textOr("parity", "", `"odd" or "even"`)
	s.Excitation = t.textOr("excitation", "", `"barrier", "source" or "infall"`)
	s.Angular = t.textOr("angular", "", `"spheroidal" or "spherical"`)
	s.Count = int(t.integerOr("count", 0, "a whole number of wave packets above zero", func(n int64) bool { return n > 0 && n < math.MaxInt32 }))
	return s
}

// settings is the signal as package models takes it.
func (s Signal) settings() models.Settings {
	return models.Settings{
		Model: s.Model, Modes: s.Modes, Reflectivity: s.Reflectivity, Parity: s.Parity,
		Excitation: s.Excitation, Angular: s.Angular, Count: s.Count,
	}
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
	}
	// A misspelt name before the one that is missing because of it.
	for _, name := range sortedKeys(c.Injection.Values) {
		if !known[name] {
			d.fail("injection.values."+name, fmt.Sprint(c.Injection.Values[name]), "a parameter of the model "+c.Injection.Model+": "+names(list))
		}
	}
	for _, p := range list {
		v, given := c.Injection.Values[p.Name]
		key := "injection.values." + p.Name
		switch {
		case !given && !p.HasDefault:
			d.fail(key, "nothing", fmt.Sprintf("a number (%s)", p.Note))
		case given && !(v >= p.Low && v <= p.High):
			d.fail(key, fmt.Sprint(v), fmt.Sprintf("%g to %g", p.Low, p.High))
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
	h.Signal = d.signal(t)
	h.Stable = t.flagOr("stable", false)
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
