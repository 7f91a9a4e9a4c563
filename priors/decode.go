package priors

import (
	"fmt"
	"maps"
	"math"
	"slices"
	"strings"
)

// family is one kind of prior: the keys it takes and how it is built from them.
type family struct {
	need     []string           // keys that must be given
	optional map[string]float64 // other keys, with what stands for a missing one
	build    func(v map[string]float64) (Prior, error)
}

// families are the kinds that Decode knows.
var families = map[string]family{
	"uniform": {
		need:  []string{"low", "high"},
		build: func(v map[string]float64) (Prior, error) { return lift(NewUniform(v["low"], v["high"])) },
	},
	"log-uniform": {
		need:  []string{"low", "high"},
		build: func(v map[string]float64) (Prior, error) { return lift(NewLogUniform(v["low"], v["high"])) },
	},
	"power": {
		need: []string{"low", "high", "exponent"},
		build: func(v map[string]float64) (Prior, error) {
			return lift(NewPower(v["low"], v["high"], v["exponent"]))
		},
	},
	"normal": {
		need:     []string{"mean", "sigma"},
		optional: map[string]float64{"low": math.Inf(-1), "high": math.Inf(1)},
		build: func(v map[string]float64) (Prior, error) {
			return lift(NewTruncatedNormal(v["mean"], v["sigma"], v["low"], v["high"]))
		},
	},
	"sine": {
		optional: map[string]float64{"low": 0, "high": math.Pi},
		build:    func(v map[string]float64) (Prior, error) { return lift(NewSine(v["low"], v["high"])) },
	},
	"cosine": {
		optional: map[string]float64{"low": -math.Pi / 2, "high": math.Pi / 2},
		build:    func(v map[string]float64) (Prior, error) { return lift(NewCosine(v["low"], v["high"])) },
	},
	"fixed": {
		need:  []string{"value"},
		build: func(v map[string]float64) (Prior, error) { return lift(NewFixed(v["value"])) },
	},
}

// lift turns a family's own pointer into a Prior, so that a nil pointer beside an
// error does not become a Prior that is not nil.
func lift[P Prior](p P, err error) (Prior, error) {
	if err != nil {
		return nil, err
	}
	return p, nil
}

// Kinds returns the names of the kinds that Decode knows, sorted.
func Kinds() []string { return slices.Sorted(maps.Keys(families)) }

// Decode builds the prior of a kind from named values, as a file's decoder hands them
// over (float64 or any integer type). A key "kind" among them is allowed and must
// repeat kind; an empty kind is taken from it.
//
//	uniform, log-uniform   low, high
//	power                  low, high, exponent
//	normal                 mean, sigma; low and high where it is cut
//	sine, cosine           low and high where it is cut (rad)
//	fixed                  value
//
// An unknown kind or key, a missing key, a wrong type and a bad number each give a
// *FieldError that names the key and what would be accepted.
func Decode(kind string, fields map[string]any) (Prior, error) {
	if given, ok := fields["kind"]; ok {
		name, isString := given.(string)
		if !isString || (kind != "" && name != kind) {
			return nil, &FieldError{"kind", describe(given), kindsWanted()}
		}
		kind = name
	}
	f, ok := families[kind]
	if !ok {
		got := fmt.Sprintf("%q", kind)
		if kind == "" {
			got = "nothing"
		}
		return nil, &FieldError{"kind", got, kindsWanted()}
	}
	values := maps.Clone(f.optional)
	if values == nil {
		values = make(map[string]float64)
	}
	for _, key := range slices.Sorted(maps.Keys(fields)) { // sorted: the same error each time
		if key == "kind" {
			continue
		}
		if _, optional := f.optional[key]; !optional && !slices.Contains(f.need, key) {
			return nil, &FieldError{key, fmt.Sprint(fields[key]), "a known key: " + f.keysWanted(kind)}
		}
		value, ok := asFloat(fields[key])
		if !ok {
			return nil, &FieldError{key, describe(fields[key]), "a number"}
		}
		if err := finite(field{key, value}); err != nil {
			return nil, err
		}
		values[key] = value
	}
	for _, key := range f.need {
		if _, ok := values[key]; !ok {
			return nil, &FieldError{key, "nothing", "a number; " + f.keysWanted(kind)}
		}
	}
	return f.build(values)
}

func kindsWanted() string { return "one of " + strings.Join(Kinds(), ", ") }

// keysWanted lists the keys that a kind takes.
func (f family) keysWanted(kind string) string {
	text := kind + " takes " + strings.Join(f.need, ", ")
	if len(f.need) > 0 && len(f.optional) > 0 {
		text += " and "
	}
	if len(f.optional) > 0 {
		text += "optionally " + strings.Join(slices.Sorted(maps.Keys(f.optional)), ", ")
	}
	return text
}

// asFloat returns a decoded number as a float64.
func asFloat(value any) (float64, bool) {
	switch v := value.(type) {
	case float64:
		return v, true
	case int64:
		return float64(v), true
	case int:
		return float64(v), true
	}
	return 0, false
}

// describe shows a value that is not what was wanted.
func describe(value any) string {
	if text, ok := value.(string); ok {
		return fmt.Sprintf("%q", text)
	}
	return fmt.Sprintf("%v (%T)", value, value)
}
