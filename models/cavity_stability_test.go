package models

import (
	"fmt"
	"math"
	"testing"
)

// A perfect surface on a spinning remnant is unstable, with an absorption above
// that of published tables it is not.
func TestCavityStability(t *testing.T) {
	for _, tc := range []struct {
		spin, reflectivity float64
		stable             bool
	}{
		// The largest stable |Rs| of l = m = 2: 0.99864 at spin 0.7, 0.96937 at
		// 0.9, 0.80187 at 0.99; from the Teukolsky equation, computed independently
		// of this package, as absorption in arXiv:1807.08840.
		{0.7, 0.9986, true}, {0.7, 0.9987, false},
		{0.9, 0.9693, true}, {0.9, 0.9694, false},
		{0.99, 0.8018, true}, {0.99, 0.8019, false},
		{0, 1, true},
	} {
		s := Settings{Model: "cavity", Modes: []string{"2,2,0"}, Reflectivity: "constant", Grid: Grid{First: 60, Count: 100, Step: 1}, Length: 1}
		m := newTestModel(t, s)
		theta := namedTheta(t, m, modeValues(s.Modes, map[string]float64{"spin": tc.spin, "reflectivity": tc.reflectivity}))
		stable, err := m.(Stability).Stable(theta)
		if err != nil {
			t.Fatal(err)
		}
		if stable != tc.stable {
			t.Errorf("spin %g, reflectivity %g: stable %v, want %v", tc.spin, tc.reflectivity, stable, tc.stable)
		}
		out := make([]float64, len(m.Derived()))
		if err := m.Derive(theta, out); err != nil {
			t.Fatal(err)
		}
		growth := out[len(out)-1]
		if tc.stable && !math.IsInf(growth, 1) {
			t.Errorf("spin %g, reflectivity %g: stable, yet grows within %g s", tc.spin, tc.reflectivity, growth)
		}
		if !tc.stable && !(growth > 0) {
			t.Errorf("spin %g, reflectivity %g: growth time %g s", tc.spin, tc.reflectivity, growth)
		}
	}
}

// A growing mode adds (|q| - 1) to each echo: its e-folding time is about
// delay / ln |q|, |q| = |R| at the largest gain for a perfect surface.
func TestGrowthTime(t *testing.T) {
	const spin, mass = 0.9, 68.0
	s := Settings{Model: "cavity", Modes: []string{"2,2,0"}, Reflectivity: "constant", Grid: Grid{First: 60, Count: 100, Step: 1}, Length: 1}
	m := newTestModel(t, s)
	theta := namedTheta(t, m, modeValues(s.Modes, map[string]float64{"spin": spin, "reflectivity": 1}))
	out := make([]float64, len(m.Derived()))
	if err := m.Derive(theta, out); err != nil {
		t.Fatal(err)
	}
	// 6.42 % at spin 0.9: literature value of the gain in energy, as above.
	want := out[2] / (0.5 * math.Log(1.06420))
	if got := out[3]; math.Abs(got/want-1) > 0.1 {
		t.Errorf("growth time %g s, want about %g s", got, want)
	}
	// The fastest of the groups counts.
	s.Modes = []string{"3,3,0", "2,2,0"}
	two := newTestModel(t, s)
	more := make([]float64, len(two.Derived()))
	if err := two.Derive(namedTheta(t, two, modeValues(s.Modes, map[string]float64{"spin": spin, "reflectivity": 1})), more); err != nil {
		t.Fatal(err)
	}
	if more[5] != out[3] {
		t.Errorf("with another group that grows more slowly the growth time is %g s, want %g s", more[5], out[3])
	}
}

// Stable is asked before every likelihood where a prior excludes unstable points.
func TestStableAllocatesNothing(t *testing.T) {
	for _, law := range everyReflectivity {
		s := Settings{Model: "cavity", Modes: []string{"2,2,0"}, Reflectivity: law.law, Grid: Grid{First: 60, Count: 10, Step: 1}, Length: 1}
		m := newTestModel(t, s)
		theta := namedTheta(t, m, modeValues(s.Modes, law.some))
		if n := testing.AllocsPerRun(10, func() {
			if _, err := m.(Stability).Stable(theta); err != nil {
				t.Fatal(err)
			}
		}); n != 0 {
			t.Errorf("%s: Stable allocates %g times", law.law, n)
		}
	}
}

func BenchmarkStable(b *testing.B) {
	for _, law := range everyReflectivity {
		b.Run(law.law, func(b *testing.B) {
			s := Settings{Model: "cavity", Modes: []string{"2,2,0"}, Reflectivity: law.law, Grid: Grid{First: 60, Count: 10, Step: 1}, Length: 1}
			m := newTestModel(b, s).(*Cavity)
			theta := namedTheta(b, m, modeValues(s.Modes, law.some))
			b.ReportAllocs()
			for b.Loop() {
				theta[1] = 0.6 + math.Mod(theta[1]*7.3, 0.2)
				if _, err := m.Stable(theta); err != nil {
					b.Fatal(err)
				}
			}
		})
	}
}

func BenchmarkCavityDerive(b *testing.B) {
	s := Settings{Model: "cavity", Modes: []string{"2,2,0"}, Reflectivity: "constant", Grid: Grid{First: 60, Count: 10, Step: 1}, Length: 1}
	m := newTestModel(b, s)
	theta := namedTheta(b, m, modeValues(s.Modes, map[string]float64{"reflectivity": 1}))
	out := make([]float64, len(m.Derived()))
	for b.Loop() {
		theta[1] = 0.6 + math.Mod(theta[1]*7.3, 0.2)
		if err := m.Derive(theta, out); err != nil {
			b.Fatal(err)
		}
	}
}

func ExampleCavity_Stable() {
	m, err := New(Settings{
		Model: "cavity", Modes: []string{"2,2,0"}, Reflectivity: "constant",
		Grid: Grid{First: 120, Count: 1, Step: 0.25}, Length: 3.75,
	})
	if err != nil {
		fmt.Println(err)
		return
	}
	// mass, spin, start_time, amplitude, phase, offset, echo_phase, reflectivity
	theta := []float64{68, 0.9, 0, 1e-21, 0, 0, 0, 0.98}
	fmt.Println(m.(Stability).Stable(theta))
	// Output: false <nil>
}

// A signal of another wave alone does not make a surface stable: what (2,2) gains
// from it grows all the same. Bounds of (2,2) as above.
func TestStabilityOfOtherWaves(t *testing.T) {
	for _, modes := range [][]string{{"3,3,0"}, {"2,0,0"}, {"2,-2,0"}} {
		s := Settings{Model: "cavity", Modes: modes, Reflectivity: "constant", Grid: Grid{First: 60, Count: 100, Step: 1}, Length: 1}
		m := newTestModel(t, s)
		for reflectivity, want := range map[float64]bool{0.9693: true, 0.9694: false} {
			theta := namedTheta(t, m, modeValues(modes, map[string]float64{"spin": 0.9, "reflectivity": reflectivity}))
			if stable, err := m.(Stability).Stable(theta); err != nil || stable != want {
				t.Errorf("%v at %g: stable %v, want %v (%v)", modes, reflectivity, stable, want, err)
			}
		}
		out := make([]float64, len(m.Derived()))
		if err := m.Derive(namedTheta(t, m, modeValues(modes, map[string]float64{"spin": 0.9, "reflectivity": 1})), out); err != nil {
			t.Fatal(err)
		}
		if growth := out[len(out)-1]; !(growth > 0 && growth < 1e3) {
			t.Errorf("%v: a perfect surface grows within %g s, want some seconds", modes, growth)
		}
	}
}
