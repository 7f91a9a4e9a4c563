package main

import (
	"fmt"
	"math"
	"strconv"
	"strings"

	"knell/models"
)

// surfaceLaw is a reflectivity law with values for all its parameters.
type surfaceLaw struct {
	name       string
	parameters []models.Parameter
	values     []float64
}

// plainValues are those of parameters that no --law sets and that have no default of
// their own: a surface that reflects all at k = 0, or a membrane half as viscous as a
// horizon; corners where the Boltzmann amplitude has fallen to 1/e.
var plainValues = map[string]float64{"reflectivity": 1, "viscosity": 0.5, "corner": 2, "exponent": 2}

// chosenLaws reads the values of --law; without any it returns every law.
func chosenLaws(texts []string) ([]surfaceLaw, error) {
	if len(texts) == 0 {
		texts = models.ReflectivityNames()
	}
	laws := make([]surfaceLaw, len(texts))
	for i, text := range texts {
		law, err := parseLaw(text)
		if err != nil {
			return nil, &usageError{fmt.Sprintf("--law %s: %v", text, err)}
		}
		laws[i] = law
	}
	return laws, nil
}

// parseLaw reads NAME,PARAMETER=VALUE,...
func parseLaw(text string) (surfaceLaw, error) {
	entries := strings.Split(text, ",")
	law := surfaceLaw{name: strings.TrimSpace(entries[0])}
	var err error
	if law.parameters, err = models.ReflectivityParameters(law.name); err != nil {
		return law, fmt.Errorf("no law %q, want one of %s", law.name, strings.Join(models.ReflectivityNames(), ", "))
	}
	set := make([]bool, len(law.parameters))
	law.values = make([]float64, len(law.parameters))
	for _, entry := range entries[1:] {
		name, value, found := strings.Cut(strings.TrimSpace(entry), "=")
		if !found {
			return law, fmt.Errorf("%q, want PARAMETER=VALUE", entry)
		}
		i := law.index(name)
		if i < 0 {
			return law, fmt.Errorf("no parameter %q, want one of %s", name, strings.Join(law.names(), ", "))
		}
		if set[i] {
			return law, fmt.Errorf("%s twice, want it once", name)
		}
		p := law.parameters[i]
		x, err := strconv.ParseFloat(value, 64)
		if err != nil || !(x >= p.Low && x <= p.High) || math.IsInf(x, 0) {
			return law, fmt.Errorf("%s = %s, want a number from %g to %g", name, value, p.Low, p.High)
		}
		law.values[i], set[i] = x, true
	}
	for i, p := range law.parameters {
		if set[i] {
			continue
		}
		plain, known := plainValues[p.Name]
		switch {
		case p.HasDefault:
			law.values[i] = p.Default
		case known:
			law.values[i] = plain
		default:
			return law, fmt.Errorf("no value for %s, want %s,%s=VALUE", p.Name, law.name, p.Name)
		}
	}
	return law, nil
}

func (s *surfaceLaw) names() []string {
	names := make([]string, len(s.parameters))
	for i, p := range s.parameters {
		names[i] = p.Name
	}
	return names
}

func (s *surfaceLaw) index(name string) int {
	for i, p := range s.parameters {
		if p.Name == name {
			return i
		}
	}
	return -1
}

// at is the law's amplitude at k = omega - m Omega_H in units of M.
func (s *surfaceLaw) at(spin, k float64) (float64, error) {
	return models.ReflectivityAt(s.name, s.values, spin, k)
}
