package validation

import (
	"fmt"
	"math"
	"math/cmplx"
	"testing"

	"gonum.org/v1/gonum/dsp/fourier"

	"knell/internal/constants"
	"knell/models"
	"knell/models/kerr"
)

// row is one published number and ours.
type row struct {
	quantity, unit  string
	ours, published float64
	tol             float64 // half a unit of the published value's last place, and what else is stated beside it
	source          string
}

func check(t *testing.T, rows []row) {
	t.Helper()
	t.Logf("%-46s %14s %14s %10s  %s", "quantity", "ours", "published", "difference", "source")
	for _, r := range rows {
		t.Logf("%-46s %14.8g %14.8g %10.1e  %s", r.quantity+" "+r.unit, r.ours, r.published, r.ours-r.published, r.source)
		if !(math.Abs(r.ours-r.published) <= r.tol) {
			t.Errorf("%s = %.9g %s, published %.9g ± %.1g (%s)", r.quantity, r.ours, r.unit, r.published, r.tol, r.source)
		}
	}
}

// derive gives a model's derived quantities by name.
func derive(t *testing.T, s models.Settings, values map[string]float64) map[string]float64 {
	t.Helper()
	s.Grid = models.Grid{First: 80, Count: 10, Step: 0.5}
	s.Length = 1
	m, err := models.New(s)
	if err != nil {
		t.Fatal(err)
	}
	theta := make([]float64, len(m.Parameters()))
	for i, p := range m.Parameters() {
		theta[i] = values[p.Name]
	}
	out := make([]float64, len(m.Derived()))
	if err := m.Derive(theta, out); err != nil {
		t.Fatal(err)
	}
	byName := map[string]float64{}
	for i, p := range m.Derived() {
		byName[p.Name] = out[i]
	}
	return byName
}

// What a posterior file says of a remnant: derived columns of the models against
// numbers that came from elsewhere.
func TestDerivedColumns(t *testing.T) {
	const independent = "computed independently by continued fractions"
	var rows []row
	ring := derive(t, models.Settings{Model: "ringdown", Modes: []string{"2,2,0"}}, map[string]float64{"mass": 68, "spin": 0.68})
	rows = append(rows,
		// The numbers were made with G M_sun / c^3 = 4.925490947e-6 s.
		row{"frequency 2,2,0, 68 solar masses, spin 0.68", "Hz", ring["frequency_220"], 248.985, 6e-4, independent},
		row{"damping time 2,2,0, 68 solar masses, spin 0.68", "ms", 1e3 * ring["damping_time_220"], 4.1090, 6e-5, independent},
	)
	// Printed in units 2M = 1; the derived columns take them through hertz and
	// seconds and back. The tables' last place counts, one unit for l = 2, n = 6.
	for _, m := range []struct {
		label, name      string
		re, im           float64
		halfTheLastPlace float64
	}{
		{"2,2,0", "220", 0.747343, 0.177925, 5e-7}, {"2,2,1", "221", 0.693422, 0.547830, 5e-7},
		{"2,2,2", "222", 0.602107, 0.956554, 5e-7}, {"2,2,3", "223", 0.503010, 1.410296, 5e-7},
		{"2,2,4", "224", 0.415029, 1.893690, 5e-7}, {"2,2,5", "225", 0.338599, 2.391216, 5e-7},
		{"2,2,6", "226", 0.266505, 2.895822, 1e-6},
		{"3,3,0", "330", 1.198887, 0.185406, 5e-7}, {"3,3,1", "331", 1.165288, 0.562596, 5e-7},
		{"4,4,0", "440", 1.618357, 0.188328, 5e-7}, {"4,4,1", "441", 1.593263, 0.568669, 5e-7},
	} {
		const mass = 50
		scale := mass * constants.SolarMassSeconds
		d := derive(t, models.Settings{Model: "ringdown", Modes: []string{m.label}}, map[string]float64{"mass": mass})
		const source = "Proc. R. Soc. A 402, 285 (1985)"
		rows = append(rows,
			row{"2M Re omega " + m.label + ", spin 0", "", 2 * scale * 2 * math.Pi * d["frequency_"+m.name], m.re, m.halfTheLastPlace * 1.02, source},
			row{"-2M Im omega " + m.label + ", spin 0", "", 2 * scale / d["damping_time_"+m.name], m.im, m.halfTheLastPlace * 1.02, source})
	}
	for _, e := range []struct{ mass, spin, delay float64 }{{67.8, 0.68, 0.2910}, {60, 0.69, 0.2591}, {22.3, 0.74, 0.0994}} {
		d := derive(t, models.Settings{Model: "cavity", Modes: []string{"2,2,0"}, Reflectivity: "constant"},
			// A proper distance of 1.616e-35 m. It was counted along the equator, where
			// the radial metric is that of the axis less a^2 in r^2 + a^2; on the axis
			// the delay is 0.0002 s longer.
			map[string]float64{"mass": e.mass, "spin": e.spin, "offset": math.Log10(1.616e-35/constants.PlanckLength) +
				0.5*math.Log10(1+math.Pow(e.spin/kerr.HorizonRadius(e.spin), 2))})
		rows = append(rows, row{fmt.Sprintf("echo delay, %g solar masses, spin %g", e.mass, e.spin), "s", d["echo_delay"], e.delay, 5e-5, "computed independently from the tortoise coordinate"})
	}
	check(t, rows)
}

