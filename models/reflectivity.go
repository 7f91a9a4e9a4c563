package models

import (
	"fmt"
	"math"
	"strings"

	"knell/models/kerr"
)

// reflectivity is the amplitude with which a surface reflects, as a function of
// the frequency k = omega - m Omega_H in the horizon's frame; its square is the
// energy reflectivity. The phase is a parameter of the cavity.
type reflectivity struct {
	name string
	// parameters of the law, in the order in which fill gets them.
	parameters []Parameter
	// none is the value of the first parameter at which nothing is reflected at
	// any frequency: the cavity then is the ringdown, bit for bit.
	none float64
	// fill writes the reflectivity at k0 + j dk (in units of 1/M), j in
	// range rs. law holds the law's parameters, temperature is the Hawking
	// temperature times M.
	fill func(law []float64, temperature, k0, dk float64, rs []float64)
}

// reflectivities lists the laws. Adding one is adding its file and its line here.
var reflectivities = []reflectivity{
	constantLaw,
	boltzmannLaw,
	membraneLaw,
	powerLaw,
	lorentzianLaw,
}

// reflects says whether the surface reflects anything.
func (r reflectivity) reflects(law []float64) bool { return law[0] != r.none }

// at is the reflectivity at one k, in units of M.
func (r reflectivity) at(law []float64, temperature, k float64) float64 {
	var rs [1]float64
	r.fill(law, temperature, k, 0, rs[:])
	return rs[0]
}

// cornerParameter is common to the laws that roll off. It is in units of the
// Hawking temperature (times k_B / hbar), as the Boltzmann law counts k: the only
// scale of k that the horizon itself has, so that one corner means the same at any
// mass and spin, and the laws can be compared. At spin 0.7 the 2,2,0 mode has
// |k| / T_H = 3.7, by amplitude 0.1536 of the Boltzmann law there.
func cornerParameter() Parameter {
	return Parameter{Name: "corner", Note: "frequency |k| where the roll-off sets in over Hawking temperature", Low: 1e-6, High: math.Inf(1)}
}

// ReflectivityNames lists the laws a cavity knows.
func ReflectivityNames() []string {
	names := make([]string, len(reflectivities))
	for i, r := range reflectivities {
		names[i] = r.name
	}
	return names
}

// ReflectivityParameters lists the parameters of a law in the order in which
// ReflectivityAt takes them. An unknown name gives a *SettingError.
func ReflectivityParameters(name string) ([]Parameter, error) {
	r, err := findReflectivity(name)
	return r.parameters, err
}

// ReflectivityAt returns the amplitude reflectivity of a law at the frequency
// k = omega - m Omega_H in the horizon's frame, in units of M, of either sign.
// law holds the law's parameters. An unknown name gives a *SettingError; a wrong
// number of parameters, one outside its domain, or a spin outside 0 to
// kerr.MaxSpin is an error.
func ReflectivityAt(name string, law []float64, spin, k float64) (float64, error) {
	r, err := findReflectivity(name)
	if err != nil {
		return 0, err
	}
	if len(law) != len(r.parameters) {
		return 0, fmt.Errorf("models: %d parameters of reflectivity %q, want %d", len(law), name, len(r.parameters))
	}
	for i, p := range r.parameters {
		if !(law[i] >= p.Low && law[i] <= p.High) {
			return 0, fmt.Errorf("models: %s = %g, want %g to %g", p.Name, law[i], p.Low, p.High)
		}
	}
	if !(spin >= 0 && spin <= kerr.MaxSpin) {
		return 0, fmt.Errorf("models: spin = %g, want 0 to %g", spin, kerr.MaxSpin)
	}
	if math.IsNaN(k) {
		return 0, fmt.Errorf("models: frequency k = %g, want a number", k)
	}
	return r.at(law, kerr.HawkingTemperature(spin), k), nil
}

func findReflectivity(name string) (reflectivity, error) {
	for _, r := range reflectivities {
		if r.name == name {
			return r, nil
		}
	}
	return reflectivity{}, &SettingError{"reflectivity", fmt.Sprintf("%q", name), "one of " + strings.Join(ReflectivityNames(), ", ")}
}
