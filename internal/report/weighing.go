package report

import (
	"bytes"
	"encoding/json"
	"io"
)

// Weighing is the document of `knell weigh --json` and of evidence.json: the
// evidences of one event's hypotheses and their ratios. Logarithms are natural, in
// nats; fields may be added, never renamed.
type Weighing struct {
	Event   string `json:"event"`
	Seed    uint64 `json:"seed"`
	Version string `json:"version"`
	// GoVersion and Platform are what the program was built with and for: bits
	// are promised for equal ones.
	GoVersion string `json:"go_version"`
	Platform  string `json:"platform"`
	// Partial says that the run was interrupted and its numbers are not final.
	Partial bool `json:"partial"`
	// LogEvidenceNoise is the log-likelihood of noise alone.
	LogEvidenceNoise Number       `json:"log_evidence_noise"`
	Hypotheses       []Hypothesis `json:"hypotheses"`
	Ratios           []Ratio      `json:"ratios"`
	Sites            []Site       `json:"sites"`
	Analysis         Analysis     `json:"analysis"`
	// Cautions are this run's own doubts, each one sentence.
	Cautions []string `json:"cautions"`
	// OddsConvention and Reading say how to read any such document. WriteJSON fills
	// them.
	OddsConvention string   `json:"odds_convention"`
	Reading        []string `json:"reading"`
}

// Hypothesis is what the run found of one hypothesis.
type Hypothesis struct {
	Name             string   `json:"name"`
	Model            string   `json:"model"`
	LogEvidence      Number   `json:"log_evidence"`
	LogEvidenceError Number   `json:"log_evidence_error"`
	LogEvidenceOver  Number   `json:"log_evidence_over_noise"`
	Calls            int64    `json:"calls"` // likelihood calls
	Seconds          Number   `json:"seconds"`
	Verdict          string   `json:"verdict"`   // whether the number can be trusted, in a few words
	Posterior        string   `json:"posterior"` // name of the CSV file beside evidence.json
	Dimensions       int      `json:"dimensions"`
	LivePoints       int      `json:"live_points"`
	Information      Number   `json:"information"` // nat
	EffectiveSamples Number   `json:"effective_samples"`
	InsertionRankP   Number   `json:"insertion_rank_p"`
	Status           string   `json:"status"` // why the run stopped
	Partial          bool     `json:"partial"`
	MaxLogLikelihood Number   `json:"max_log_likelihood_over_noise"`
	Warnings         []string `json:"warnings"`
	// Routes are further ways to the same evidence; none for a partial run.
	Routes []Route `json:"routes"`
	// Phases are the run's ways of drawing, with what each cost.
	Phases     []Phase `json:"phases"`
	Efficiency Number  `json:"efficiency"` // points drawn per likelihood call, 1 for an ideal sampler
	// InsertionRankBlockP is the insertion-rank test of the worst stretch of the
	// run, corrected for their number.
	InsertionRankBlockP Number `json:"insertion_rank_block_p"`
	// Modes are the parts that the posterior came apart into, those of more evidence
	// first; none where it is in one piece.
	Modes []PosteriorMode `json:"modes"`
	// DensityRatios are the Bayes factors of hypotheses nested in this one; the
	// document has them among the ratios.
	DensityRatios []DensityRatio `json:"-"`
	// BootstrapError is the error of the log-evidence found by drawing strands of
	// the run anew, beside log_evidence_error, which simulates its shrinkages.
	BootstrapError Number `json:"bootstrap_error"`
	// ErrorTension is the logarithm of bootstrap_error over log_evidence_error, in its
	// own standard errors.
	ErrorTension Number `json:"error_tension"`
	// StablePrior is the share of the prior that the switch "stable" left, 1
	// without it; the evidence is that of the prior normalised over this share.
	StablePrior Number `json:"stable_prior"`
	// UnstablePosterior is the posterior probability of points at which echoes
	// grow.
	UnstablePosterior Number             `json:"unstable_posterior"`
	Summary           []ParameterSummary `json:"summary"`
}

// Route is the same evidence found another way from the finished run.
type Route struct {
	Name             string `json:"name"` // bridge or importance
	LogEvidenceOver  Number `json:"log_evidence_over_noise"`
	Error            Number `json:"error"`
	EffectiveSamples Number `json:"effective_samples"`
	Calls            int64  `json:"calls"`
}