// roundTrip is |q|, q = R Rs exp(-2 i k x0), as a cavity's spectrum has it at
// M omega: the ratio to the ringdown's, less one, when the data are too short for
// a second echo.
//
// Face-on the mode is circular: at f > 0, h+ + i hx holds its resonance alone,
// whose factor is conj(1 + q).
func roundTrip(t *testing.T, law string, spin, omega float64) float64 {
	t.Helper()
	const mass = 68.0
	f := omega / (2 * math.Pi * mass * constants.SolarMassSeconds)
	s := models.Settings{
		Model: "ringdown", Modes: []string{"2,2,0"}, Grid: models.Grid{First: 1, Count: 1, Step: f},
		Length: 1.5 * kerr.EchoDelay(spin, math.Log(constants.PlanckLength/(mass*constants.SolarMassMetres))) * mass * constants.SolarMassSeconds,
	}
	spectrum := func(s models.Settings) complex128 {
		m, err := models.New(s)
		if err != nil {
			t.Fatal(err)
		}
		values := map[string]float64{"mass": mass, "spin": spin, "amplitude_220": 1, "phase_220": 0.7, "offset": 0, "echo_phase": 1, "reflectivity": 1, "temperature": 1}
		theta := make([]float64, len(m.Parameters()))
		for i, p := range m.Parameters() {
			theta[i] = values[p.Name]
		}
		h := models.NewPolarizations(1)
		if err := m.Fill(theta, h); err != nil {
			t.Fatal(err)
		}
		return complex(h.PlusRe[0], h.PlusIm[0]) + 1i*complex(h.CrossRe[0], h.CrossIm[0])
	}
	horizon := spectrum(s)
	s.Model, s.Reflectivity = "cavity", law
	return cmplx.Abs(spectrum(s)/horizon - 1)
}

// The round trip's modulus as the cavity's spectrum has it, over the barrier's
// own reflection, is the surface's reflectivity: the Boltzmann law at the mode's
// frequency. With a perfect surface it is the barrier's, whose largest excess over
// one is the superradiant gain.
func TestRoundTrips(t *testing.T) {
	var rows []row
	for _, b := range []struct{ spin, rs float64 }{{0, 0.00913}, {0.5, 0.0702}, {0.68, 0.1415}, {0.7, 0.1536}, {0.9, 0.3954}} {
		mode, err := kerr.QuasiNormalMode(2, 2, 0, b.spin)
		if err != nil {
			t.Fatal(err)
		}
		omega := real(mode.Omega)
		digits := 5e-5
		if b.rs < 0.05 {
			digits = 5e-6
		}
		ours := roundTrip(t, "boltzmann", b.spin, omega) / roundTrip(t, "constant", b.spin, omega)
		rows = append(rows, row{fmt.Sprintf("Boltzmann |Rs| at the 2,2,0 frequency, spin %g", b.spin), "", ours, b.rs, digits, "law of arXiv:1905.00464, evaluated independently"})
	}
	for _, g := range []struct{ spin, at, gain, digits float64 }{
		{0.5, 0.2359, 0.00012, 5e-6}, {0.7, 0.3683, 0.00273, 5e-6}, {0.8, 0.4569, 0.01244, 5e-6},
		{0.9, 0.5820, 0.06420, 5e-6}, {0.95, 0.6803, 0.17252, 5e-6}, {0.99, 0.8341, 0.55522, 5e-6},
	} {
		// Flat at the top: the frequency's four digits change the gain by less
		// than a unit of its last place.
		q := roundTrip(t, "constant", g.spin, g.at)
		rows = append(rows, row{fmt.Sprintf("largest gain |q|^2 - 1, perfect surface, spin %g", g.spin), "", q*q - 1, g.gain, 2 * g.digits, "Teukolsky equation, computed independently; as arXiv:1807.08840"})
	}
	check(t, rows)
}

