package models

import (
	"fmt"
	"slices"
	"strconv"
	"strings"

	"knell/models/kerr"
)

// Grid is the set of frequencies f_j = (First + j) Step, j = 0..Count-1.
type Grid struct {
	First, Count int
	Step         float64 // Hz; one over the segment's length
}

// Frequency returns f_j in Hz.
func (g Grid) Frequency(j int) float64 { return float64(g.First+j) * g.Step }

// Polarizations holds h+ and hx over a grid, in strain per hertz: four slices
// of the grid's length.
type Polarizations struct {
	PlusRe, PlusIm, CrossRe, CrossIm []float64
}

// NewPolarizations returns zeroed polarisations for n frequencies.
func NewPolarizations(n int) *Polarizations {
	return &Polarizations{
		PlusRe: make([]float64, n), PlusIm: make([]float64, n),
		CrossRe: make([]float64, n), CrossIm: make([]float64, n),
	}
}

// Parameter describes one parameter of a model, or one derived quantity.
type Parameter struct {
	Name string
	Unit string // "" for a pure number
	Note string // one line for the reader of a table
	// Low and High bound the domain in which the model is defined; a prior must
	// not reach beyond it.
	Low, High float64
	// Periodic says that Low and High are the same place.
	Periodic bool
	// Default, when HasDefault is set, is the value a parameter without a prior
	// is fixed at.
	Default    float64
	HasDefault bool
}

// Model is one hypothesis's signal.
type Model interface {
	// Parameters lists the parameters in the order of theta.
	Parameters() []Parameter
	// Fill writes the polarisations at theta. A theta inside the domain of
	// every parameter gives no error; one outside gives an error that names the
	// parameter and its domain.
	Fill(theta []float64, h *Polarizations) error
	// Derived lists the derived quantities in the order of Derive.
	Derived() []Parameter
	// Derive writes the derived quantities at theta.
	Derive(theta, out []float64) error
	// Clone returns a model that another goroutine may use.
	Clone() Model
}

// Bender is a model with parameters that the data fix only together with others,
// so that the likely region is a thin bent sheet: the echo delay fixes the offset
// only where mass and spin are given. A sampler does better in straight
// coordinates, of which the parameter is a shift that depends on the other
// parameters. A shift that wraps around moves no prior mass, so the evidence and
// the posterior stay what they are.
type Bender interface {
	// Bent lists the indices of such parameters.
	Bent() []int
	// Bend returns the shift, in the parameter's unit, from the straight
	// coordinate of parameter Bent()[i] to the parameter itself. It reads the
	// parameters that are not bent and those before i in Bent. centre is a fixed
	// point of parameter space, such as the prior's middle; the nearer it is to
	// what the data prefer, the straighter the region.
	Bend(i int, theta, centre []float64) float64
}

// Settings says which model to build and for which data.
type Settings struct {
	Model        string   // one of Names()
	Modes        []string // "l,m,n", e.g. "2,2,0"; not for burst, and optional for comb
	Reflectivity string   // cavity only: one of ReflectivityNames()
	Parity       string   // cavity only: "odd" (the default) or "even"
	// Excitation says what sets the cavity ringing: "barrier" (the default),
	// "source" or "infall"; cavity only.
	Excitation string
	// Angular chooses the angular factors: "spheroidal" (the default) or
	// "spherical".
	Angular string
	// Count of wave packets, 1 to MaxPackets; burst only.
	Count int
	Grid  Grid
	// Inclination of the remnant's spin to the line of sight, rad.
	Inclination float64
	// Start is the analysis start in seconds after the event time: the origin
	// of t in the transform, and the default of the parameter start_time.
	Start float64
	// Lead, if above zero, lets the signal rise smoothly within that many seconds
	// before its start (see lead.go), for a likelihood that marginalises over
	// them. Zero is a signal that begins with a jump.
	Lead float64
	// Length of data after the analysis start, s; echoes that would arrive
	// later are left out.
	Length float64
	// Spill is how many seconds after Length a signal may go on: it wraps around
	// to the segment's beginning, where a likelihood's gate hides that much.
	Spill float64
}

// SettingError says which setting is wrong, so that a caller can point to the
// line it came from.
type SettingError struct {
	Key, Got, Want string
}

func (e *SettingError) Error() string {
	return fmt.Sprintf("models: %s = %s, want %s", e.Key, e.Got, e.Want)
}

