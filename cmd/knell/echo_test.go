package main

import (
	"fmt"
	"math"
	"strings"
	"testing"

	"knell/internal/checktable"
	"knell/internal/report"
	"knell/models"
)

// echoes runs knell echo --json and decodes it.
func echoes(t *testing.T, args string) report.EchoDocument {
	t.Helper()
	status, stdout, stderr := knell(t, append([]string{"echo", "--json"}, strings.Fields(args)...)...)
	if status != statusDone || stderr != "" {
		t.Fatalf("knell echo %s: status %d, standard error %q", args, status, stderr)
	}
	var d report.EchoDocument
	parse(t, stdout, &d)
	return d
}

func relative(got report.Number, want float64) float64 { return math.Abs(float64(got)/want - 1) }

// Values of testdata/geometry.csv of models/kerr: spin 0.67, 70 solar masses, surface
// at one Planck length; closed forms at 120 digits, computed independently.
func TestPhysicsEchoGeometry(t *testing.T) {
	const (
		second    = 70 * 4.92549094764126698e-6
		perRadian = 1 / (2 * math.Pi * second)
	)
	d := echoes(t, "--mass 70 --spin 0.67 --offset 0")
	table := checktable.New(t, "knell echo against closed forms at 120 digits: 70 solar masses, spin 0.67, offset 0")
	for _, tc := range []struct {
		name string
		got  report.Number
		want float64
	}{
		{"horizon_frequency_hz", d.HorizonFrequency, 0.19226783722485181621 * perRadian},
		{"amplified_below_hz", d.AmplifiedBelow, 2 * 0.19226783722485181621 * perRadian},
		{"temperature_hz", d.Temperature, 0.033905267528152016464 * perRadian},
		// The kelvin-hertz relationship of CODATA 2018, exact, from memory.
		{"temperature_kelvin", d.TemperatureKelvin, 0.033905267528152016464 * perRadian / 2.083661912e10},
		{"horizon_radius", d.HorizonRadius, 1.7423610981186985663},
		{"light_ring", d.LightRing, 2.0682392542085205629},
		{"barrier_tortoise", d.BarrierTortoise, -2.155676929235222235},
		{"surface_tortoise", d.SurfaceTortoise, -435.28202700842507661},
		{"log10_gap", d.LogGap, math.Log10(2.6043555516970765775e-81 / 1.7423610981186985663)},
		{"proper_distance_m", d.ProperDistance, 1.616255e-35},
		{"echo_delay_s", d.EchoDelay, 0.29867038830999327811},
		{"mode_spacing_hz", d.ModeSpacing, 1 / 0.29867038830999327811},
	} {
		// The printed digits of the kelvin-hertz relationship are ten.
		table.Relative(tc.name, float64(tc.got), tc.want, 1e-9, "models/kerr/testdata/geometry.csv")
	}
	if d.Offset != 0 || d.Mass != 70 || d.Spin != 0.67 {
		t.Errorf("got %+v", d)
	}
	// The Hawking temperature of one solar mass is 6.17e-8 K (from memory).
	if one := echoes(t, "--mass 1 --spin 0"); relative(one.TemperatureKelvin, 6.17e-8) > 1e-3 || one.HorizonFrequency != 0 {
		t.Errorf("one solar mass: %+v", one)
	}
	// 67.8 solar masses at spin 0.68: 0.2910 s with the barrier at the prograde light
	// ring, whether along the equator or the axis to 0.0002 s (computed independently).
	if d := echoes(t, "--mass 67.8 --spin 0.68"); math.Abs(float64(d.EchoDelay)-0.2910) > 2.5e-4 {
		t.Errorf("delay %g s, want 0.2910 s", float64(d.EchoDelay))
	}
	// The same surface by its coordinate.
	gap := fmt.Sprintf("%.17g", 2.6043555516970765775e-81/1.7423610981186985663)
	e := echoes(t, "--mass 70 --spin 0.67 --gap "+gap)
	if relative(e.EchoDelay, float64(d.EchoDelay)) > 1e-13 || math.Abs(float64(e.Offset)) > 1e-12 || relative(e.ProperDistance, 1.616255e-35) > 1e-10 {
		t.Errorf("with --gap %s: %+v, want %+v", gap, e, d)
	}
	// Ten times the distance is a hundred times the gap: earlier by 4 ln(10) 2 r+/(r+ - r-)
	// in units of M, at any height near the horizon.
	far := echoes(t, "--mass 70 --spin 0.67 --offset 1")
	rp := 1.7423610981186985663
	if step := float64(d.EchoDelay-far.EchoDelay) / second; math.Abs(step/(4*math.Ln10*2*rp/(2*(rp-1)))-1) > 1e-10 {
		t.Errorf("a step of offset changes the delay by %g M", step)
	}
}