// The first echo of a Boltzmann surface in the time domain: by an inverse FFT its
// energy over the ringdown's is that of the round trip's factor, from the
// barrier's own integration and the law as published, and it arrives one delay
// after the start.
func TestFirstEchoInTime(t *testing.T) {
	const (
		mass, spin = 67.8, 0.68
		duration   = 0.5
		n          = 2048
	)
	grid := models.Grid{First: 30, Count: 870, Step: 1 / duration}
	s := models.Settings{Model: "ringdown", Modes: []string{"2,2,0"}, Length: duration - 0.05, Grid: grid}
	series := func(s models.Settings, theta []float64) (plus, cross []float64) {
		m, err := models.New(s)
		if err != nil {
			t.Fatal(err)
		}
		h := models.NewPolarizations(grid.Count)
		if err := m.Fill(theta, h); err != nil {
			t.Fatal(err)
		}
		transform := func(re, im []float64) []float64 {
			c := make([]complex128, n/2+1)
			for j := range grid.Count {
				c[grid.First+j] = complex(re[j], im[j]) * complex(grid.Step, 0)
			}
			return fourier.NewFFT(n).Sequence(nil, c)
		}
		return transform(h.PlusRe, h.PlusIm), transform(h.CrossRe, h.CrossIm)
	}
	horizonPlus, horizonCross := series(s, []float64{mass, spin, 0, 1e-21, 0.7})
	s.Model, s.Reflectivity = "cavity", "boltzmann"
	surfacePlus, surfaceCross := series(s, []float64{mass, spin, 0, 1e-21, 0.7, 0, 1, 1, 1})

	mode, err := kerr.QuasiNormalMode(2, 2, 0, spin)
	if err != nil {
		t.Fatal(err)
	}
	scale := mass * constants.SolarMassSeconds
	// By Parseval: |R exp(-|k| / 2 T_H)|^2 over the mode's power, resonance and
	// tail; beyond the largest frequency of the barrier's integration R is nothing.
	power, echoed := 0.0, 0.0
	for j := range grid.Count {
		for _, omega := range []float64{2 * math.Pi * grid.Frequency(j) * scale, -2 * math.Pi * grid.Frequency(j) * scale} {
			p := 1 / (math.Pow(omega-real(mode.Omega), 2) + math.Pow(imag(mode.Omega), 2))
			power += p
			if math.Abs(omega) > kerr.MaxFrequency {
				continue
			}
			r, err := kerr.BarrierResponse(2, 2, spin, omega, kerr.Odd)
			if err != nil {
				t.Fatal(err)
			}
			k := omega - 2*kerr.HorizonFrequency(spin)
			rs := math.Exp(-math.Abs(k) / (2 * kerr.HawkingTemperature(spin)))
			echoed += p * math.Pow(rs*cmplx.Abs(r.Reflection), 2)
		}
	}
	var energy, echo, mean float64
	for i := range horizonPlus {
		energy += math.Pow(horizonPlus[i], 2) + math.Pow(horizonCross[i], 2)
		d := math.Pow(surfacePlus[i]-horizonPlus[i], 2) + math.Pow(surfaceCross[i]-horizonCross[i], 2)
		echo += d
		mean += d * float64(i) * duration / n
	}
	mean /= echo
	check(t, []row{
		// The barrier's table is good to 2e-7, the modes' tracks to 1e-8.
		{"first echo over ringdown, amplitude", "", math.Sqrt(echo / energy), math.Sqrt(echoed / power), 1e-6, "law of arXiv:1905.00464 with the barrier's own integration"},
		// The energy's centre lies behind the front by the ringing of the mode and
		// of the barrier, some damping times of 4 ms.
		{"first echo, centre of energy", "s", mean, 0.2910, 0.01, "computed independently from the tortoise coordinate"},
	})
}
