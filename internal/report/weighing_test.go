package report

import (
	"bytes"
	"encoding/json"
	"math"
	"strings"
	"testing"
)

func TestWeighingJSON(t *testing.T) {
	var out bytes.Buffer
	w := someWeighing()
	if err := w.WriteJSON(&out); err != nil {
		t.Fatal(err)
	}
	golden(t, "weighing.json", out.Bytes())
	if w.Reading != nil || w.Hypotheses[0].Warnings != nil {
		t.Error("WriteJSON changed its receiver")
	}
	var back Weighing
	if err := json.Unmarshal(out.Bytes(), &back); err != nil {
		t.Fatal(err)
	}
	if !math.IsNaN(float64(back.Hypotheses[1].InsertionRankP)) || back.Hypotheses[1].LogEvidence != 123565.8 {
		t.Errorf("read back: %+v", back.Hypotheses[1])
	}
}

// TestWeighingFields pins the names that other programs rely on.
func TestWeighingFields(t *testing.T) {
	var out bytes.Buffer
	if err := someWeighing().WriteJSON(&out); err != nil {
		t.Fatal(err)
	}
	var document map[string]any
	if err := json.Unmarshal(out.Bytes(), &document); err != nil {
		t.Fatal(err)
	}
	has := func(where string, object any, keys string) {
		t.Helper()
		for _, key := range strings.Fields(keys) {
			if _, ok := object.(map[string]any)[key]; !ok {
				t.Errorf("%s lacks %q", where, key)
			}
		}
	}
	has("document", document, "event seed version hypotheses ratios partial log_evidence_noise cautions sites analysis odds_convention")
	has("hypothesis", document["hypotheses"].([]any)[0], "name log_evidence log_evidence_error log_evidence_over_noise calls seconds "+
		"verdict posterior model dimensions live_points information effective_samples insertion_rank_p status partial warnings summary "+
		"max_log_likelihood_over_noise")
	has("ratio", document["ratios"].([]any)[0], "for against log_bayes_factor error")
}

func TestJSONNeverHoldsNaN(t *testing.T) {
	nan, inf := Number(math.NaN()), Number(math.Inf(-1))
	w := &Weighing{
		LogEvidenceNoise: inf,
		Hypotheses:       []Hypothesis{{LogEvidence: nan, Seconds: inf, Summary: []ParameterSummary{{Median: nan}}}},
		Ratios:           []Ratio{{LogBayesFactor: nan, Error: nan}},
		Analysis:         Analysis{Band: [2]Number{nan, inf}},
	}
	var out bytes.Buffer
	if err := w.WriteJSON(&out); err != nil {
		t.Fatal(err)
	}
	if !json.Valid(out.Bytes()) || strings.Contains(out.String(), "NaN") || strings.Contains(out.String(), "Inf") {
		t.Errorf("not plain JSON:\n%s", out.String())
	}
	out.Reset()
	if err := new(Weighing).WriteJSON(&out); err != nil {
		t.Fatal(err)
	}
	if strings.Contains(out.String(), "null") {
		t.Errorf("an empty document holds null:\n%s", out.String())
	}
}