// constructors maps a model's name to the settings it has a use for, to what
// describes it and to what builds it. Adding a model is adding its file and its
// line here.
var constructors = []struct {
	name     string
	settings []string
	describe func(Settings) ([]Parameter, error)
	build    func(Settings) (Model, error)
}{
	{"ringdown", []string{"modes", "angular"}, describeRingdown, newRingdown},
	{"cavity", []string{"modes", "reflectivity", "parity", "excitation", "angular"}, describeCavity, newCavity},
	{"pulses", []string{"modes", "angular"}, describePulses, newPulses},
	{"comb", []string{"modes", "angular"}, describeComb, newComb},
	{"burst", []string{"count"}, describeBurst, newBurst},
}

// given lists the settings that are not left at their zero value and that not
// every model has a use for.
func (s Settings) given() []SettingError {
	var list []SettingError
	if len(s.Modes) > 0 {
		list = append(list, SettingError{Key: "modes", Got: fmt.Sprintf("%q", s.Modes)})
	}
	for _, text := range []struct{ key, value string }{
		{"reflectivity", s.Reflectivity}, {"parity", s.Parity}, {"excitation", s.Excitation}, {"angular", s.Angular},
	} {
		if text.value != "" {
			list = append(list, SettingError{Key: text.key, Got: strconv.Quote(text.value)})
		}
	}
	if s.Count != 0 {
		list = append(list, SettingError{Key: "count", Got: strconv.Itoa(s.Count)})
	}
	return list
}

// Names lists the models New knows.
func Names() []string {
	names := make([]string, len(constructors))
	for i, c := range constructors {
		names[i] = c.name
	}
	return names
}

// Describe checks the settings that name a model and returns its parameters,
// without the tables that New makes and without looking at the grid. A setting
// that a user got wrong gives a *SettingError.
func Describe(s Settings) ([]Parameter, error) {
	for _, c := range constructors {
		if c.name != s.Model {
			continue
		}
		for _, given := range s.given() {
			if !slices.Contains(c.settings, given.Key) {
				given.Want = "no such key: the model " + c.name + " takes " + strings.Join(c.settings, ", ")
				return nil, &given
			}
		}
		return c.describe(s)
	}
	return nil, &SettingError{"model", fmt.Sprintf("%q", s.Model), "one of " + strings.Join(Names(), ", ")}
}

// New builds the model that s names. A setting that a user got wrong gives a
// *SettingError; a grid without frequencies is the caller's bug and panics.
func New(s Settings) (Model, error) {
	if s.Grid.Count < 1 || s.Grid.First < 1 || !(s.Grid.Step > 0) {
		panic(fmt.Sprintf("models: grid of %d frequencies from bin %d in steps of %g Hz", s.Grid.Count, s.Grid.First, s.Grid.Step))
	}
	if _, err := Describe(s); err != nil {
		return nil, err
	}
	for _, c := range constructors {
		if c.name == s.Model {
			return c.build(s)
		}
	}
	panic("models: described but not built: " + s.Model)
}

// checkDomain returns an error that names the first parameter outside its domain.
func checkDomain(parameters []Parameter, theta []float64) error {
	for i := range parameters {
		p := &parameters[i]
		if v := theta[i]; !(v >= p.Low && v <= p.High) {
			return fmt.Errorf("models: %s = %g, want %g to %g", p.Name, v, p.Low, p.High)
		}
	}
	return nil
}

// maxStart bounds the start time, s; beyond it phases lose their last digits.
const maxStart = 1e4

// remnantParameters are common to every remnant model.
func remnantParameters(s Settings) []Parameter {
	return []Parameter{
		{Name: "mass", Unit: "solar masses", Note: "remnant mass in the detector frame", Low: 1e-3, High: 1e12},
		{Name: "spin", Note: "remnant spin, dimensionless", Low: 0, High: kerr.MaxSpin},
		startParameter(s, "where the ringdown begins, after the event time"),
	}
}

func startParameter(s Settings, note string) Parameter {
	return Parameter{Name: "start_time", Unit: "s", Note: note, Low: -maxStart, High: maxStart, Default: s.Start, HasDefault: true}
}

// checkLength panics where a model that counts arrivals is given no data.
func checkLength(s Settings) {
	if !(s.Length > 0) {
		panic(fmt.Sprintf("models: %g s of data after the analysis start", s.Length))
	}
}
