// Package event turns one event file into a weighed result.
//
// The road of the data:
//
//  1. Decode reads the TOML into a Config and checks every key; an error names
//     file, line, key, what was found and what would be accepted.
//  2. Load reads or makes each site's strain (data.go, synthetic.go), estimates
//     the noise, cuts the segment with its gate and prepares the likelihood; it
//     builds each hypothesis from a model and its priors (hypothesis.go).
//  3. Weigh samples the hypotheses one after another and compares them
//     (weigh.go, posterior.go).
//
// It writes nothing: report writes what Weigh returns.
package event
