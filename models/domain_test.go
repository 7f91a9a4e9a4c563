package models

import (
	"math"
	"strings"
	"testing"
)

// Outside its domain every parameter of every model gives an error that names it
// and the range, from Fill and from Derive; on the ends there is none.
func TestOutsideTheDomain(t *testing.T) {
	for _, s := range []Settings{
		{Model: "ringdown", Modes: []string{"2,2,0"}},
		{Model: "cavity", Modes: []string{"2,2,0", "3,3,0"}, Reflectivity: "power", Excitation: "infall"},
		{Model: "cavity", Modes: []string{"2,2,0"}, Reflectivity: "membrane", Excitation: "source"},
		{Model: "pulses", Modes: []string{"2,2,0"}},
		{Model: "comb", Modes: []string{"2,2,0"}},
		{Model: "burst", Count: 2},
	} {
		s.Grid, s.Length = Grid{First: 60, Count: 50, Step: 1}, 1
		m := newTestModel(t, s)
		theta := make([]float64, len(m.Parameters()))
		for i, p := range m.Parameters() {
			theta[i] = math.Max(p.Low, math.Min(p.High, 0.5))
			if p.Name == "mass" {
				theta[i] = 68
			}
		}
		h, out := NewPolarizations(s.Grid.Count), make([]float64, len(m.Derived()))
		if err := m.Fill(theta, h); err != nil {
			t.Fatalf("%s: %v", s.Model, err)
		}
		for i, p := range m.Parameters() {
			good := theta[i]
			for _, bad := range []float64{math.NaN(), math.Inf(1), math.Inf(-1), math.Nextafter(p.Low, math.Inf(-1)), math.Nextafter(p.High, math.Inf(1))} {
				if bad == p.High {
					continue // the domain has no end
				}
				theta[i] = bad
				err := m.Fill(theta, h)
				if err == nil || !strings.Contains(err.Error(), p.Name+" = ") || !strings.Contains(err.Error(), "want") {
					t.Errorf("%s: Fill with %s = %g: %v", s.Model, p.Name, bad, err)
				}
				if len(out) == 0 {
					continue
				}
				if err := m.Derive(theta, out); err == nil || !strings.Contains(err.Error(), p.Name+" = ") {
					t.Errorf("%s: Derive with %s = %g: %v", s.Model, p.Name, bad, err)
				}
			}
			theta[i] = good
		}
	}
}
