package validation

import (
	"encoding/json"
	"fmt"
	"math"
	"os"
	"os/exec"
	"path/filepath"
	"runtime"
	"strconv"
	"strings"
	"sync"
	"testing"

	"knell/internal/checktable"
	"knell/internal/constants"
	"knell/models/kerr"
)

// The numbers that a user reads off the commands, against published and independent
// ones. The program is built once and run as it stands.

var program struct {
	once   sync.Once
	folder string
	err    error
}

func TestMain(m *testing.M) {
	status := m.Run()
	if program.folder != "" {
		os.RemoveAll(program.folder)
	}
	os.Exit(status)
}

// knell runs a command and decodes the JSON document that it prints.
func knell(t *testing.T, document any, arguments ...string) {
	t.Helper()
	program.once.Do(func() {
		if program.folder, program.err = os.MkdirTemp("", "knell"); program.err != nil {
			return
		}
		if said, err := exec.Command("go", "build", "-o", executable(), "knell/cmd/knell").CombinedOutput(); err != nil {
			program.err = fmt.Errorf("%w\n%s", err, said)
		}
	})
	if program.err != nil {
		t.Fatal(program.err)
	}
	said, err := exec.Command(executable(), append(arguments, "--json")...).Output()
	if err != nil {
		t.Fatalf("knell %s: %v", strings.Join(arguments, " "), err)
	}
	if err := json.Unmarshal(said, document); err != nil {
		t.Fatalf("knell %s: %v", strings.Join(arguments, " "), err)
	}
}

func executable() string {
	name := "knell"
	if runtime.GOOS == "windows" {
		name += ".exe"
	}
	return filepath.Join(program.folder, name)
}

// echoDocument is what these tests read of knell echo.
type echoDocument struct {
	Temperature float64 `json:"temperature_kelvin"`
	Rotation    float64 `json:"horizon_frequency_hz"`
	Delay       float64 `json:"echo_delay_s"`
	Stability   struct {
		Gain            float64 `json:"gain"`
		Where           float64 `json:"gain_hz"`
		MaxReflectivity float64 `json:"max_reflectivity"`
	} `json:"stability"`
	Laws []struct {
		Law     string  `json:"law"`
		Surface float64 `json:"surface"`
	} `json:"laws"`
}

func echo(t *testing.T, mass, spin float64) (d echoDocument) {
	t.Helper()
	knell(t, &d, "echo", "--mass", fmt.Sprint(mass), "--spin", fmt.Sprint(spin), "--offset", "0")
	return d
}

// printed reads a number as it was printed, with half a unit of its last place.
func printed(t *testing.T, text string) (value, half float64) {
	t.Helper()
	value, err := strconv.ParseFloat(text, 64)
	if err != nil {
		t.Fatal(err)
	}
	digits, exponent, _ := strings.Cut(text, "e")
	places := 0
	if _, after, ok := strings.Cut(digits, "."); ok {
		places = len(after)
	}
	power := 0
	if exponent != "" {
		if power, err = strconv.Atoi(exponent); err != nil {
			t.Fatal(err)
		}
	}
	// A hundredth more, for a value that lies on the edge.
	return value, 0.505 * math.Pow(10, float64(power-places))
}

// printedRow compares with a number as printed, to its last place and what is stated besides.
func printedRow(t *testing.T, table *checktable.Table, quantity string, ours float64, text string, besides float64, source string) {
	t.Helper()
	value, half := printed(t, text)
	table.Absolute(quantity, ours, value, half+besides, source)
}

