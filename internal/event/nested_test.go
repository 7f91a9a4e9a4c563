package event

import (
	"fmt"
	"math"
	"strings"
	"testing"
)

// pair is tiny with two hypotheses and priors of the test's own.
func pair(full, nested string, shared ...string) string {
	return tiny[:strings.Index(tiny, "[[hypothesis]]")] + fmt.Sprintf("[[hypothesis]]\nname = \"full\"\n%s\n[[hypothesis]]\nname = \"nested\"\n%s\n[prior]\n%s\n", full, nested, strings.Join(shared, "\n"))
}

func uniform(name string, low, high float64) string {
	return fmt.Sprintf("%s = { kind = \"uniform\", low = %g, high = %g }", name, low, high)
}

func fixed(name string, value float64) string {
	return fmt.Sprintf("%s = { kind = \"fixed\", value = %g }", name, value)
}

func own(priors ...string) string { return "\n[hypothesis.prior]\n" + strings.Join(priors, "\n") }

func cavityOf(law string) string {
	return fmt.Sprintf("model = \"cavity\"\nmodes = [\"2,2,0\"]\nreflectivity = %q", law)
}

// Which hypothesis is another with one parameter held fixed, and where in the unit
// cube. What each signal is at the value is what the models' own descriptions say.
func TestNestedIn(t *testing.T) {
	const (
		horizon  = "model = \"ringdown\"\nmodes = [\"2,2,0\"]"
		overtone = "model = \"ringdown\"\nmodes = [\"2,2,0\", \"2,2,1\"]"
		pulses   = "model = \"pulses\"\nmodes = [\"2,2,0\"]"
	)
	mass, spin, amplitude := uniform("mass", 40, 110), uniform("spin", 0, 0.98), uniform("amplitude", 0, 5e-21)
	offset, reflectivity := uniform("offset", -1, 12), uniform("reflectivity", 0, 1)
	surface := cavityOf("constant")
	for _, tc := range []struct {
		name, text, parameter string
		value, at             float64
	}{
		{"a surface that reflects nothing", pair(surface, horizon, mass, spin, amplitude, offset, reflectivity), "reflectivity", 0, 0},
		{"as viscous as a horizon", pair(cavityOf("membrane"), horizon, mass, spin, amplitude, offset, uniform("viscosity", 0, 1)), "viscosity", 1, 1},
		{"never so viscous", pair(cavityOf("membrane"), horizon, mass, spin, amplitude, offset, uniform("viscosity", 0, 0.9)), "", 0, 0},
		{"nothing falls in", pair(cavityOf("boltzmann")+"\nexcitation = \"infall\"", horizon, mass, spin, amplitude, offset,
			uniform("infall_amplitude", 0, 1e-21), uniform("infall_width", 1e-3, 2e-3)), "infall_amplitude", 0, 0},
		{"copies of no amplitude", pair(pulses, horizon, mass, spin, amplitude, uniform("pulse_delay", 0.1, 0.2), uniform("pulse_amplitude", 0, 1), uniform("pulse_damping", 0, 1)), "pulse_amplitude", 0, 0},
		{"a mode of no amplitude", pair(overtone, horizon, mass, spin, amplitude), "amplitude_221", 0, 0},
		{"the other way round", pair(horizon, overtone, mass, spin, amplitude), "", 0, 0},
		{"another prior", pair(surface, horizon+own(uniform("mass", 50, 110)), mass, spin, amplitude, offset, reflectivity), "", 0, 0},
		{"the same prior twice", pair(surface+own(mass), horizon+own(mass), spin, amplitude, offset, reflectivity), "reflectivity", 0, 0},
		{"another mode", pair(surface, strings.ReplaceAll(horizon, "2,2,0", "2,2,1"), mass, spin, amplitude, offset, reflectivity), "", 0, 0},
		{"other angular factors", pair(surface, horizon+"\nangular = \"spherical\"", mass, spin, amplitude, offset, reflectivity), "", 0, 0},
		{"held fixed", pair(surface, surface+own(fixed("reflectivity", 0.25)), mass, spin, amplitude, offset, reflectivity), "reflectivity", 0.25, 0.25},
		{"held fixed outside", pair(surface+own(uniform("reflectivity", 0.5, 1)), surface+own(fixed("reflectivity", 0.25)), mass, spin, amplitude, offset), "", 0, 0},
		{"two held fixed", pair(surface, surface+own(fixed("reflectivity", 0.25), fixed("spin", 0.7)), mass, spin, amplitude, offset, reflectivity), "", 0, 0},
		{"another law held fixed", pair(surface, cavityOf("boltzmann")+own(fixed("reflectivity", 0.25)), mass, spin, amplitude, offset, reflectivity), "", 0, 0},
		{"a parameter whose coordinate bends", pair(surface, surface+own(fixed("offset", 0)), mass, spin, amplitude, offset, reflectivity), "", 0, 0},
		{"the same", pair(horizon, horizon, mass, spin, amplitude), "", 0, 0},
		{"stable, and stable where nothing is reflected", pair(surface+"\nstable = true", horizon, mass, fixed("spin", 0.9), amplitude, offset, reflectivity), "reflectivity", 0, 0},
		{"stable, and not so where the other is", pair(surface+"\nstable = true", surface+own(fixed("reflectivity", 0.99)), mass, fixed("spin", 0.9), amplitude, offset, reflectivity), "", 0, 0},
	} {
		t.Run(tc.name, func(t *testing.T) {
			p := mustLoad(t, tc.text)
			full := p.hypotheses[0]
			n, ok := p.hypotheses[1].nestedIn(full)
			if ok != (tc.parameter != "") || ok && (n.parameter != tc.parameter || n.value != tc.value || math.Abs(n.at-tc.at) > 1e-12) {
				t.Fatalf("got %v, %+v, want %q at %g (%g)", ok, n, tc.parameter, tc.value, tc.at)
			}
			if ok && full.set.FreeNames()[n.coordinate] != tc.parameter {
				t.Errorf("coordinate %d is %s", n.coordinate, full.set.FreeNames()[n.coordinate])
			}
			if want := full.allowed.logMass(); ok && n.logShare != want {
				t.Errorf("ln of the shares' ratio %g, want %g", n.logShare, want)
			}
		})
	}
}

