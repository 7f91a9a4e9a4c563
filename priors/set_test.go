package priors

import (
	"math"
	"slices"
	"testing"
)

func someSet(t testing.TB) *Set {
	t.Helper()
	s, err := NewSet([]string{"mass", "start", "spin", "phase"}, []Prior{
		must(NewUniform(40, 110)), must(NewFixed(0.003)), must(NewUniform(0, 0.98)), must(NewUniform(0, 2*math.Pi)),
	})
	if err != nil {
		t.Fatal(err)
	}
	return s
}

func TestSet(t *testing.T) {
	s := someSet(t)
	if s.Len() != 4 || s.Dim() != 3 {
		t.Errorf("Len %d, Dim %d, want 4, 3", s.Len(), s.Dim())
	}
	if got := s.FreeNames(); !slices.Equal(got, []string{"mass", "spin", "phase"}) {
		t.Errorf("FreeNames = %v", got)
	}
	for name, want := range map[string][2]int{"mass": {0, 0}, "start": {1, -1}, "spin": {2, 1}, "phase": {3, 2}, "other": {-1, -1}} {
		if got := [2]int{s.Index(name), s.FreeIndex(name)}; got != want {
			t.Errorf("places of %s = %v, want %v", name, got, want)
		}
	}
	theta := make([]float64, 4)
	s.Map([]float64{0.5, 0.25, 1}, theta)
	if want := []float64{75, 0.003, 0.245, 2 * math.Pi}; !slices.Equal(theta, want) {
		t.Errorf("Map = %v, want %v", theta, want)
	}
	// A product of uniforms: minus the logarithms of the widths.
	want := -math.Log(70) - math.Log(0.98) - math.Log(2*math.Pi)
	if got := s.LogDensity(theta); !same(got, want, 1e-15) {
		t.Errorf("LogDensity = %.17g, want %.17g", got, want)
	}
	for i, x := range []float64{39, 0.004, 0.99, -0.1} {
		off := slices.Clone(theta)
		off[i] = x
		if got := s.LogDensity(off); !math.IsInf(got, -1) {
			t.Errorf("LogDensity with parameter %d at %g = %g, want -Inf", i, x, got)
		}
	}
	u := []float64{0.1, 0.2, 0.3}
	if n := testing.AllocsPerRun(100, func() { s.Map(u, theta); s.LogDensity(theta) }); n != 0 {
		t.Errorf("%g allocations, want 0", n)
	}
}

func TestSetKeepsItsOwnLists(t *testing.T) {
	names, list := []string{"a"}, []Prior{must(NewUniform(0, 1))}
	s, err := NewSet(names, list)
	if err != nil {
		t.Fatal(err)
	}
	names[0], list[0] = "b", nil
	s.Names()[0] = "c"
	if s.Index("a") != 0 || s.Prior(0) == nil {
		t.Error("the set changed with its caller's slices")
	}
}

func TestNewSetRejects(t *testing.T) {
	p := must(NewUniform(0, 1))
	for why, tc := range map[string]struct {
		names  []string
		priors []Prior
	}{
		"lengths":   {[]string{"a", "b"}, []Prior{p}},
		"repeated":  {[]string{"a", "a"}, []Prior{p, p}},
		"no name":   {[]string{""}, []Prior{p}},
		"nil prior": {[]string{"a"}, []Prior{nil}},
	} {
		if _, err := NewSet(tc.names, tc.priors); err == nil {
			t.Errorf("%s: accepted", why)
		}
	}
}

func TestMapPanicsOnLength(t *testing.T) {
	defer func() {
		if recover() == nil {
			t.Error("no panic")
		}
	}()
	someSet(t).Map([]float64{0.5}, make([]float64, 4))
}

func BenchmarkMap(b *testing.B) {
	s := someSet(b)
	u, theta := []float64{0.1, 0.2, 0.3}, make([]float64, 4)
	b.ReportAllocs()
	for b.Loop() {
		s.Map(u, theta)
	}
}