func TestPhysicsWorkedRemnant(t *testing.T) {
	table := checktable.New(t, "remnants in SI units, as the commands print them")
	var modes struct {
		Modes []struct {
			Frequency float64 `json:"frequency_hz"`
			Damping   float64 `json:"damping_time_s"`
		} `json:"modes"`
	}
	knell(t, &modes, "modes", "--mass", "68", "--spin", "0.68")
	const fraction = "independent continued-fraction calculation, 34 digits"
	printedRow(t, table, "f (2,2,0), 68 solar masses, spin 0.68, Hz", modes.Modes[0].Frequency, "248.985", 0, fraction)
	printedRow(t, table, "damping time (2,2,0), same, ms", 1e3*modes.Modes[0].Damping, "4.1090", 0, fraction)

	// The published delays are for a proper distance of 1.616e-35 m along the equator.
	for _, e := range []struct {
		mass, spin float64
		delay      string
	}{{67.8, 0.68, "0.2910"}, {60, 0.69, "0.2591"}, {22.3, 0.74, "0.0994"}} {
		name := fmt.Sprintf("echo delay, %g solar masses, spin %g, ", e.mass, e.spin)
		const source = "light ring to a Planck length, integrated independently"
		gap := kerr.SurfaceGap(e.spin, math.Log(1.616e-35/(e.mass*constants.SolarMassMetres)), kerr.Equator)
		printedRow(t, table, name+"distance along the equator, s", kerr.EchoDelayLog(e.spin, gap)*e.mass*constants.SolarMassSeconds, e.delay, 0, source)
		// Along the axis the same distance ends a little further in, 0.74 M at spin 0.7.
		printedRow(t, table, name+"along the axis, s", echo(t, e.mass, e.spin).Delay, e.delay, 2e-4, source)
	}

	// GM/c^2 = 6.395263e39 Planck lengths: 70 solar masses. Evaluated at 120 digits.
	const massOf70 = 6.395263e39 * constants.PlanckLength / constants.SolarMassMetres
	delay := echo(t, massOf70, 0.7).Delay / (massOf70 * constants.SolarMassSeconds)
	printedRow(t, table, "echo delay, 70 solar masses, spin 0.7, in M", delay, "885.5156", 0, "exact proper-distance integral, 120 digits")
	// Without spin the whole is a closed form. What the leading one leaves out is largest
	// there, 10.3 M, 1.4 percent of the delay at this mass.
	const logarithm = 91.6563761869 // ln 6.395263e39
	for _, spin := range []float64{0, 0.3, 0.5, 0.7, 0.9} {
		delay := echo(t, massOf70, spin).Delay / (massOf70 * constants.SolarMassSeconds)
		if spin == 0 {
			table.Absolute("echo delay, 70 solar masses, spin 0, in M", delay, 8*logarithm+2+12*math.Ln2, 1e-6, "8 ln(M/l_P) + 2 + 12 ln 2, by hand")
		}
		table.Absolute(fmt.Sprintf("echo delay, 70 solar masses, spin %g, in M", spin), delay, 4*(1+1/math.Sqrt(1-spin*spin))*logarithm, 2+12*math.Ln2+1e-6, "4 (1 + 1/√(1-a²)) ln(M/l_P); arXiv:1612.00266 at spin 0")
	}

	// h c^3 / (16 pi^2 G M k_B) of the exact h, c, k_B and G M_sun of arXiv:1510.07674.
	one := echo(t, 1, 0)
	const temperature = 6.62607015e-34 * 299792458 * 299792458 * 299792458 / (16 * math.Pi * math.Pi * 1.3271244e20 * 1.380649e-23)
	table.Relative("Hawking temperature, 1 solar mass, spin 0, K", one.Temperature, temperature, 1e-12, "ħc³/8πGMk_B, Commun. Math. Phys. 43, 199 (1975)")
	printedRow(t, table, "Hawking temperature, 1 solar mass, spin 0, K, as printed", one.Temperature, "6.17e-8", 0, "from memory")
	spinning := echo(t, 68, 0.67)
	const seconds = 68 * 1.3271244e20 / (299792458. * 299792458. * 299792458.)
	root := math.Sqrt(1 - 0.67*0.67)
	table.Relative("Hawking temperature, 68 solar masses, spin 0.67, K", spinning.Temperature, temperature/68*2*root/(1+root), 1e-12, "times 2√(1-a²)/(1+√(1-a²))")
	table.Relative("horizon frequency, 68 solar masses, spin 0.67, Hz", spinning.Rotation, 0.67/(2*(1+root))/(2*math.Pi*seconds), 1e-12, "a/2r₊, ApJ 178, 347 (1972)")
}