// Phase is one way in which the run drew points.
type Phase struct {
	Name       string `json:"name"`   // prior, ellipsoids or slices
	Calls      int64  `json:"calls"`  // likelihood calls
	Points     int64  `json:"points"` // points they gave
	Efficiency Number `json:"efficiency"`
	// The insertion-rank tests of its points alone, of so many ranks.
	Ranks               int64  `json:"ranks"`
	InsertionRankP      Number `json:"insertion_rank_p"`
	InsertionRankBlockP Number `json:"insertion_rank_block_p"`
}

// PosteriorMode is a part of a posterior that is separate from the rest.
type PosteriorMode struct {
	LogEvidenceOver  Number             `json:"log_evidence_over_noise"` // of its region alone
	Error            Number             `json:"error"`
	Share            Number             `json:"share"` // of the posterior
	ShareError       Number             `json:"share_error"`
	Points           int                `json:"points"`
	MaxLogLikelihood Number             `json:"max_log_likelihood_over_noise"`
	Parameters       []ParameterSummary `json:"parameters"` // the free ones, within the mode
}

// ParameterSummary is the median of one posterior column and the ends of its
// central 90 % interval, in the unit.
type ParameterSummary struct {
	Parameter string `json:"parameter"`
	Unit      string `json:"unit"` // empty for a pure number
	Median    Number `json:"median"`
	Low90     Number `json:"low90"`
	High90    Number `json:"high90"`
}

// Site is what the run used of one site.
type Site struct {
	Code         string `json:"code"`
	Strain       string `json:"strain"` // the file, or what it was made from
	Noise        string `json:"noise"`  // where the noise spectrum came from
	Delay        Number `json:"delay_s"`
	AntennaPlus  Number `json:"antenna_plus"`
	AntennaCross Number `json:"antenna_cross"`
}

// Analysis is the stretch of data that the run looked at.
type Analysis struct {
	Time       Number    `json:"time_gps"` // the event's, at the geocentre
	Start      Number    `json:"start_s"`  // first analysed moment, after the event's time
	SampleRate Number    `json:"sample_rate_hz"`
	Duration   Number    `json:"duration_s"`
	Band       [2]Number `json:"band_hz"`
	Gate       Number    `json:"gate_s"` // length of the data marginalised over
}

// oddsConvention says how the ratios are signed.
const oddsConvention = "log_bayes_factor = log_evidence(for) - log_evidence(against), natural logarithm; " +
	"positive favours the hypothesis named in for"

// reading holds what every evidence ratio's reader should know.
var reading = [...]string{
	"an evidence ratio compares hypotheses together with their priors: a wider prior on a parameter " +
		"that the data do not need lowers the evidence of the hypothesis that has it",
	"it is not the probability of a hypothesis, which also needs the odds held before the data",
	"the error covers the sampling only, not the model, the noise spectrum or the calibration",
	"a claim needs a background: the same ratio on stretches of data with no event in them",
}

// WriteJSON writes the document as indented JSON and one newline. Lists are never
// null, and a Number that is not finite is.
func (w *Weighing) WriteJSON(out io.Writer) error {
	document := *w
	document.OddsConvention, document.Reading = oddsConvention, reading[:]
	document.Hypotheses = make([]Hypothesis, len(w.Hypotheses))
	for i, h := range w.Hypotheses {
		h.Warnings = notNil(h.Warnings)
		h.Routes = notNil(h.Routes)
		h.Phases = notNil(h.Phases)
		h.Modes = notNil(h.Modes)
		h.Summary = notNil(h.Summary)
		document.Hypotheses[i] = h
	}
	ratios, cautions := w.ratios()
	document.Ratios = notNil(ratios)
	document.Sites = notNil(w.Sites)
	document.Cautions = notNil(cautions)
	return writeJSON(out, document)
}

// writeJSON writes any document of this package; nothing reaches out if it cannot
// be encoded.
func writeJSON(out io.Writer, document any) error {
	var text bytes.Buffer
	encoder := json.NewEncoder(&text)
	encoder.SetEscapeHTML(false)
	encoder.SetIndent("", "  ")
	if err := encoder.Encode(document); err != nil {
		return err
	}
	_, err := out.Write(text.Bytes())
	return err
}

func notNil[T any](list []T) []T {
	if list == nil {
		return []T{}
	}
	return list
}