func TestEchoAmplitudes(t *testing.T) {
	d := echoes(t, "--mass 68 --spin 0.7 --offset 0")
	// The mode: testdata/qnm.csv of models/kerr, 34 digits.
	if relative(d.Mode.Omega[0], 0.5326002435510180172) > 1e-10 || relative(d.Mode.Omega[1], -0.0807928731550076602) > 1e-10 {
		t.Errorf("mode %v", d.Mode.Omega)
	}
	// |R|^2 = 1 - greybody factor falls with the frequency there; the factor is
	// 0.19490 at M omega = 0.5 and 0.64064 at 0.55 (computed independently).
	if r := float64(d.Mode.Magnitude); !(r < math.Sqrt(1-0.19490) && r > math.Sqrt(1-0.64064)) {
		t.Errorf("|R| = %g at the mode, want 0.5995 to 0.8973", r)
	}
	if len(d.Laws) != len(models.ReflectivityNames()) {
		t.Fatalf("%d laws, want every one of %v", len(d.Laws), models.ReflectivityNames())
	}
	for i, name := range models.ReflectivityNames() {
		l := d.Laws[i]
		q := float64(l.Surface * d.Mode.Magnitude)
		if l.Law != name || len(l.Parameters) == 0 || len(l.Echoes) != 5 || relative(l.Ratio, q) > 1e-14 || relative(l.Flux, q*q) > 1e-14 {
			t.Errorf("got %+v", l)
		}
		for n, e := range l.Echoes {
			if relative(e, math.Pow(q, float64(n+1))) > 1e-13 {
				t.Errorf("%s: echo %d is %g, want |q|^%d of %g", name, n+1, float64(e), n+1, q)
			}
		}
		if l.Stable != (l.LargestRatio <= 1) || l.Stable && l.GrowthTime != nil || !l.Stable && (l.GrowthTime == nil) != (l.Note != "") {
			t.Errorf("%s: %+v contradicts itself", name, l)
		}
	}
	// arXiv:1905.00464's amplitude exp(-|k| / 2 T_H) is 0.1536 at the mode of spin 0.7,
	// and leaves no instability. A perfect mirror has one.
	for _, tc := range []struct {
		law     string
		surface float64
		stable  bool
	}{{"constant", 1, false}, {"boltzmann", 0.1536, true}, {"membrane", 1. / 3, true}} {
		for _, l := range d.Laws {
			if l.Law == tc.law && (math.Abs(float64(l.Surface)-tc.surface) > 5e-5 || l.Stable != tc.stable) {
				t.Errorf("got %+v, want surface %g, stable %t", l, tc.surface, tc.stable)
			}
		}
	}
	// Largest amplification 0.273 % and largest stable amplitude 0.99864 at spin 0.7,
	// 0.06420 and 0.96937 at 0.9, where M omega = 0.5820 (computed independently from
	// the Teukolsky equation).
	if math.Abs(float64(d.Stability.MaxReflectivity)-0.99864) > 6e-6 || math.Abs(float64(d.Stability.Gain)-0.0027321) > 5e-8 {
		t.Errorf("got %+v", d.Stability)
	}
	at := echoes(t, "--mass 68 --spin 0.9").Stability
	hertz := 0.5820 / (2 * math.Pi * 68 * 4.92549094764126698e-6)
	if math.Abs(float64(at.MaxReflectivity)-0.96937) > 6e-6 || math.Abs(float64(at.Gain)-0.064201) > 5e-7 || relative(at.GainFrequency, hertz) > 2e-4 {
		t.Errorf("got %+v", at)
	}
	// The band of -m is that of m, at negative frequencies.
	if back := echoes(t, "--mass 68 --spin 0.9 --m -2").Stability; back.Gain != at.Gain || back.GainFrequency != -at.GainFrequency || back.MaxReflectivity != at.MaxReflectivity {
		t.Errorf("m = -2: %+v, m = 2: %+v", back, at)
	}
	if at := echoes(t, "--mass 68 --spin 0"); at.Stability.Gain != 0 || at.Stability.MaxReflectivity != 1 || !at.Laws[0].Stable {
		t.Errorf("spin 0: %+v", at)
	}
}

