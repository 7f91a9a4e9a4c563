package report

import (
	"fmt"
	"io"
	"strings"
)

// EchoDocument is the document of `knell echo --json`: the cavity between a surface
// and the barrier, and its echoes. Lengths and times without a unit in their name are
// in units of the mass.
type EchoDocument struct {
	Mass   Number `json:"mass"` // solar masses, detector frame
	Spin   Number `json:"spin"`
	L      int    `json:"l"`
	M      int    `json:"m"`
	N      int    `json:"n"`
	Parity string `json:"parity"`

	Offset         Number `json:"offset"`            // log10 of the proper distance in Planck lengths
	ProperDistance Number `json:"proper_distance_m"` // along the axis
	LogGap         Number `json:"log10_gap"`         // log10(r0/r+ - 1)

	HorizonFrequency  Number `json:"horizon_frequency_hz"` // Omega_H / 2 pi
	AmplifiedBelow    Number `json:"amplified_below_hz"`   // m Omega_H / 2 pi
	Temperature       Number `json:"temperature_hz"`       // k_B T_H / h
	TemperatureKelvin Number `json:"temperature_kelvin"`
	HorizonRadius     Number `json:"horizon_radius"`
	LightRing         Number `json:"light_ring"`            // prograde
	Retrograde        Number `json:"retrograde_light_ring"` //
	BarrierTortoise   Number `json:"barrier_tortoise"`      // r* of the prograde light ring
	SurfaceTortoise   Number `json:"surface_tortoise"`      // r* of the surface
	EchoDelay         Number `json:"echo_delay_s"`          // 2 (r*_barrier - r*_surface)
	ModeSpacing       Number `json:"mode_spacing_hz"`       // 1 / echo delay
	// The same two from the slope of the round trip's phase at the mode's frequency.
	DelayAtMode   Number `json:"echo_delay_at_mode_s"`
	SpacingAtMode Number `json:"mode_spacing_at_mode_hz"`

	Mode      EchoMode      `json:"mode"`
	Stability EchoStability `json:"stability"`
	Laws      []EchoLaw     `json:"laws"`
}

// EchoMode is the mode at whose real frequency amplitudes are stated.
type EchoMode struct {
	Omega       [2]Number `json:"omega"` // M omega
	Frequency   Number    `json:"frequency_hz"`
	DampingTime Number    `json:"damping_time_s"`
	Reflection  [2]Number `json:"reflection"` // R of the barrier there
	Magnitude   Number    `json:"barrier"`    // |R|
}

// EchoStability says what the amplification of waves in the ergoregion allows, for
// waves of this l and m alone: those of l = m = 2 are amplified most.
type EchoStability struct {
	Gain            Number `json:"gain"`             // largest |R|^2 - 1
	GainFrequency   Number `json:"gain_hz"`          // where; 0 if there is none
	MaxReflectivity Number `json:"max_reflectivity"` // the largest stable constant one, by amplitude
}

// EchoLaw is one reflectivity law of the surface.
type EchoLaw struct {
	Law        string          `json:"law"`
	Parameters []EchoParameter `json:"parameters"`
	Surface    Number          `json:"surface"` // |Rs| at the mode's frequency
	Ratio      Number          `json:"ratio"`   // |q| = |R Rs|: one echo's amplitude over that of the one before
	Flux       Number          `json:"flux"`    // |q|^2
	// Echoes are the amplitudes of the first echoes over the ringdown's, |q|^n.
	Echoes []Number `json:"echoes"`
	// LargestRatio is the largest |q| in the band of amplified waves. Up to 1 no cavity
	// mode can grow, and Stable is set.
	LargestRatio Number `json:"largest_ratio"`
	Stable       bool   `json:"stable"`
	// GrowthTime is the e-folding time of the fastest growing cavity mode; nil if none
	// grows, or if Note says why it is not known.
	GrowthTime *Number `json:"growth_time_s"`
	Note       string  `json:"note,omitempty"`
}

// EchoParameter is one parameter of a law and its value.
type EchoParameter struct {
	Name  string `json:"name"`
	Value Number `json:"value"`
}

// label names a law and its parameters.
func (l *EchoLaw) label() string {
	if len(l.Parameters) == 0 {
		return l.Law
	}
	return l.Law + ": " + l.values()
}

func (l *EchoLaw) values() string {
	parts := make([]string, len(l.Parameters))
	for i, p := range l.Parameters {
		parts[i] = fmt.Sprintf("%s %.6g", p.Name, float64(p.Value))
	}
	return strings.Join(parts, ", ")
}

// WriteJSON writes the document as indented JSON and one newline.
func (d *EchoDocument) WriteJSON(out io.Writer) error {
	document := *d
	document.Laws = notNil(append([]EchoLaw(nil), d.Laws...))
	for i := range document.Laws {
		l := &document.Laws[i]
		l.Parameters, l.Echoes = notNil(l.Parameters), notNil(l.Echoes)
	}
	return writeJSON(out, document)
}

