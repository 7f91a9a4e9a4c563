package models

import (
	"fmt"
	"math"
	"testing"

	"knell/internal/constants"
	"knell/models/kerr"
)

// everyReflectivity has each law with its parameters at no reflection and at some.
var everyReflectivity = []struct {
	law        string
	none, some map[string]float64
}{
	{"constant", map[string]float64{"reflectivity": 0}, map[string]float64{"reflectivity": 0.8}},
	{"boltzmann", map[string]float64{"reflectivity": 0, "temperature": 1.3}, map[string]float64{"reflectivity": 0.9, "temperature": 2}},
	{"membrane", map[string]float64{"viscosity": 1}, map[string]float64{"viscosity": 0.1}},
	{"power", map[string]float64{"reflectivity": 0, "corner": 2, "exponent": 2}, map[string]float64{"reflectivity": 0.9, "corner": 4, "exponent": 2}},
	{"lorentzian", map[string]float64{"reflectivity": 0, "corner": 2}, map[string]float64{"reflectivity": 0.9, "corner": 4}},
}

func TestEveryReflectivityIsTested(t *testing.T) {
	if len(everyReflectivity) != len(ReflectivityNames()) {
		t.Fatalf("%d laws here, %d known", len(everyReflectivity), len(ReflectivityNames()))
	}
	for i, name := range ReflectivityNames() {
		if everyReflectivity[i].law != name {
			t.Errorf("law %d is %s here, %s in the list", i, everyReflectivity[i].law, name)
		}
	}
}

// excitedValues are those of the excitations' parameters.
var excitedValues = map[string]float64{"source_depth": 0.4, "infall_amplitude": 3e-21, "infall_phase": 1, "infall_width": 0.002}

// modeValues gives each mode its own amplitude and phase.
func modeValues(modes []string, more ...map[string]float64) map[string]float64 {
	values := map[string]float64{"mass": 68, "spin": 0.69, "start_time": 0.001, "offset": 0, "echo_phase": 0.4}
	for i, label := range modes {
		l, m, n, err := ParseMode(label)
		if err != nil {
			panic(err)
		}
		name := fmt.Sprintf("%d%d%d", l, m, n)
		if m < 0 {
			name = fmt.Sprintf("%dm%d%d", l, -m, n)
		}
		values["amplitude_"+name], values["phase_"+name] = 1e-21/float64(1+i), math.Mod(1.1+float64(i), 2*math.Pi)
	}
	for _, list := range more {
		for name, v := range list {
			values[name] = v
		}
	}
	return values
}

// sameBits tells even 0 from -0, and where they differ first.
func sameBits(a, b *Polarizations) (bin int, same bool) {
	for i, list := range [][]float64{a.PlusRe, a.PlusIm, a.CrossRe, a.CrossIm} {
		other := [][]float64{b.PlusRe, b.PlusIm, b.CrossRe, b.CrossIm}[i]
		for j := range list {
			if math.Float64bits(list[j]) != math.Float64bits(other[j]) {
				return j, false
			}
		}
	}
	return 0, true
}

// Without reflection the surface is a horizon, bit for bit: for every law,
// excitation, choice of angular factors and set of modes, with a jump at the start
// and with a lead.
func TestCavityWithoutReflectionIsTheRingdown(t *testing.T) {
	one, two := []string{"2,2,0"}, []string{"2,2,0", "2,2,1"}
	several := []string{"2,2,0", "3,3,0", "2,2,1", "2,-2,0", "2,0,0"}
	for _, tc := range []struct {
		modes   []string
		angular string
		lead    float64
		laws    int // how many of them
	}{{one, "", 0, len(everyReflectivity)}, {one, "spherical", 0.1, len(everyReflectivity)}, {two, "spheroidal", 0.1, 1}, {several, "", 0, 1}, {several, "spherical", 0.1, 1}} {
		s := Settings{Model: "ringdown", Modes: tc.modes, Angular: tc.angular, Grid: Grid{First: 60, Count: 1500, Step: 0.5}, Inclination: 0.6, Length: 2, Lead: tc.lead}
		ringdown := newTestModel(t, s)
		want := fill(t, ringdown, namedTheta(t, ringdown, modeValues(tc.modes)), s.Grid.Count)
		s.Model = "cavity"
		for _, law := range everyReflectivity[:tc.laws] {
			for _, excitation := range []string{"barrier", "source", "infall"} {
				s.Reflectivity, s.Excitation = law.law, excitation
				t.Run(fmt.Sprintf("%v %s %s %s %g", tc.modes, tc.angular, law.law, excitation, tc.lead), func(t *testing.T) {
					m := newTestModel(t, s)
					got := fill(t, m, namedTheta(t, m, modeValues(tc.modes, excitedValues, law.none)), s.Grid.Count)
					if j, same := sameBits(got, want); !same {
						t.Fatalf("differs at bin %d", j)
					}
					got = fill(t, m, namedTheta(t, m, modeValues(tc.modes, excitedValues, law.some)), s.Grid.Count)
					if _, same := sameBits(got, want); same {
						t.Error("the same with reflection")
					}
				})
			}
		}
	}
}

