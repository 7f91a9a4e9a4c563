package models

import (
	"fmt"
	"math"
	"strings"
	"testing"

	"knell/internal/random"
)

// draw is a random value of a parameter's declared domain: even in the logarithm where
// the domain spans more than a factor of 1000, of either sign where it reaches to both,
// and now and then an end of it.
func draw(p Parameter, rng *random.Rand) float64 {
	low, high := math.Max(p.Low, -1e300), math.Min(p.High, 1e300)
	switch rng.IntN(20) {
	case 0:
		return low
	case 1:
		return p.High
	}
	wide := func(low, high float64) float64 {
		low = math.Max(low, high*1e-30)
		return math.Min(math.Max(low, math.Exp(math.Log(low)+rng.Float64()*(math.Log(high)-math.Log(low)))), high)
	}
	switch {
	case p.Unit == "rad" || high-low <= 1000 && (low <= 0 || high <= 1000*low):
		return low + rng.Float64()*(high-low)
	case low >= 0:
		return wide(low, high)
	case rng.IntN(2) == 0:
		return -wide(0, -low)
	}
	return wide(0, high)
}

// finite reports the first value that is none.
func finite(values ...[]float64) error {
	for i, list := range values {
		for j, v := range list {
			if math.IsNaN(v) || math.IsInf(v, 0) {
				return fmt.Errorf("list %d, element %d is %g", i, j, v)
			}
		}
	}
	return nil
}

// settingsToCheck are the settings of the time cases, each once.
func settingsToCheck() (list []timeCase) {
	seen := map[string]bool{}
	for _, c := range timeCases {
		key := fmt.Sprintf("%+v", c.s)
		if !seen[key] {
			list = append(list, c)
		}
		seen[key] = true
	}
	return list
}

// Anywhere in the declared domain a model gives numbers, and no error.
func TestDomainHoldsNumbers(t *testing.T) {
	for i, c := range settingsToCheck() {
		t.Run(c.name, func(t *testing.T) {
			c.s.Grid, c.s.Length = Grid{First: 5, Count: 500, Step: 2}, 1.7
			m := newTestModel(t, c.s)
			h, derived := NewPolarizations(c.s.Grid.Count), make([]float64, len(m.Derived()))
			rng := random.New(31, "domain", uint64(i))
			theta := make([]float64, len(m.Parameters()))
			for n := range 400 {
				for j, p := range m.Parameters() {
					theta[j] = draw(p, rng)
					// Every other time, many ends of the domain at once.
					if n%2 == 1 && rng.IntN(2) == 0 {
						theta[j] = []float64{p.Low, p.High}[rng.IntN(2)]
					}
				}
				if err := m.Fill(theta, h); err != nil {
					t.Fatalf("Fill(%g): %v", theta, err)
				}
				if err := finite(h.PlusRe, h.PlusIm, h.CrossRe, h.CrossIm); err != nil {
					t.Fatalf("Fill(%g): %v", theta, err)
				}
				if err := m.Derive(theta, derived); err != nil {
					t.Fatalf("Derive(%g): %v", theta, err)
				}
				for j, d := range m.Derived() {
					// A surface that never grows loud says so; it must grow later than 0 s.
					if d.Name == "growth_time" && math.IsInf(derived[j], 1) {
						derived[j] = 1
					}
					if d.Name == "growth_time" && derived[j] <= 0 {
						t.Fatalf("Derive(%g): growth time %g s", theta, derived[j])
					}
				}
				if err := finite(derived); err != nil {
					t.Fatalf("Derive(%g): %v", theta, err)
				}
			}
		})
	}
}

// Without reflection, pulses or lines every model that contains the ringdown is the
// ringdown, bit for bit: the hypotheses are nested. All laws, excitations and angular
// factors, at random places, with and without a lead.
func TestNothingAddedIsTheRingdown(t *testing.T) {
	off := map[string]float64{"pulse_amplitude": 0, "comb_amplitude": 0}
	list := []Settings{{Model: "pulses"}, {Model: "comb"}}
	for i, law := range reflectivities {
		for j, excitation := range []string{"barrier", "source", "infall"} {
			list = append(list, Settings{Model: "cavity", Reflectivity: law.name, Excitation: excitation, Parity: []string{"odd", "even"}[(i+j)%2]})
		}
	}
	grid := Grid{First: 60, Count: 400, Step: 2.5}
	modes := []string{"2,2,0", "2,2,1"}
	const ringdownSize = 7 // mass, spin, start, amplitude and phase of two modes
	for i, s := range list {
		for j, angular := range []string{"spheroidal", "spherical"} {
			s.Modes, s.Angular, s.Grid, s.Length = modes, angular, grid, 1.7
			s.Inclination, s.Lead = 0.3+float64(i)/10, float64(i%2)*0.2
			horizon := Settings{Model: "ringdown", Modes: modes, Angular: angular, Grid: grid, Inclination: s.Inclination, Lead: s.Lead}
			surface, bare := newTestModel(t, s), newTestModel(t, horizon)
			zeros := map[string]float64{}
			for name, v := range off {
				zeros[name] = v
			}
			if s.Model == "cavity" {
				law, err := findReflectivity(s.Reflectivity)
				if err != nil {
					t.Fatal(err)
				}
				zeros[law.parameters[0].Name] = law.none
			}
			rng := random.New(17, "nested", uint64(i), uint64(j))
			theta, found := make([]float64, len(surface.Parameters())), 0
			for range 20 {
				for k, p := range surface.Parameters() {
					theta[k] = draw(p, rng)
					if v, is := zeros[p.Name]; is {
						theta[k] = v
						found++
					}
				}
				theta[0] = 20 + 100*rng.Float64() // where the band is
				got, want := fill(t, surface, theta, grid.Count), fill(t, bare, theta[:ringdownSize], grid.Count)
				if j, same := sameBits(got, want); !same {
					t.Fatalf("%+v at %g: not the ringdown in bin %d", s, theta, j)
				}
			}
			if found != 20 {
				t.Errorf("%+v: %d parameters switched off in 20 draws", s, found)
			}
		}
	}
}

// A model without a ringdown is nothing at amplitude zero.
func TestNothingAtAmplitudeZero(t *testing.T) {
	for _, c := range timeCases {
		if len(c.s.Modes) > 0 {
			continue
		}
		c.s.Grid, c.s.Length = Grid{First: 60, Count: 400, Step: 2.5}, 1.7
		m := newTestModel(t, c.s)
		theta := thetaByName(t, m, c.values)
		for i, p := range m.Parameters() {
			if strings.Contains(p.Name, "amplitude") {
				theta[i] = 0
			}
		}
		if _, same := sameBits(fill(t, m, theta, c.s.Grid.Count), NewPolarizations(c.s.Grid.Count)); !same {
			t.Errorf("%s: something is left", c.name)
		}
	}
}
