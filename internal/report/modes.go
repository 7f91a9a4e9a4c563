package report

import (
	"fmt"
	"io"
)

// ModesDocument is the document of `knell modes --json`.
type ModesDocument struct {
	Modes []Mode `json:"modes"`
}

// Mode is one quasi-normal mode. Omega is M omega and decays (its imaginary part is
// negative); frequency and damping time are nil without a mass.
type Mode struct {
	L           int       `json:"l"`
	M           int       `json:"m"`
	N           int       `json:"n"`
	Spin        Number    `json:"spin"`
	Omega       [2]Number `json:"omega"`      // real and imaginary part
	Separation  [2]Number `json:"separation"` // real and imaginary part
	Frequency   *Number   `json:"frequency_hz,omitempty"`
	DampingTime *Number   `json:"damping_time_s,omitempty"`
}

// WriteJSON writes the document as indented JSON and one newline.
func (d *ModesDocument) WriteJSON(out io.Writer) error {
	return writeJSON(out, ModesDocument{notNil(d.Modes)})
}

// ModesTable writes the modes as a plain table; the columns of frequency and damping
// time appear when a mode has them.
func ModesTable(out io.Writer, d *ModesDocument) error {
	g := grid{head: []string{"l", "m", "n", "spin", "M omega", "", "separation", ""}}
	physical := false
	for _, m := range d.Modes {
		physical = physical || m.Frequency != nil || m.DampingTime != nil
	}
	if physical {
		g.head = append(g.head, "frequency (Hz)", "damping time (ms)")
	}
	for _, m := range d.Modes {
		row := []string{
			fmt.Sprint(m.L), fmt.Sprint(m.M), fmt.Sprint(m.N), fmt.Sprintf("%g", float64(m.Spin)),
			fmt.Sprintf("%.10f", float64(m.Omega[0])), fmt.Sprintf("%+.10fi", float64(m.Omega[1])),
			fmt.Sprintf("%.10f", float64(m.Separation[0])), fmt.Sprintf("%+.10fi", float64(m.Separation[1])),
		}
		if physical {
			row = append(row, optional(m.Frequency, 1, "%.4f"), optional(m.DampingTime, 1e3, "%.5f"))
		}
		g.rows = append(g.rows, row)
	}
	return g.write(out)
}

// optional shows a number times a scale, or a dash where there is none.
func optional(x *Number, scale float64, format string) string {
	if x == nil {
		return "-"
	}
	return fmt.Sprintf(format, float64(*x)*scale)
}