// Nothing falls in: the infall's signal is the ringdown's, bit for bit.
func TestInfallOfNothingIsTheRingdown(t *testing.T) {
	s := Settings{Model: "ringdown", Modes: []string{"2,2,0"}, Grid: Grid{First: 60, Count: 1500, Step: 0.5}, Inclination: 0.6, Length: 2}
	ringdown := newTestModel(t, s)
	want := fill(t, ringdown, namedTheta(t, ringdown, modeValues(s.Modes)), s.Grid.Count)
	s.Model, s.Excitation = "cavity", "infall"
	for _, law := range everyReflectivity {
		s.Reflectivity = law.law
		m := newTestModel(t, s)
		got := fill(t, m, namedTheta(t, m, modeValues(s.Modes, excitedValues, law.some, map[string]float64{"infall_amplitude": 0})), s.Grid.Count)
		if j, same := sameBits(got, want); !same {
			t.Errorf("%s: differs at bin %d", law.law, j)
		}
	}
}

// Modes of different (l, m) do not mix: the signal of several is the sum of the
// signals of each group alone, whatever the order in which they are named.
func TestGroupsAddUp(t *testing.T) {
	groups := [][]string{{"2,2,0", "2,2,1"}, {"3,3,0"}, {"2,-2,0"}, {"2,1,0"}, {"4,4,0"}, {"2,0,0"}}
	all := []string{"2,2,0", "3,3,0", "2,-2,0", "2,2,1", "2,1,0", "4,4,0", "2,0,0"}
	for _, excitation := range []string{"barrier", "source"} {
		s := Settings{Model: "cavity", Modes: all, Reflectivity: "lorentzian", Excitation: excitation, Grid: Grid{First: 60, Count: 1500, Step: 0.5}, Inclination: 1.1, Length: 2, Lead: 0.1}
		law := map[string]float64{"reflectivity": 0.9, "corner": 5}
		values := modeValues(all, excitedValues, law)
		together := newTestModel(t, s)
		got := fill(t, together, namedTheta(t, together, values), s.Grid.Count)
		want := NewPolarizations(s.Grid.Count)
		largest := 0.0
		for _, modes := range groups {
			s.Modes = modes
			m := newTestModel(t, s)
			part := fill(t, m, namedTheta(t, m, values), s.Grid.Count)
			for j := range part.PlusRe {
				want.PlusRe[j] += part.PlusRe[j]
				want.PlusIm[j] += part.PlusIm[j]
				want.CrossRe[j] += part.CrossRe[j]
				want.CrossIm[j] += part.CrossIm[j]
				largest = max(largest, math.Abs(part.PlusRe[j]), math.Abs(part.PlusIm[j]))
			}
		}
		for j := range got.PlusRe {
			d := max(math.Abs(got.PlusRe[j]-want.PlusRe[j]), math.Abs(got.PlusIm[j]-want.PlusIm[j]), math.Abs(got.CrossRe[j]-want.CrossRe[j]), math.Abs(got.CrossIm[j]-want.CrossIm[j]))
			// Some ten additions of rounded terms.
			if !(d <= 32*0x1p-53*largest) {
				t.Fatalf("%s: off by %.2g of the largest value at bin %d", excitation, d/largest, j)
			}
		}
	}
}