// The delay from the phase at the mode's frequency against the phases of the barrier
// in referenceResponse's source at M omega = 0.7 and 0.8, spin 0.7, l = m = 2: a
// difference quotient over 0.1, so it is only near the slope at the middle.
func TestDelayAtFrequency(t *testing.T) {
	v := &cavity{mass: 1, spin: 0.7, lnGap: -180}
	v.mode.L, v.mode.M = 2, 2
	phase := func(re, im float64) float64 { return math.Atan2(im, re) }
	want := (phase(0.00550640162107163785, -0.00536801812946986487) - phase(0.033604663366120007, -0.0306847936587874099)) / 0.1
	at := func(lnGap float64) float64 {
		v.lnGap = lnGap
		delay, err := v.delayAt(0.75)
		if err != nil {
			t.Fatal(err)
		}
		return delay
	}
	// Only the surface's own part depends on the gap: 2 r*.
	rp, rm := 1.7141428428542849998, 0.28585715714571500016
	if got, want := at(-180)-at(-190), -2*10*2*rp/(rp-rm); math.Abs(got/want-1) > 1e-9 {
		t.Errorf("ten e-folds of the gap change the delay by %g, want %g", got, want)
	}
	tortoise := rp + 2*rp/(rp-rm)*(-180-math.Ln2) - 2*rm/(rp-rm)*math.Log((rp-rm)/2)
	if got := at(-180) + 2*tortoise; math.Abs(got-want) > 0.25*math.Abs(want)+0.05 {
		t.Errorf("the barrier's part of the delay is %g, want about %g", got, want)
	}
}

func TestEchoLaws(t *testing.T) {
	d := echoes(t, "--mass 68 --spin 0.67 --law constant,reflectivity=0.7 --law boltzmann,temperature=2,reflectivity=0.5 --law constant,reflectivity=0 --echoes 2")
	if len(d.Laws) != 3 || d.Laws[0].Surface != 0.7 || d.Laws[2].Ratio != 0 || !d.Laws[0].Stable || len(d.Laws[0].Echoes) != 2 ||
		d.Laws[1].Parameters[0].Value != 0.5 || d.Laws[1].Parameters[1].Value != 2 {
		t.Errorf("got %+v", d.Laws)
	}
	// exp(-|k|/4 T_H)/2 against exp(-|k|/2 T_H).
	plain := echoes(t, "--mass 68 --spin 0.67 --law boltzmann").Laws[0]
	if want := math.Sqrt(float64(plain.Surface)) / 2; relative(d.Laws[1].Surface, want) > 1e-12 {
		t.Errorf("surface %g, want %g", float64(d.Laws[1].Surface), want)
	}
	// Every parameter of every law has a value without --law.
	for _, name := range models.ReflectivityNames() {
		if _, err := parseLaw(name); err != nil {
			t.Error(err)
		}
	}
	status, stdout, _ := knell(t, "echo", "--mass", "68", "--spin", "0.67")
	for _, want := range []string{"echo delay", "0.290045799  s", "Hawking temperature", "largest stable constant reflectivity", "boltzmann", "reflectivity 1, temperature 1", "stable"} {
		if status != statusDone || !strings.Contains(stdout, want) {
			t.Errorf("no %q in\n%s", want, stdout)
		}
	}
}

