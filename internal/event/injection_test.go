package event

import (
	"fmt"
	"math"
	"strings"
	"testing"

	"knell/internal/random"
)

// quietEvent is two sites without noise, one injection and the hypothesis that is meant
// by it, with no prior but fixed ones except the first.
func quietEvent(keys string, names []string, values map[string]float64) string {
	var list, priors []string
	for i, name := range names {
		list = append(list, fmt.Sprintf("%s = %v", name, values[name]))
		kind := fmt.Sprintf("{ kind = \"fixed\", value = %v }", values[name])
		if i == 0 {
			kind = fmt.Sprintf("{ kind = \"uniform\", low = 0.0, high = %v }", 2*values[name])
		}
		priors = append(priors, name+" = "+kind)
	}
	start, middle := strings.Index(twoSites, "[injection]"), strings.Index(twoSites, "[analysis]")
	end := strings.Index(twoSites, "[[hypothesis]]")
	return twoSites[:start] + "[injection]\n" + keys + "values = { " + strings.Join(list, ", ") + " }\n\n" +
		twoSites[middle:end] + "[[hypothesis]]\nname = \"signal\"\n" + keys + "[hypothesis.prior]\n" + strings.Join(priors, "\n") + "\n"
}

// Every family, injected without noise and weighed as itself: the log-likelihood at the
// injected values is half the squared signal-to-noise ratio, and less near by.
func TestEveryFamilyInjected(t *testing.T) {
	remnant := map[string]float64{"amplitude_220": 4e-21, "mass": 68, "spin": 0.69, "phase_220": 1.3}
	surface := map[string]float64{"offset": 0, "echo_phase": 2, "reflectivity": 0.8}
	with := func(parts ...map[string]float64) map[string]float64 {
		all := map[string]float64{}
		for _, part := range parts {
			for name, v := range part {
				all[name] = v
			}
		}
		return all
	}
	const one = "modes = [\"2,2,0\"]\n"
	cavity := func(law, excitation string) string {
		return "model = \"cavity\"\n" + one + fmt.Sprintf("reflectivity = %q\nexcitation = %q\n", law, excitation)
	}
	for _, tc := range []struct {
		why, keys string
		values    map[string]float64 // the first name in the alphabet is the free one
		// A signal that begins with a jump in the data has the jump's spectrum outside
		// the band, which the model leaves out.
		tolerance float64
	}{
		{"ringdown", "model = \"ringdown\"\n" + one, remnant, 3e-4},
		{"ringdown that begins in the data", "model = \"ringdown\"\n" + one, with(remnant, map[string]float64{"start_time": 0.05}), 3e-3},
		{"spherical", "model = \"ringdown\"\nangular = \"spherical\"\n" + one, remnant, 3e-4},
		{"several modes", "model = \"cavity\"\nreflectivity = \"constant\"\nmodes = [\"2,2,0\", \"3,3,0\", \"2,1,0\", \"2,-2,0\"]\n", with(remnant, surface, map[string]float64{
			"amplitude_330": 1e-21, "phase_330": 2, "amplitude_210": 8e-22, "phase_210": 0.5, "amplitude_2m20": 5e-22, "phase_2m20": 1}), 1e-3},
		{"constant, barrier", cavity("constant", "barrier"), with(remnant, surface), 1e-3},
		{"boltzmann, source", cavity("boltzmann", "source"), with(remnant, surface, map[string]float64{"temperature": 3, "source_depth": 0.4}), 3e-3},
		{"membrane, infall", cavity("membrane", "infall"), with(remnant, map[string]float64{"offset": 0, "echo_phase": 2, "viscosity": 0.2,
			"infall_amplitude": 4e-21, "infall_phase": 1, "infall_width": 0.004}), 1e-3},
		{"pulses", "model = \"pulses\"\n" + one, with(remnant, map[string]float64{"pulse_delay": 0.25, "pulse_amplitude": 0.6, "pulse_damping": 0.7, "pulse_rise": 0.001}), 1e-3},
		{"comb", "model = \"comb\"\n", map[string]float64{"comb_amplitude": 1e-21, "comb_phase": 1, "line_spacing": 5, "line_shift": 0.3, "line_width": 2, "band_centre": 210, "band_width": 60}, 1e-3},
		{"burst", "model = \"burst\"\ncount = 1\n", map[string]float64{"amplitude_1": 4e-21, "phase_1": 1, "time_1": 0.5, "frequency_1": 150, "width_1": 0.01, "ellipticity_1": 0.4, "orientation_1": 0.3}, 1e-3},
	} {
		t.Run(tc.why, func(t *testing.T) {
			p := mustLoad(t, quietEvent(tc.keys, sortedKeys(tc.values), tc.values))
			h := p.hypotheses[0]
			target := h.target()
			theta := make([]float64, h.set.Len())
			for i, parameter := range h.model.Parameters() {
				v, given := tc.values[parameter.Name]
				if !given {
					v = parameter.Default
				}
				theta[i] = v
			}
			got, err := target.at(theta)
			if err != nil {
				t.Fatal(err)
			}
			half := 0.0
			for _, snr := range p.likelihood.Worker().OptimalSNR(target.h, nil) {
				half += snr * snr / 2
			}
			t.Logf("ln L over noise %.4f, half the squared SNR %.4f: relative difference %.1e", got, half, got/half-1)
			if half < 20 || math.Abs(got/half-1) > tc.tolerance {
				t.Errorf("ln L over noise = %.4f, want %.4f, more than 20", got, half)
			}
			rng := random.New(1, "around the injection")
			near := make([]float64, len(theta))
			for i, parameter := range h.model.Parameters() {
				if _, given := tc.values[parameter.Name]; !given {
					continue
				}
				for range 8 {
					copy(near, theta)
					near[i] = math.Min(math.Max(theta[i]*(1+0.05*rng.NormFloat64()), parameter.Low), parameter.High)
					if theta[i] == 0 {
						near[i] = 0.01 * rng.NormFloat64()
					}
					v, err := target.at(near)
					if err != nil {
						t.Fatal(err)
					}
					if v > got+0.1*math.Abs(got-half) {
						t.Errorf("%s = %g: ln L over noise = %.5f, above the %.5f at the injected %g", parameter.Name, near[i], v, got, theta[i])
					}
				}
			}
		})
	}
}
