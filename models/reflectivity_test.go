package models

import (
	"errors"
	"fmt"
	"math"
	"math/rand/v2"
	"testing"

	"knell/internal/checktable"
	"knell/models/kerr"
)

// asWritten is each law as its documentation has it.
var asWritten = map[string]func(law []float64, temperature, k float64) float64{
	"constant": func(law []float64, _, _ float64) float64 { return law[0] },
	"boltzmann": func(law []float64, temperature, k float64) float64 {
		return law[0] * math.Exp(-math.Abs(k)/(2*law[1]*temperature))
	},
	"membrane": func(law []float64, _, _ float64) float64 { return (1 - law[0]) / (1 + law[0]) },
	"power": func(law []float64, temperature, k float64) float64 {
		return law[0] * math.Pow(1+math.Abs(k)/(law[1]*temperature), -law[2])
	},
	"lorentzian": func(law []float64, temperature, k float64) float64 {
		x := k / (law[1] * temperature)
		return law[0] / (1 + x*x)
	},
}

// The slices that a call fills against the laws as written, across k = 0 in both
// directions, in small steps and large.
func TestReflectivitiesAsWritten(t *testing.T) {
	rng := rand.New(rand.NewPCG(1, 2))
	rs := make([]float64, 3000)
	for _, r := range reflectivities {
		written, ok := asWritten[r.name]
		if !ok {
			t.Fatalf("no law %s here", r.name)
		}
		for range 40 {
			law := make([]float64, len(r.parameters))
			for i, p := range r.parameters {
				law[i] = p.Low + rng.Float64()*(math.Min(p.High, 30)-p.Low)
				if p.Name == "corner" || p.Name == "temperature" {
					law[i] = math.Exp(-5 + 8*rng.Float64())
				}
			}
			temperature := kerr.HawkingTemperature(0.998 * rng.Float64())
			dk := math.Exp(-10+8*rng.Float64()) * float64(1-2*rng.IntN(2))
			k0 := 4 * (rng.Float64() - 0.5)
			r.fill(law, temperature, k0, dk, rs)
			for j := range rs {
				want := written(law, temperature, k0+float64(j)*dk)
				// fillPower's series, and a rotor's 64 roundings; a k near 0 is
				// itself rounded.
				if !(math.Abs(rs[j]-want) <= 1e-11*want+1e-300) {
					t.Fatalf("%s %v, T %g, k %g: %.15g, want %.15g", r.name, law, temperature, k0+float64(j)*dk, rs[j], want)
				}
			}
		}
	}
}

// No law leaves [0, 1] or stops being a number anywhere in its domain, its ends
// included.
func TestReflectivitiesStayInRange(t *testing.T) {
	ends := func(p Parameter) []float64 {
		return []float64{p.Low, math.Min(p.High, math.MaxFloat64), p.High, p.Low + 0.5*(math.Min(p.High, 2)-p.Low)}
	}
	rs := make([]float64, 500)
	for _, r := range reflectivities {
		laws := [][]float64{{}}
		for _, p := range r.parameters {
			var more [][]float64
			for _, law := range laws {
				for _, v := range ends(p) {
					more = append(more, append(append([]float64{}, law...), v))
				}
			}
			laws = more
		}
		for _, law := range laws {
			for _, dk := range []float64{1e-6, -1e-3, 0.3, 0} {
				for _, k0 := range []float64{-0.01, 0, 0.7, 250 * 1e-3} {
					r.fill(law, kerr.HawkingTemperature(kerr.MaxSpin), k0, dk, rs)
					for j, v := range rs {
						if !(v >= 0 && v <= 1) {
							t.Fatalf("%s %v at k = %g: %g", r.name, law, k0+float64(j)*dk, v)
						}
					}
				}
			}
		}
	}
}

// Without reflection every law is 0 at every frequency, and elsewhere is not.
func TestNoReflectionIsZero(t *testing.T) {
	for i, r := range reflectivities {
		law := func(values map[string]float64) []float64 {
			out := make([]float64, len(r.parameters))
			for i, p := range r.parameters {
				out[i] = values[p.Name]
			}
			return out
		}
		none, some := law(everyReflectivity[i].none), law(everyReflectivity[i].some)
		for _, k := range []float64{-0.5, 0, 0.1} {
			if v := r.at(none, 0.03, k); v != 0 || r.reflects(none) {
				t.Errorf("%s %v: reflects %g at k = %g", r.name, none, v, k)
			}
			if v := r.at(some, 0.03, k); !(v > 0) || !r.reflects(some) {
				t.Errorf("%s %v: reflects %g at k = %g", r.name, some, v, k)
			}
		}
	}
}

