package report

import (
	"fmt"
	"math"
	"slices"
)

// Ratio is the Bayes factor of one hypothesis over another.
type Ratio struct {
	For            string `json:"for"`
	Against        string `json:"against"`
	LogBayesFactor Number `json:"log_bayes_factor"`
	Error          Number `json:"error"`
	// Where one of the two is nested in the other, the same by the density of the
	// posterior at the point at which they are one, or in the note why there is no
	// number.
	SavageDickey      *Number `json:"savage_dickey,omitempty"`
	SavageDickeyError *Number `json:"savage_dickey_error,omitempty"`
	SavageDickeyAt    string  `json:"savage_dickey_at,omitempty"` // such as "reflectivity = 0 in surface"
	SavageDickeyNote  string  `json:"savage_dickey_note,omitempty"`
}

// DensityRatio is the Bayes factor of a hypothesis nested in the one that has it, by
// the Savage-Dickey ratio.
type DensityRatio struct {
	Nested         string // the nested hypothesis
	Parameter      string // that makes the one the other
	At             Number // where
	Known          bool   // whether there is a number
	LogBayesFactor Number // of the nested over the full one, nats
	Error          Number
	Note           string // why there is no number, or what it is in doubt of
}

// agreeing is how many combined errors two ways to one ratio may differ by.
const agreeing = 3

// ratios returns the ratios with what the density ratios say of them, and the
// cautions with one for each that disagrees.
func (w *Weighing) ratios() ([]Ratio, []string) {
	list, cautions := slices.Clone(w.Ratios), slices.Clone(w.Cautions)
	for i := range list {
		r := &list[i]
		for _, full := range w.Hypotheses {
			for _, d := range full.DensityRatios {
				sign := Number(0)
				switch {
				case full.Name == r.Against && d.Nested == r.For:
					sign = 1
				case full.Name == r.For && d.Nested == r.Against:
					sign = -1
				default:
					continue
				}
				r.SavageDickeyAt = fmt.Sprintf("%s = %g in %s", d.Parameter, float64(d.At), full.Name)
				r.SavageDickeyNote = d.Note
				if !d.Known {
					continue
				}
				value, e := sign*d.LogBayesFactor, d.Error
				r.SavageDickey, r.SavageDickeyError = &value, &e
				gap, combined := math.Abs(float64(value-r.LogBayesFactor)), math.Hypot(float64(e), float64(r.Error))
				if !(gap <= agreeing*combined) {
					cautions = append(cautions, fmt.Sprintf("ln B of %s over %s is %s by the Savage-Dickey ratio at %s and %s from the evidences: they differ by %.1f combined errors",
						r.For, r.Against, withError(value, e), r.SavageDickeyAt, withError(r.LogBayesFactor, r.Error), gap/combined))
				}
			}
		}
	}
	return list, cautions
}