// EchoTable writes the document for a reader: the cavity's quantities, then a line
// for each law.
func EchoTable(out io.Writer, d *EchoDocument) error {
	if _, err := fmt.Fprintf(out, "%s\n\n", echoTitle(d)); err != nil {
		return err
	}
	g := grid{head: []string{"quantity", "value", "unit"}, left: 1, last: true}
	add := func(name, format string, x Number, unit string) {
		g.rows = append(g.rows, []string{name, fmt.Sprintf(format, float64(x)), unit})
	}
	mode := fmt.Sprintf("mode (%d,%d,%d)", d.L, d.M, d.N)
	add("horizon frequency, Omega_H / 2 pi", "%.6f", d.HorizonFrequency, "Hz")
	add(fmt.Sprintf("edge of the amplified band, %d Omega_H / 2 pi", d.M), "%.6f", d.AmplifiedBelow, "Hz")
	add("Hawking temperature, k_B T_H / h", "%.6f", d.Temperature, "Hz")
	add("Hawking temperature", "%.6e", d.TemperatureKelvin, "K")
	add("horizon radius", "%.9f", d.HorizonRadius, "M")
	add("light ring, prograde", "%.9f", d.LightRing, "M")
	add("light ring, retrograde", "%.9f", d.Retrograde, "M")
	add("proper distance of the surface", "%.6e", d.ProperDistance, "m")
	add("log10(r0/r+ - 1) of the surface", "%.6f", d.LogGap, "")
	add("tortoise coordinate of the surface", "%.6f", d.SurfaceTortoise, "M")
	add("tortoise coordinate of the barrier", "%.6f", d.BarrierTortoise, "M")
	add("echo delay", "%.9f", d.EchoDelay, "s")
	add("cavity mode spacing, 1 / echo delay", "%.6f", d.ModeSpacing, "Hz")
	add("echo delay at the mode's frequency, by phase", "%.9f", d.DelayAtMode, "s")
	add("cavity mode spacing there", "%.6f", d.SpacingAtMode, "Hz")
	add(mode+" frequency", "%.6f", d.Mode.Frequency, "Hz")
	add(mode+" damping time", "%.6f", 1e3*d.Mode.DampingTime, "ms")
	add("barrier's |R| at that frequency", "%.9f", d.Mode.Magnitude, "")
	wave := fmt.Sprintf("(%d,%d)", d.L, d.M)
	add("largest amplification of "+wave+", |R|^2 - 1", "%.6e", d.Stability.Gain, "")
	add("largest stable constant reflectivity, "+wave, "%.9f", d.Stability.MaxReflectivity, "")
	if err := g.write(out); err != nil {
		return err
	}
	if _, err := fmt.Fprintf(out, "\nEchoes at the real frequency of %s, amplitudes over that of the ringdown\n\n", mode); err != nil {
		return err
	}
	laws := grid{head: []string{"law", "surface |Rs|", "per echo |q|", "flux |q|^2"}, left: 1, last: true}
	shown := 0
	for _, l := range d.Laws {
		shown = max(shown, min(len(l.Echoes), tableEchoes))
	}
	// The first echo is |q| itself.
	for n := 2; n <= shown; n++ {
		laws.head = append(laws.head, fmt.Sprintf("echo %d", n))
	}
	laws.head = append(laws.head, "e-folding (s)", "parameters")
	for i := range d.Laws {
		l := &d.Laws[i]
		row := []string{l.Law, fmt.Sprintf("%.6f", float64(l.Surface)), fmt.Sprintf("%.6f", float64(l.Ratio)), fmt.Sprintf("%.6f", float64(l.Flux))}
		for n := 2; n <= shown; n++ {
			cell := "-"
			if n <= len(l.Echoes) {
				cell = fmt.Sprintf("%.2e", float64(l.Echoes[n-1]))
			}
			row = append(row, cell)
		}
		growth := "stable"
		if !l.Stable {
			growth = optional(l.GrowthTime, 1, "%.4g")
		}
		laws.rows = append(laws.rows, append(row, growth, l.values()))
	}
	if err := laws.write(out); err != nil {
		return err
	}
	for i := range d.Laws {
		if l := &d.Laws[i]; l.Note != "" {
			if _, err := fmt.Fprintf(out, "\n%s (%s): %s\n", l.Law, l.values(), l.Note); err != nil {
				return err
			}
		}
	}
	return nil
}

// tableEchoes is how many echoes a table has room for.
const tableEchoes = 4

// echoTitle says whose echoes these are.
func echoTitle(d *EchoDocument) string {
	return fmt.Sprintf("Cavity of a remnant of %.6g solar masses, spin %g: surface at offset %.6g (log10 of Planck lengths), l = %d, m = %d, %s parity",
		float64(d.Mass), float64(d.Spin), float64(d.Offset), d.L, d.M, d.Parity)
}