// Each (l, m) echoes one delay after the other, later and not earlier, and not
// around the end of the segment.
func TestEveryModesEchoesComeLater(t *testing.T) {
	const rate, duration = 2048, 2.0
	for _, mode := range []string{"2,2,0", "3,3,0", "2,1,0", "2,-2,0", "2,0,0", "3,2,0", "4,4,0"} {
		t.Run(mode, func(t *testing.T) {
			grid := Grid{First: 10 * duration, Count: 990 * duration, Step: 1 / duration}
			s := Settings{Model: "ringdown", Modes: []string{mode}, Grid: grid, Inclination: 0.9, Length: duration - 0.25}
			values := modeValues(s.Modes, map[string]float64{"start_time": 0, "reflectivity": 0.9})
			m := newTestModel(t, s)
			horizon := seriesOf(fill(t, m, namedTheta(t, m, values), grid.Count), grid, rate*duration)
			s.Model, s.Reflectivity = "cavity", "constant"
			m = newTestModel(t, s)
			theta := namedTheta(t, m, values)
			echoes := seriesOf(fill(t, m, theta, grid.Count), grid, rate*duration)
			derived := make([]float64, len(m.Derived()))
			if err := m.Derive(theta, derived); err != nil {
				t.Fatal(err)
			}
			delay := derived[2]
			energy, before := 0.0, 0.0
			for i := range echoes {
				echoes[i] -= horizon[i]
				energy += echoes[i] * echoes[i]
				if i < int((delay-0.03)*rate) {
					before += echoes[i] * echoes[i]
				}
			}
			if before > 1e-4*energy {
				t.Errorf("%.2g of the echoes' energy comes before the first echo", before/energy)
			}
			for n := 1; n <= 4; n++ {
				best := int((float64(n) - 0.4) * delay * rate)
				for i := best; i < int((float64(n)+0.6)*delay*rate); i++ {
					if math.Abs(echoes[i]) > math.Abs(echoes[best]) {
						best = i
					}
				}
				if got := float64(best) / rate; math.Abs(got-float64(n)*delay) > 0.02 {
					t.Errorf("echo %d peaks at %.4f s, want near %.4f s", n, got, float64(n)*delay)
				}
			}
		})
	}
}

// What comes first of a source comes 2 (x_s - x0) after the start, and what comes
// first of a pulse that fell in comes one delay and infallLead widths after it.
func TestExcitationsArriveInTime(t *testing.T) {
	const rate, duration = 2048, 2.0
	grid := Grid{First: 10 * duration, Count: 990 * duration, Step: 1 / duration}
	s := Settings{Model: "ringdown", Modes: []string{"2,2,0"}, Grid: grid, Inclination: 0.9, Length: duration - 0.25}
	m := newTestModel(t, s)
	base := modeValues(s.Modes, map[string]float64{"start_time": 0, "viscosity": 0.2, "infall_amplitude": 1e-21, "infall_phase": 1})
	horizon := seriesOf(fill(t, m, namedTheta(t, m, base), grid.Count), grid, rate*duration)
	for _, tc := range []struct {
		excitation   string
		depth, width float64
	}{{"source", 0.2, 0}, {"source", 0.7, 0}, {"infall", 0, 0.003}, {"infall", 0, 0.02}} {
		s.Model, s.Reflectivity, s.Excitation = "cavity", "membrane", tc.excitation
		m = newTestModel(t, s)
		base["source_depth"], base["infall_width"] = tc.depth, tc.width
		theta := namedTheta(t, m, base)
		echoes := seriesOf(fill(t, m, theta, grid.Count), grid, rate*duration)
		delay := kerr.EchoDelay(0.69, lnDistance(68, 0)) * 68 * constants.SolarMassSeconds
		begins, want := (1-tc.depth)*delay, (1-tc.depth)*delay
		if tc.excitation == "infall" {
			begins, want = delay, delay+4*tc.width
		}
		energy, before, best := 0.0, 0.0, 0
		for i := range echoes {
			echoes[i] -= horizon[i]
			energy += echoes[i] * echoes[i]
			at := float64(i) / rate
			if at < begins-0.03 {
				before += echoes[i] * echoes[i]
			}
			if at < want+0.5*delay && math.Abs(echoes[i]) > math.Abs(echoes[best]) {
				best = i
			}
		}
		if before > 1e-4*energy {
			t.Errorf("%v: %.2g of the energy beside the ringdown comes before %.3f s", tc, before/energy, begins)
		}
		// Within a width and a half of a carrier's period.
		if got := float64(best) / rate; math.Abs(got-want) > 0.01+tc.width {
			t.Errorf("%v: the first echo peaks at %.4f s, want near %.4f s", tc, got, want)
		}
	}
}

