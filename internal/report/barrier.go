package report

import (
	"fmt"
	"io"
	"math/cmplx"
)

// BarrierDocument is the document of `knell barrier --json`: the response of one
// wave's barrier. Frequencies are M omega, with time dependence exp(-i omega t).
type BarrierDocument struct {
	L      int    `json:"l"`
	M      int    `json:"m"`
	Spin   Number `json:"spin"`
	Parity string `json:"parity"` // "odd" or "even", of which the reflection's phase depends
	// HorizonFrequency is M Omega_H: waves with 0 < omega < m Omega_H are amplified.
	HorizonFrequency Number         `json:"horizon_frequency"`
	Mass             *Number        `json:"mass,omitempty"` // solar masses
	Points           []BarrierPoint `json:"points"`
}

// BarrierPoint is the response at one frequency, with flux-normalised amplitudes: a
// wave that comes from the horizon side is reflected by Reflection and let through by
// Transmission, and |R|^2 + (omega/k) |T|^2 = 1.
type BarrierPoint struct {
	Omega        Number    `json:"omega"`
	Frequency    *Number   `json:"frequency_hz,omitempty"` // nil without a mass
	Wave         Number    `json:"k"`                      // omega - m Omega_H, times M
	Reflection   [2]Number `json:"reflection"`             // real and imaginary part
	Transmission [2]Number `json:"transmission"`
	Greybody     Number    `json:"greybody"`   // 1 - |R|^2, below zero where waves are amplified
	Separation   Number    `json:"separation"` // A for spin weight -2
	// FromInfinity is the answer to a wave that comes from far away.
	FromInfinity *Scattering `json:"from_infinity,omitempty"`
}

// Scattering is a pair of amplitudes, each a real and an imaginary part.
type Scattering struct {
	Reflection   [2]Number `json:"reflection"`
	Transmission [2]Number `json:"transmission"`
}

// Pair splits a complex number for a document.
func Pair(z complex128) [2]Number { return [2]Number{Number(real(z)), Number(imag(z))} }

func joined(pair [2]Number) complex128 { return complex(float64(pair[0]), float64(pair[1])) }

// WriteJSON writes the document as indented JSON and one newline.
func (d *BarrierDocument) WriteJSON(out io.Writer) error {
	document := *d
	document.Points = notNil(d.Points)
	return writeJSON(out, document)
}

// BarrierTable writes the document as a plain table; a column of frequencies in hertz
// appears when the points have them.
func BarrierTable(out io.Writer, d *BarrierDocument) error {
	if _, err := fmt.Fprintln(out, barrierTitle(d)); err != nil {
		return err
	}
	g := grid{head: []string{"M omega"}}
	physical := false
	for _, p := range d.Points {
		physical = physical || p.Frequency != nil
	}
	if physical {
		g.head = append(g.head, "frequency (Hz)")
	}
	g.head = append(g.head, "reflection", "", "transmission", "", "|R|^2", "greybody", "separation")
	for _, p := range d.Points {
		row := []string{fmt.Sprintf("%g", float64(p.Omega))}
		if physical {
			row = append(row, optional(p.Frequency, 1, "%.4f"))
		}
		size := cmplx.Abs(joined(p.Reflection))
		g.rows = append(g.rows, append(row,
			fmt.Sprintf("%.9e", float64(p.Reflection[0])), fmt.Sprintf("%+.9ei", float64(p.Reflection[1])),
			fmt.Sprintf("%.6e", float64(p.Transmission[0])), fmt.Sprintf("%+.6ei", float64(p.Transmission[1])),
			fmt.Sprintf("%.8f", size*size), fmt.Sprintf("%.8e", float64(p.Greybody)),
			fmt.Sprintf("%.8f", float64(p.Separation))))
	}
	return g.write(out)
}

// barrierTitle says whose response it is.
func barrierTitle(d *BarrierDocument) string {
	return fmt.Sprintf("Barrier for waves from the horizon side: l = %d, m = %d, spin %g, %s parity", d.L, d.M, float64(d.Spin), d.Parity)
}