// Where anything is defined, everything is finite.
func TestEchoDomain(t *testing.T) {
	for _, args := range []string{
		"--mass 1e-3 --spin 0.998 --l 4 --m 4 --n 0", "--mass 1e12 --spin 0.998 --l 4 --m -4 --n 7", "--mass 68 --spin 0 --l 2 --m 0",
		"--mass 68 --spin 0.7 --gap 5e-324", "--mass 68 --spin 0.7 --offset -40", "--mass 68 --spin 1e-9 --offset 3 --l 3 --m 1", "--mass 68 --spin 0.5 --parity even --m -2",
	} {
		status, stdout, stderr := knell(t, append([]string{"echo", "--json"}, strings.Fields(args)...)...)
		if status != statusDone || stderr != "" {
			t.Errorf("%s: status %d, standard error %q", args, status, stderr)
		}
		if strings.Contains(strings.ReplaceAll(stdout, `"growth_time_s": null`, ""), "null") {
			t.Errorf("%s: not finite:\n%s", args, stdout)
		}
	}
}

func TestEchoUsage(t *testing.T) {
	for _, tc := range []struct{ args, want string }{
		{"", "echo wants --mass"},
		{"--mass 68", "echo wants --spin, from 0 to 0.998"},
		{"--mass 0 --spin 0.5", "--mass = 0, want a finite number"},
		{"--mass -68 --spin 0.5", "--mass = -68"},
		{"--mass nan --spin 0.5", "--mass = NaN"},
		{"--mass inf --spin 0.5", "--mass = +Inf"},
		{"--mass 1e-300 --spin 0.5", "--mass = 1e-300"},
		{"--mass heavy --spin 0.5", `--mass = "heavy", want a number`},
		{"--mass 68 --spin 1", "spin = 1, want 0 to 0.998"},
		{"--mass 68 --spin nan", "spin = NaN"},
		{"--mass 68 --spin 0.5 --offset nan", "--offset = NaN, want -40 to below"},
		{"--mass 68 --spin 0.5 --offset -41", "--offset = -41, want -40 to below"},
		{"--mass 68 --spin 0.5 --offset 50", "where the light ring is"},
		{"--mass 68 --spin 0.5 --offset inf", "--offset = +Inf"},
		{"--mass 68 --spin 0.5 --gap 0", "--gap = 0, want above 0 and below"},
		{"--mass 68 --spin 0.5 --gap -1e-80", "--gap = -1e-80"},
		{"--mass 68 --spin 0 --gap 0.5", "--gap = 0.5, want above 0 and below 0.5, where the light ring is"},
		{"--mass 68 --spin 0.5 --gap nan", "--gap = NaN"},
		{"--mass 68 --spin 0.5 --gap 1e-80 --offset 0", "either --offset or --gap, not both"},
		{"--mass 68 --spin 0.5 --l 5", "l = 5"},
		{"--mass 68 --spin 0.5 --m 3", "m = 3"},
		{"--mass 68 --spin 0.5 --n 8", "n = 8"},
		{"--mass 68 --spin 0.5 --parity up", `--parity = "up", want odd or even`},
		{"--mass 68 --spin 0.5 --echoes 0", "--echoes = 0, want 1 to 10000"},
		{"--mass 68 --spin 0.5 --echoes many", `--echoes = "many", want a whole number`},
		{"--mass 68 --spin 0.5 --law mirror", `--law mirror: no law "mirror", want one of constant, boltzmann`},
		{"--mass 68 --spin 0.5 --law constant,reflectivity", `"reflectivity", want PARAMETER=VALUE`},
		{"--mass 68 --spin 0.5 --law constant,", `want PARAMETER=VALUE`},
		{"--mass 68 --spin 0.5 --law constant,viscosity=1", `no parameter "viscosity", want one of reflectivity`},
		{"--mass 68 --spin 0.5 --law constant,reflectivity=1.5", "reflectivity = 1.5, want a number from 0 to 1"},
		{"--mass 68 --spin 0.5 --law constant,reflectivity=nan", "reflectivity = nan, want a number from 0 to 1"},
		{"--mass 68 --spin 0.5 --law boltzmann,temperature=inf", "temperature = inf, want a number"},
		{"--mass 68 --spin 0.5 --law constant,reflectivity=1,reflectivity=1", "reflectivity twice"},
		{"--mass 68 --spin 0.5 --plot a.jpeg", "--plot a.jpeg, want a file name that ends in .svg or .png"},
		{"--mass 68 --spin 0.5 --replace", "--replace without --plot"},
		{"--mass 68 --spin 0.5 0.6", "echo takes no argument, found 0.6"},
	} {
		checkUsage(t, "echo", tc.args, tc.want)
	}
}
