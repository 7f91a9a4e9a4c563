package event

import (
	"errors"
	"fmt"
	"slices"
	"strings"

	"knell/models"
	"knell/priors"
)

// assign gives every parameter of a hypothesis its prior. In order: the
// hypothesis's own, the shared one, each by the full name and then by the family
// ("amplitude" for every amplitude_220); else the model's default as a fixed
// value; else a whole circle for a periodic parameter; else it is an error.
func (d *decoder) assign(h *Hypothesis, t *table, c *Config, shared, own map[string]NamedPrior, used map[string]bool) {
	list, err := models.Describe(modelSettings(*h, c))
	if err != nil {
		d.setting(err, t.path)
		return
	}
	h.Priors = map[string]NamedPrior{}
	taken := map[string]bool{}
	for _, p := range list {
		family := familyOf(p.Name)
		prior, found := NamedPrior{}, false
		for _, from := range []map[string]NamedPrior{own, shared} {
			for _, name := range []string{p.Name, family} {
				if candidate, ok := from[name]; ok && !found {
					prior, found = candidate, true
					taken[candidate.Key] = true
					used[name] = used[name] || candidate.Key == "prior."+name
				}
			}
		}
		switch {
		case found:
			low, high := prior.Prior.Support()
			if low < p.Low || high > p.High {
				d.fail(prior.Key, fmt.Sprintf("%v", prior.Prior), fmt.Sprintf("a range within %g to %g for %s of the model %s", p.Low, p.High, p.Name, h.Model))
				return
			}
		case p.HasDefault:
			fixed, err := priors.NewFixed(p.Default)
			if err != nil {
				panic("event: " + err.Error())
			}
			prior = NamedPrior{fixed, t.path}
		case p.Periodic:
			uniform, err := priors.NewUniform(p.Low, p.High)
			if err != nil {
				panic("event: " + err.Error())
			}
			prior = NamedPrior{uniform, t.path}
		default:
			if key := misspelt([]map[string]NamedPrior{own, shared}, list, p.Name, family); key != "" {
				d.fail(key, "a prior", fmt.Sprintf("a prior under a parameter's name; did you mean %s?", p.Name))
				return
			}
			key := p.Name
			if family != p.Name {
				key += " or, for all of its kind, " + family
			}
			d.fail("prior."+p.Name, "nothing", fmt.Sprintf("a prior for %s (%s), which hypothesis %q needs", key, p.Note, h.Name))
			return
		}
		if p.Name == "start_time" || family == "time" {
			// Earlier, the signal would wrap around to the segment's end.
			a := c.Analysis
			first, last := a.Start-a.Gate, a.Start+a.Duration-a.Gate
			if low, high := prior.Prior.Support(); low < first || high > last {
				d.fail(prior.Key, fmt.Sprintf("%v", prior.Prior), fmt.Sprintf("a range within the analysed segment, %g to %g s after the event time", first, last))
				return
			}
		}
		h.Priors[p.Name] = prior
	}
	for _, name := range sortedKeys(own) {
		if !taken[own[name].Key] {
			d.fail(own[name].Key, "a prior", "a parameter of the model "+h.Model+": "+names(list))
			return
		}
	}
}

// familyOf is the key that stands for every parameter of a kind: a prior on
// "amplitude" serves each amplitude_LMN, one on "time" each time_N.
func familyOf(name string) string {
	if i := strings.LastIndexByte(name, '_'); i > 0 && strings.Trim(name[i+1:], "0123456789m") == "" {
		return name[:i]
	}
	return name
}

// misspelt looks for a prior under a name that no parameter of the list has but
// that is nearly the one or the other name wanted, and returns its key or "".
func misspelt(from []map[string]NamedPrior, list []models.Parameter, wanted ...string) string {
	for _, priors := range from {
		for _, name := range sortedKeys(priors) {
			taken := slices.ContainsFunc(list, func(p models.Parameter) bool { return p.Name == name || familyOf(p.Name) == name })
			for _, w := range wanted {
				if !taken && nearly(name, w) {
					return priors[name].Key
				}
			}
		}
	}
	return ""
}

// nearly says whether two names differ by at most two letters put in, left out or
// changed, and by less than half of the shorter one.
func nearly(a, b string) bool {
	row := make([]int, len(b)+1)
	for j := range row {
		row[j] = j
	}
	for i := range len(a) {
		before := row[0]
		row[0] = i + 1
		for j := range len(b) {
			cost := before
			if a[i] != b[j] {
				cost++
			}
			before = row[j+1]
			row[j+1] = min(cost, row[j]+1, row[j+1]+1)
		}
	}
	edits := row[len(b)]
	return edits <= 2 && 2*edits < min(len(a), len(b))
}

// setting turns a model's complaint into one that names the key.
func (d *decoder) setting(err error, path string) {
	var s *models.SettingError
	if errors.As(err, &s) {
		d.fail(path+"."+s.Key, s.Got, s.Want)
		return
	}
	d.fail(path, err.Error(), "")
}

func names(list []models.Parameter) string {
	out := make([]string, len(list))
	for i, p := range list {
		out[i] = p.Name
	}
	return strings.Join(out, ", ")
}

// modelSettings is a hypothesis's model for the event's data.
func modelSettings(h Hypothesis, c *Config) models.Settings {
	a := c.Analysis
	s := h.settings()
	s.Grid, s.Inclination, s.Start = a.grid(), c.Event.Inclination, a.Start
	s.Length, s.Spill = a.Duration-a.Gate, a.Gate
	return s
}