// A clone shares nothing that Fill writes.
func TestCavityClonesAreIndependent(t *testing.T) {
	modes := []string{"2,2,0", "2,2,1"}
	for _, excitation := range []string{"barrier", "source", "infall"} {
		s := Settings{Model: "cavity", Modes: modes, Reflectivity: "boltzmann", Excitation: excitation, Grid: Grid{First: 60, Count: 300, Step: 1}, Length: 1}
		m := newTestModel(t, s)
		a := namedTheta(t, m, modeValues(modes, excitedValues))
		b := namedTheta(t, m, modeValues(modes, excitedValues, map[string]float64{"spin": 0.2, "temperature": 3}))
		want := [2]*Polarizations{fill(t, m, a, 300), fill(t, m.Clone(), b, 300)}
		done := make(chan *Polarizations, 2)
		for i, theta := range [][]float64{a, b} {
			clone := m.Clone()
			go func() {
				h := NewPolarizations(300)
				for range 5 {
					if err := clone.Fill(theta, h); err != nil {
						t.Error(err)
					}
				}
				if j, same := sameBits(h, want[i]); !same {
					t.Errorf("%s: a clone at work beside another differs at bin %d", excitation, j)
				}
				done <- h
			}()
		}
		<-done
		<-done
	}
}

// What a user got wrong is said with key, what was found and what is accepted.
func TestCavityComplains(t *testing.T) {
	good := Settings{Model: "cavity", Modes: []string{"2,2,0"}, Reflectivity: "constant", Grid: Grid{First: 60, Count: 10, Step: 1}, Length: 1}
	for _, tc := range []struct {
		change func(*Settings)
		want   SettingError
	}{
		{func(s *Settings) { s.Excitation = "hammer" }, SettingError{"excitation", `"hammer"`, `"barrier", "source" or "infall"`}},
		{func(s *Settings) { s.Angular = "flat" }, SettingError{"angular", `"flat"`, `"spheroidal" or "spherical"`}},
		{func(s *Settings) { s.Parity = "both" }, SettingError{"parity", `"both"`, `"odd" or "even"`}},
		{func(s *Settings) { s.Reflectivity = "mirror" }, SettingError{"reflectivity", `"mirror"`, "one of constant, boltzmann, membrane, power, lorentzian"}},
	} {
		s := good
		tc.change(&s)
		_, err := New(s)
		got, ok := err.(*SettingError)
		if !ok || *got != tc.want {
			t.Errorf("%v, want %v", err, &tc.want)
		}
	}
}

// An echo due a little after the data's end begins before it, and counts where a
// gate hides what wraps around; one due later does not.
func TestEchoAtTheEndOfTheData(t *testing.T) {
	const mass, spin = 68, 0.69
	s := Settings{Model: "cavity", Modes: []string{"2,2,0"}, Reflectivity: "constant", Grid: Grid{First: 60, Count: 500, Step: 0.5}}
	scale := mass * constants.SolarMassSeconds
	delay := kerr.EchoDelay(spin, lnDistance(mass, 0)) * scale
	echoes := func(after, spill float64) bool {
		s.Length, s.Spill = delay-after*scale, spill
		m := newTestModel(t, s)
		theta := namedTheta(t, m, modeValues(s.Modes, map[string]float64{"mass": mass, "spin": spin, "start_time": 0, "offset": 0, "reflectivity": 0.9}))
		got := fill(t, m, theta, s.Grid.Count)
		ringdown := newTestModel(t, Settings{Model: "ringdown", Modes: s.Modes, Grid: s.Grid})
		want := fill(t, ringdown, theta[:5], s.Grid.Count)
		for j := range want.PlusRe {
			if math.Abs(got.PlusRe[j]-want.PlusRe[j]) > 1e-9*math.Abs(want.PlusRe[j]) {
				return true
			}
		}
		return false
	}
	for _, tc := range []struct {
		after, spill float64
		want         bool
	}{
		{-1, 0, true}, {1, 0, false}, {50, 0.25, true}, {99, 0.25, true}, {101, 0.25, false}, {50, 40 * scale, false}, {15, 40 * scale, true},
	} {
		if got := echoes(tc.after, tc.spill); got != tc.want {
			t.Errorf("echo due %g M after the end, %g s hidden: counted %v, want %v", tc.after, tc.spill, got, tc.want)
		}
	}
}