// The Boltzmann surface at the frequency of the (2,2,0) mode.
func TestPhysicsBoltzmannSurface(t *testing.T) {
	table := checktable.New(t, "amplitude exp(-|k|/2T_H) of a Boltzmann surface at the (2,2,0) frequency")
	for _, b := range []struct {
		spin    float64
		surface string
	}{{0, "0.00913"}, {0.5, "0.0702"}, {0.68, "0.1415"}, {0.7, "0.1536"}, {0.9, "0.3954"}} {
		ours := math.NaN()
		for _, law := range echo(t, 68, b.spin).Laws {
			if law.Law == "boltzmann" {
				ours = law.Surface
			}
		}
		printedRow(t, table, fmt.Sprintf("spin %g", b.spin), ours, b.surface, 0, "law of arXiv:1905.00464, evaluated independently")
	}
}

// Transmissivity of the barrier for l = m = 2; below zero waves are amplified.
func TestPhysicsGreybody(t *testing.T) {
	table := checktable.New(t, "greybody factor, l = m = 2")
	omegas := []string{"0.10", "0.20", "0.30", "0.40", "0.45", "0.50", "0.55", "0.60", "0.70"}
	for _, column := range []struct {
		spin     string
		greybody []string
	}{
		{"0", []string{"3.055e-6", "8.676e-4", "5.479e-2", "0.68982", "0.92441", "0.98452", "0.99685", "0.99934", "0.99997"}},
		{"0.5", []string{"-3.618e-6", "-8.030e-5", "8.594e-4", "7.441e-2", "0.35127", "0.77168", "0.95238", "0.99126", "0.99970"}},
		{"0.7", []string{"-7.684e-6", "-2.126e-4", "-1.415e-3", "-1.281e-3", "2.444e-2", "0.19490", "0.64064", "0.92339", "0.99793"}},
		{"0.9", []string{"-1.446e-5", "-4.216e-4", "-3.048e-3", "-1.245e-2", "-2.212e-2", "-3.678e-2", "-5.609e-2", "-5.804e-2", "0.75529"}},
	} {
		var d struct {
			Points []struct {
				Greybody float64 `json:"greybody"`
			} `json:"points"`
		}
		knell(t, &d, "barrier", "--l", "2", "--m", "2", "--spin", column.spin, "--omega", strings.Join(omegas, ","))
		if len(d.Points) != len(omegas) {
			t.Fatalf("%d points, want %d", len(d.Points), len(omegas))
		}
		for i, omega := range omegas {
			printedRow(t, table, "spin "+column.spin+", Mω = "+omega, d.Points[i].Greybody, column.greybody[i], 0, "Teukolsky equation, computed independently")
		}
	}
}

// How much a surface may reflect before the ergoregion makes it unstable.
func TestPhysicsErgoregionStability(t *testing.T) {
	table := checktable.New(t, "largest superradiant gain of l = m = 2, and the largest stable reflectivity")
	const source = "Teukolsky equation, computed independently"
	const mass = 68
	for _, s := range []struct {
		spin                     float64
		where, gain, reflectance string
	}{
		{0.50, "0.2359", "0.00012", "0.99994"},
		{0.60, "0.2970", "0.00060", "0.99970"},
		{0.67, "0.3455", "0.00174", "0.99913"},
		{0.70, "0.3683", "0.00273", "0.99864"},
		{0.80, "0.4569", "0.01244", "0.99384"},
		{0.85, "0.5125", "0.02745", "0.98655"},
		{0.90, "0.5820", "0.06420", "0.96937"},
		{0.95, "0.6803", "0.17252", "0.92351"},
		{0.98, "0.7786", "0.38059", "0.85108"},
		{0.99, "0.8341", "0.55522", "0.80187"},
	} {
		d := echo(t, mass, s.spin).Stability
		name := fmt.Sprintf("spin %.2f, ", s.spin)
		printedRow(t, table, name+"gain", d.Gain, s.gain, 0, source)
		// A maximum's place is known less well than its height.
		printedRow(t, table, name+"Mω there", d.Where*2*math.Pi*mass*constants.SolarMassSeconds, s.where, 5e-5, source)
		printedRow(t, table, name+"largest stable |Rs|", d.MaxReflectivity, s.reflectance, 0, source)
	}
	for _, p := range []struct {
		spin       float64
		absorption string
	}{{0.7, "0.3"}, {0.9, "6"}} {
		reflectivity := echo(t, mass, p.spin).Stability.MaxReflectivity
		printedRow(t, table, fmt.Sprintf("spin %g, least absorption, percent", p.spin), 100*(1-reflectivity*reflectivity), p.absorption, 0, "arXiv:1807.08840")
	}
}
