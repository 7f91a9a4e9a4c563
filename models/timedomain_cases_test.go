package models

import (
	"math"
	"slices"
	"testing"

	"knell/internal/constants"
	"knell/models/kerr"
)

// timeCase is one model at one point of parameter space, as the tests of the
// time domain take it. A new model adds its line to timeCases; the test
// TestEveryModelHasATimeCase asks for it.
type timeCase struct {
	name string
	s    Settings // without grid and length, which each test chooses
	// values by parameter name; a parameter without one takes its default.
	values map[string]float64
	// begins is where the signal begins, in s after the analysis start, and ends, if
	// not zero, where it has ended.
	begins, ends float64
	// kink says that the surface's law has a kink at k = 0, see notch, and cold that
	// its tails are not to be left out of account.
	kink, cold bool
}

// remnant is what most cases share, one that rings in the mode 2,2,0.
func remnant(more map[string]float64) map[string]float64 { return other("220", more) }

// other is a remnant that rings in another mode.
func other(mode string, more map[string]float64) map[string]float64 {
	values := map[string]float64{"mass": 68, "spin": 0.69, "amplitude_" + mode: 1, "phase_" + mode: 1.1}
	for name, v := range more {
		values[name] = v
	}
	return values
}

var timeCases = []timeCase{
	{name: "ringdown", s: Settings{Model: "ringdown", Modes: []string{"2,2,0"}, Inclination: 0.6}, values: remnant(nil)},
	{name: "ringdown of five modes", s: Settings{Model: "ringdown", Modes: []string{"2,2,0", "2,2,1", "3,3,0", "2,1,0", "2,-2,0"}, Inclination: 1.9},
		values: remnant(map[string]float64{"amplitude_221": 0.9, "phase_221": 4, "amplitude_330": 0.3, "phase_330": 0, "amplitude_210": 0.2, "phase_210": 3, "amplitude_2m20": 0.1, "phase_2m20": 5})},
	{name: "ringdown, late", s: Settings{Model: "ringdown", Modes: []string{"2,2,0"}, Inclination: 0.6, Start: 0.003},
		values: remnant(map[string]float64{"start_time": 0.103}), begins: 0.1},
	{name: "ringdown, spherical", s: Settings{Model: "ringdown", Modes: []string{"2,2,0", "3,2,1"}, Inclination: 0.6, Angular: "spherical"},
		values: remnant(map[string]float64{"amplitude_321": 1, "phase_321": 2})},
	// The lead falls by 15 e-folds, 3e-7 in amplitude, within the time it is given.
	{name: "ringdown with a lead", s: Settings{Model: "ringdown", Modes: []string{"2,2,0"}, Inclination: 0.6, Lead: 0.25}, values: remnant(nil), begins: -0.25},
	{name: "cavity, constant", s: Settings{Model: "cavity", Modes: []string{"2,2,0"}, Reflectivity: "constant", Inclination: 0.6},
		values: remnant(map[string]float64{"offset": 0, "echo_phase": 0.4, "reflectivity": 0.9})},
	{name: "cavity, two modes, even", s: Settings{Model: "cavity", Modes: []string{"2,2,0", "2,2,1"}, Reflectivity: "constant", Parity: "even", Inclination: 2.2},
		values: remnant(map[string]float64{"amplitude_221": 0.9, "phase_221": 4, "offset": 10, "echo_phase": 3, "reflectivity": 0.6})},
	{name: "cavity, Boltzmann", s: Settings{Model: "cavity", Modes: []string{"2,2,0"}, Reflectivity: "boltzmann", Inclination: 0.6},
		values: remnant(map[string]float64{"offset": 0, "echo_phase": 0.4, "reflectivity": 1, "temperature": 1}), kink: true},
	{name: "cavity, cold Boltzmann", s: Settings{Model: "cavity", Modes: []string{"2,2,0"}, Reflectivity: "boltzmann", Inclination: 0.6},
		values: remnant(map[string]float64{"offset": 20, "echo_phase": 0.4, "temperature": 0.3}), kink: true, cold: true},
	{name: "cavity without spin", s: Settings{Model: "cavity", Modes: []string{"2,2,0"}, Reflectivity: "constant", Inclination: 0.6},
		values: remnant(map[string]float64{"spin": 0, "offset": 0, "echo_phase": 0.4, "reflectivity": 0.9})},
	{name: "cavity, fast and light", s: Settings{Model: "cavity", Modes: []string{"2,2,0"}, Reflectivity: "constant", Inclination: 0.6},
		values: remnant(map[string]float64{"mass": 31, "spin": 0.95, "offset": 5, "echo_phase": 4, "reflectivity": 0.9})},
	{name: "cavity, membrane", s: Settings{Model: "cavity", Modes: []string{"2,2,0"}, Reflectivity: "membrane", Inclination: 0.6},
		values: remnant(map[string]float64{"offset": 0, "echo_phase": 0.4, "viscosity": 0.2})},
	{name: "cavity, power", s: Settings{Model: "cavity", Modes: []string{"2,2,0"}, Reflectivity: "power", Inclination: 0.6},
		values: remnant(map[string]float64{"offset": 0, "echo_phase": 0.4, "reflectivity": 1, "corner": 3, "exponent": 2}), kink: true},
	{name: "cavity, Lorentzian", s: Settings{Model: "cavity", Modes: []string{"2,2,0"}, Reflectivity: "lorentzian", Inclination: 0.6},
		values: remnant(map[string]float64{"offset": 0, "echo_phase": 0.4, "reflectivity": 1, "corner": 3})},
	{name: "cavity, source", s: Settings{Model: "cavity", Modes: []string{"2,2,0"}, Reflectivity: "constant", Excitation: "source", Inclination: 0.6},
		values: remnant(map[string]float64{"offset": 0, "echo_phase": 0.4, "reflectivity": 0.9, "source_depth": 0.7})},
	{name: "cavity, infall", s: Settings{Model: "cavity", Modes: []string{"2,2,0"}, Reflectivity: "constant", Excitation: "infall", Inclination: 0.6},
		values: remnant(map[string]float64{"offset": 0, "echo_phase": 0.4, "reflectivity": 0.9, "infall_amplitude": 0.9, "infall_phase": 2, "infall_width": 0.002})},
	{name: "cavity, infall, Boltzmann", s: Settings{Model: "cavity", Modes: []string{"2,2,0"}, Reflectivity: "boltzmann", Excitation: "infall", Inclination: 0.6},
		values: remnant(map[string]float64{"offset": 0, "echo_phase": 0.4, "infall_amplitude": 0.9, "infall_phase": 2, "infall_width": 0.002, "infall_carrier": 0.8}), kink: true},
	// Without a ringdown nothing comes before one delay after the start.
	{name: "cavity, infall alone", s: Settings{Model: "cavity", Modes: []string{"2,2,0"}, Reflectivity: "constant", Excitation: "infall", Inclination: 0.6},
		values: remnant(map[string]float64{"amplitude_220": 0, "offset": 0, "echo_phase": 0.4, "reflectivity": 0.9, "infall_amplitude": 0.9, "infall_phase": 2, "infall_width": 0.002}),
		begins: kerr.EchoDelay(0.69, lnDistance(68, 0)) * 68 * constants.SolarMassSeconds},
	{name: "pulses", s: Settings{Model: "pulses", Modes: []string{"2,2,0"}, Inclination: 0.6},
		values: remnant(map[string]float64{"pulse_delay": 0.21, "pulse_amplitude": 0.5, "pulse_damping": 0.7, "pulse_turn": math.Pi})},
	{name: "pulses, rising and turning", s: Settings{Model: "pulses", Modes: []string{"2,2,0", "2,2,1"}, Inclination: 2.2},
		values: remnant(map[string]float64{"amplitude_221": 0.9, "phase_221": 4, "pulse_delay": 0.21, "spacing_ratio": 1.1, "pulse_amplitude": 0.5, "pulse_damping": 0.7, "pulse_turn": 1, "pulse_rise": 0.002})},
	{name: "comb", s: Settings{Model: "comb", Inclination: 0.6},
		values: map[string]float64{"comb_amplitude": 1, "comb_phase": 2, "comb_delay": 0.1, "line_spacing": 3.4, "line_shift": 0.3, "line_width": 0.6, "band_centre": 230, "band_width": 70}, begins: 0.1},
	{name: "comb with a ringdown, stretched", s: Settings{Model: "comb", Modes: []string{"2,2,0"}, Inclination: 0.6},
		values: remnant(map[string]float64{"comb_amplitude": 1, "comb_phase": 2, "comb_delay": 0.3, "line_spacing": 3.4, "line_shift": 0.3, "line_width": 0.6, "line_stretch": 0.1, "band_centre": 230, "band_width": 70})},
	// A Gaussian has no beginning: six widths from its middle there is erfc(6) = 2e-17
	// of its energy.
	{name: "burst", s: Settings{Model: "burst", Count: 2},
		values: map[string]float64{
			"amplitude_1": 1, "phase_1": 2, "time_1": 0.5, "frequency_1": 200, "width_1": 0.01, "ellipticity_1": 1, "orientation_1": 0,
			"amplitude_2": 0.7, "phase_2": 1, "time_2": 0.6, "frequency_2": 90, "width_2": 0.004, "ellipticity_2": -0.3, "orientation_2": 1,
		}, begins: 0.5 - 6*0.01, ends: 0.6 + 6*0.004},
}

func TestEveryModelHasATimeCase(t *testing.T) {
	for _, name := range Names() {
		if !slices.ContainsFunc(timeCases, func(c timeCase) bool { return c.s.Model == name }) {
			t.Errorf("no time-domain case of model %s", name)
		}
	}
	for _, law := range ReflectivityNames() {
		if !slices.ContainsFunc(timeCases, func(c timeCase) bool { return c.s.Reflectivity == law }) {
			t.Errorf("no time-domain case of reflectivity %s", law)
		}
	}
}
