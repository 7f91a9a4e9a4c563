package report

import (
	"bytes"
	"flag"
	"math"
	"os"
	"path/filepath"
	"testing"
)

var update = flag.Bool("update", false, "rewrite the golden files")

// golden compares got with a file of testdata.
func golden(t *testing.T, name string, got []byte) {
	t.Helper()
	path := filepath.Join("testdata", name)
	if *update {
		if err := os.WriteFile(path, got, 0o644); err != nil {
			t.Fatal(err)
		}
	}
	want, err := os.ReadFile(path)
	if err != nil {
		t.Fatal(err)
	}
	if !bytes.Equal(got, want) {
		t.Errorf("%s differs (rewrite with -update and read the change); got:\n%s", path, got)
	}
}

// someWeighing is an invented result.
func someWeighing() *Weighing {
	return &Weighing{
		Event: "Marram Point, loud remnant", Seed: 20260, Version: "0.0-test",
		LogEvidenceNoise: 123456.78125,
		Hypotheses: []Hypothesis{
			{
				Name: "horizon", Model: "ringdown", LogEvidence: 123556.0, LogEvidenceError: 0.104,
				LogEvidenceOver: 99.21875, Calls: 1234567, Seconds: 31.25, Routes: []Route{
					{Name: "bridge", LogEvidenceOver: 99.2, Error: 0.004, EffectiveSamples: 1874, Calls: 2000},
					{Name: "importance", LogEvidenceOver: 99.23, Error: 0.007, EffectiveSamples: 1671, Calls: 2000},
				}, BootstrapError: 0.09,
				Verdict:    "sound",
				Dimensions: 4, LivePoints: 1000, Information: 11.5, EffectiveSamples: 4300,
				InsertionRankP: 0.43, Status: "remaining evidence below the limit", MaxLogLikelihood: 112.5,
				Summary: []ParameterSummary{
					{"mass", "solar masses", 68.23, 64.11, 72.92},
					{"spin", "", 0.6912, 0.6123, 0.7456},
					{"amplitude", "", 1.234e-21, 1.1e-21, 1.4e-21},
				},
			},
			{
				Name: "surface", Model: "cavity", LogEvidence: 123565.8, LogEvidenceError: 0.11,
				LogEvidenceOver: 109.01875, Calls: 2345678, Seconds: 48.5, Verdict: "doubtful",
				Posterior:  "posterior-surface.csv",
				Dimensions: 7, LivePoints: 1000, Information: 17.25, EffectiveSamples: 5100,
				InsertionRankP: Number(math.NaN()), Status: "remaining evidence below the limit", MaxLogLikelihood: 130.5,
				Phases: []Phase{
					{Name: "prior", Calls: 3000, Points: 1500, Efficiency: 0.5, Ranks: 500, InsertionRankP: 0.3, InsertionRankBlockP: 0.25},
					{Name: "ellipsoids", Calls: 2342678, Points: 23000, Efficiency: 0.0098, Ranks: 23000, InsertionRankP: Number(math.NaN()), InsertionRankBlockP: 0.5},
				}, Efficiency: 0.0104,
				Modes: []PosteriorMode{
					{LogEvidenceOver: 108.8, Error: 0.12, Share: 0.8037, ShareError: 0.021, Points: 15000, MaxLogLikelihood: 130.5,
						Parameters: []ParameterSummary{{"mass", "solar masses", 68.41, 64.35, 73.08}, {"offset", "dex", 3.2, 3.1, 3.3}}},
					{LogEvidenceOver: 107.39, Error: 0.19, Share: 0.1963, ShareError: 0.021, Points: 9500, MaxLogLikelihood: 127.25,
						Parameters: []ParameterSummary{{"mass", "solar masses", 69.02, 64.22, 73.91}, {"offset", "dex", 9.4, 8.1, 11.1}}},
				},
				DensityRatios: []DensityRatio{{Nested: "horizon", Parameter: "reflectivity", At: 0, Known: true, LogBayesFactor: -9.6, Error: 0.3}},
				Warnings:      []string{"insertion ranks are not uniform (p = 0.0004)"},
				Summary: []ParameterSummary{
					{"mass", "solar masses", 68.41, 64.35, 73.08},
					{"spin", "", 0.6921, 0.6112, 0.7468},
					{"offset", "dex", 3.2, -0.7, 11.1},
					{"echo_delay", "s", 0.28612, 0.28598, 0.28631},
				},
			},
		},
		Ratios: []Ratio{
			{For: "surface", Against: "horizon", LogBayesFactor: 9.8, Error: 0.151},
			{For: "horizon", Against: "surface", LogBayesFactor: -9.8, Error: 0.151},
			{For: "horizon", Against: "noise", LogBayesFactor: 99.21875, Error: 0.104},
		},
		Sites: []Site{{"H1", "marram-h1.hdf5", "median of 4 s segments", -0.0061, 0.43, -0.31}},
		Analysis: Analysis{Time: 1400000123.25, Start: 0.003, SampleRate: 2048, Duration: 4,
			Band: [2]Number{30, 900}, Gate: 0.5},
		Cautions: []string{"the noise spectrum was estimated from 12 segments only"},
	}
}

func somePosterior() Posterior {
	return Posterior{
		Name:    "surface",
		Columns: []string{"spin", "mass", "echo delay, first", "log_likelihood"}, // not sorted; a comma
		Units:   []string{"", "solar masses", "s", "nat"},
		Values: [][]float64{
			{0.1, 0.69, math.Nextafter(0.69, 1)},
			{68, math.Pi, 1e-310},
			{0.28612, math.NaN(), math.Inf(1)},
			{-1e300, 0, math.Copysign(0, -1)},
		},
	}
}
