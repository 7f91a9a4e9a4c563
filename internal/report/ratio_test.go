package report

import (
	"bytes"
	"strings"
	"testing"
)

// A density ratio shows beside the evidence ratio, with the sign of that, and where
// the two disagree a caution says so: combined error 0.5, so the limit is at 1.5.
func TestDensityRatioBesideTheEvidences(t *testing.T) {
	for _, tc := range []struct {
		name    string
		density DensityRatio
		value   Number
		known   bool
		caution string
		text    string
	}{
		{"agrees", DensityRatio{Nested: "horizon", Parameter: "reflectivity", Known: true, LogBayesFactor: -0.6, Error: 0.4}, 0.6, true, "",
			"by the Savage-Dickey ratio at reflectivity = 0 in surface: ln B = 0.60 ± 0.40"},
		{"disagrees", DensityRatio{Nested: "horizon", Parameter: "reflectivity", Known: true, LogBayesFactor: 0.6, Error: 0.4}, -0.6, true, "differ by 3.2 combined errors", "-0.60 ± 0.40"},
		{"in words", DensityRatio{Nested: "horizon", Parameter: "viscosity", At: 1, Note: "the posterior has 3 effective samples"}, 0, false, "", "viscosity = 1 in surface: not known"},
		{"of others", DensityRatio{Nested: "copies", Parameter: "viscosity", Known: true, LogBayesFactor: 9}, 0, false, "", ""},
	} {
		t.Run(tc.name, func(t *testing.T) {
			for _, turned := range []bool{false, true} {
				r, sign := Ratio{For: "surface", Against: "horizon", LogBayesFactor: 1, Error: 0.3}, Number(1)
				if turned {
					r, sign = Ratio{For: "horizon", Against: "surface", LogBayesFactor: -1, Error: 0.3}, -1
				}
				w := &Weighing{Ratios: []Ratio{r}, Hypotheses: []Hypothesis{{Name: "horizon"}, {Name: "surface", DensityRatios: []DensityRatio{tc.density}}}}
				list, cautions := w.ratios()
				got := list[0]
				if tc.known != (got.SavageDickey != nil) || tc.known && (*got.SavageDickey != sign*tc.value || *got.SavageDickeyError != 0.4) {
					t.Errorf("turned %v: got %+v, want %v", turned, got, sign*tc.value)
				}
				if all := strings.Join(cautions, "\n"); (tc.caution == "") != (len(cautions) == 0) || !strings.Contains(all, tc.caution) {
					t.Errorf("turned %v: cautions %q, want %q", turned, cautions, tc.caution)
				}
				if w.Ratios[0] != r || len(w.Cautions) != 0 {
					t.Error("the document itself changed")
				}
				var out bytes.Buffer
				if err := Table(&out, w); err != nil {
					t.Fatal(err)
				}
				if text := out.String(); !turned && !strings.Contains(text, tc.text) {
					t.Errorf("no %q in\n%s", tc.text, text)
				}
				// Why there is no number stands in the document, and is no doubt.
				if got.SavageDickeyNote != tc.density.Note && tc.text != "" || strings.Contains(out.String(), "Doubts") != (tc.caution != "") {
					t.Errorf("turned %v: note %q, want %q; table\n%s", turned, got.SavageDickeyNote, tc.density.Note, out.String())
				}
			}
		})
	}
}