// The evidences of two runs, and the density of the one's posterior where it is the
// other, are the same ratio.
func TestDensityRatio(t *testing.T) {
	// Echoes that the data do not hold: little reflectivity is likely, none is within
	// the posterior's reach.
	text := strings.NewReplacer("low = 40.0, high = 110.0", "low = 60.0, high = 76.0", "low = -1.0, high = 12.0", "low = 0.0, high = 0.02",
		"low = 0.0,  high = 0.98", "low = 0.5,  high = 0.8", "live_points    = 100", "live_points    = 200", "amplitude_220 = 4e-21", "amplitude_220 = 1e-21",
		"high = 5e-21", "high = 2e-21").Replace(tiny)
	w, _ := weigh(t, text, 2)
	if len(w.Hypotheses[0].DensityRatios) != 0 || len(w.Hypotheses[1].DensityRatios) != 1 {
		t.Fatalf("density ratios %+v and %+v, want none and one", w.Hypotheses[0].DensityRatios, w.Hypotheses[1].DensityRatios)
	}
	d := w.Hypotheses[1].DensityRatios[0]
	if !d.Known || d.Nested != "horizon" || d.Parameter != "reflectivity" || d.At != 0 {
		t.Fatalf("got %+v", d)
	}
	r := w.Ratios[0] // surface over horizon
	gap, combined := float64(-d.LogBayesFactor-r.LogBayesFactor), math.Hypot(float64(d.Error), float64(r.Error))
	t.Logf("density ratio %.3f +- %.3f, evidences %.3f +- %.3f", -d.LogBayesFactor, d.Error, r.LogBayesFactor, r.Error)
	if !(math.Abs(gap) < 4*combined) || !(combined < 0.6) {
		t.Errorf("%s over %s: %v +- %v by the evidences, %v +- %v by the density", r.For, r.Against, r.LogBayesFactor, r.Error, -d.LogBayesFactor, d.Error)
	}

	// Echoes that the data do hold: no sample is where there are none.
	loud, _ := weigh(t, strings.NewReplacer(`model  = "ringdown"`, "model  = \"cavity\"\nreflectivity = \"constant\"",
		"phase_220 = 1.3", "phase_220 = 1.3, reflectivity = 0.8, offset = 0.01, echo_phase = 2.0", "amplitude_220 = 1e-21", "amplitude_220 = 4e-21", "high = 2e-21", "high = 5e-21",
		"live_points    = 200", "live_points    = 100").Replace(text), 2)
	d = loud.Hypotheses[1].DensityRatios[0]
	if d.Known || !strings.Contains(d.Note, "effective samples") {
		t.Errorf("with loud echoes: %+v, want words", d)
	}
	for _, h := range loud.Hypotheses {
		if len(h.Phases) == 0 || h.Phases[0].Calls == 0 || !(h.Efficiency > 0) {
			t.Errorf("%s: phases %+v, efficiency %v", h.Name, h.Phases, h.Efficiency)
		}
	}
	if cut, _ := weigh(t, brief, 2); len(cut.Hypotheses[1].DensityRatios) != 0 {
		t.Error("a run that did not finish has a density ratio")
	}
}