func TestPhysicsReflectivities(t *testing.T) {
	table := checktable.New(t, "reflectivity laws of a surface, as amplitude")
	at := func(name string, law []float64, spin, k float64) float64 {
		v, err := ReflectivityAt(name, law, spin, k)
		if err != nil {
			t.Fatal(err)
		}
		return v
	}
	// Half a unit of the last digit given.
	for _, tc := range []struct{ spin, rs, digit float64 }{{0, 0.00913, 5e-6}, {0.5, 0.0702, 5e-5}, {0.68, 0.1415, 5e-5}, {0.7, 0.1536, 5e-5}, {0.9, 0.3954, 5e-5}} {
		mode, err := kerr.QuasiNormalMode(2, 2, 0, tc.spin)
		if err != nil {
			t.Fatal(err)
		}
		k := real(mode.Omega) - 2*kerr.HorizonFrequency(tc.spin)
		table.Absolute(fmt.Sprintf("Boltzmann at Re omega of 2,2,0, spin %g", tc.spin), at("boltzmann", []float64{1, 1}, tc.spin, k), tc.rs, tc.digit,
			"exp(-|k|/2T_H) of arXiv:1905.00464, evaluated independently")
		// With T_H as unit the corner laws are numbers: half at the corner.
		table.Relative(fmt.Sprintf("Lorentzian at its corner, spin %g", tc.spin), at("lorentzian", []float64{1, 3}, tc.spin, 3*kerr.HawkingTemperature(tc.spin)), 0.5, 1e-14, "1/(1 + 1)")
		table.Relative(fmt.Sprintf("power 2 at its corner, spin %g", tc.spin), at("power", []float64{1, 3, 2}, tc.spin, -3*kerr.HawkingTemperature(tc.spin)), 0.25, 1e-14, "(1 + 1)^-2")
	}
	// A membrane of viscosity (1/16 pi) tanh(|k|/4T_H) is the Boltzmann surface.
	worst := 0.0
	for _, spin := range []float64{0, 0.5, 0.9, 0.998} {
		for k := -1.0; k <= 1; k += 0.037 {
			temperature := kerr.HawkingTemperature(spin)
			viscosity := math.Tanh(math.Abs(k) / (4 * temperature))
			// 1 - viscosity loses digits as it nears 0.
			if 1-viscosity < 1e-6 {
				continue
			}
			ours, want := at("membrane", []float64{viscosity}, spin, k), at("boltzmann", []float64{1, 1}, spin, k)
			worst = max(worst, math.Abs(ours/want-1))
		}
	}
	table.Worst("membrane with eta = tanh(|k|/4T_H)/16pi against Boltzmann, relative", worst, 1e-9, "identity stated in arXiv:1905.00464")
	table.Absolute("membrane at eta = 0", at("membrane", []float64{0}, 0.7, 0.1), 1, 0, "arXiv:2006.14628")
	table.Absolute("membrane at eta = 1/(16 pi), a horizon", at("membrane", []float64{1}, 0.7, 0.1), 0, 0, "arXiv:2006.14628")
}

func TestReflectivityAtRefuses(t *testing.T) {
	var setting *SettingError
	if _, err := ReflectivityAt("mirror", nil, 0.7, 0.1); !errors.As(err, &setting) || setting.Key != "reflectivity" {
		t.Errorf("an unknown law: %v", err)
	}
	if _, err := ReflectivityParameters("mirror"); !errors.As(err, &setting) {
		t.Errorf("an unknown law: %v", err)
	}
	for _, tc := range []struct {
		why  string
		law  []float64
		spin float64
		k    float64
	}{
		{"too few", []float64{1}, 0.7, 0.1},
		{"beyond 1", []float64{1.1, 1}, 0.7, 0.1},
		{"NaN", []float64{1, math.NaN()}, 0.7, 0.1},
		{"spin", []float64{1, 1}, 1, 0.1},
		{"k", []float64{1, 1}, 0.7, math.NaN()},
	} {
		if v, err := ReflectivityAt("boltzmann", tc.law, tc.spin, tc.k); err == nil {
			t.Errorf("%s: %g and no error", tc.why, v)
		}
	}
}

func TestFillExponential(t *testing.T) {
	rs := make([]float64, 3000)
	for _, dk := range []float64{0.0007, -0.0007, 1.3, -0.05} {
		for _, k0 := range []float64{-0.9, 0, 0.4, 0.9} {
			fillExponential(0.8, 15, k0, dk, rs)
			for j := range rs {
				want := 0.8 * math.Exp(-15*math.Abs(k0+float64(j)*dk))
				if math.Abs(rs[j]-want) > 1e-12*want+1e-300 {
					t.Fatalf("k0 %g dk %g j %d: %g, want %g", k0, dk, j, rs[j], want)
				}
			}
		}
	}
}

// The frequencies of 68 solar masses at spin 0.69 from 30 to 900 Hz in steps of
// 1/4 Hz.
func BenchmarkReflectivity(b *testing.B) {
	rs := make([]float64, 3481)
	for i, r := range reflectivities {
		b.Run(r.name, func(b *testing.B) {
			law := make([]float64, len(r.parameters))
			for j, p := range r.parameters {
				law[j] = everyReflectivity[i].some[p.Name]
			}
			b.ReportAllocs()
			for b.Loop() {
				r.fill(law, 0.033, -0.34, 5.3e-4, rs)
			}
			b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(b.N*len(rs)), "ns/bin")
		})
	}
}
