package event

import (
	"fmt"
	"strings"

	"knell/internal/report"
)

// Summary says what an event file asks for, with every default filled in.
type Summary struct {
	Event      string              `json:"event"`
	File       string              `json:"file"`
	Sound      bool                `json:"sound"`
	Sites      []report.Site       `json:"sites"`
	Analysis   report.Analysis     `json:"analysis"`
	Hypotheses []HypothesisSummary `json:"hypotheses"`
	Notes      []string            `json:"notes"`
}

// HypothesisSummary is one hypothesis with the prior of each parameter.
type HypothesisSummary struct {
	Name       string         `json:"name"`
	Model      string         `json:"model"`
	Dimensions int            `json:"dimensions"`
	Priors     []PriorSummary `json:"priors"`
}

// PriorSummary is one parameter's prior in words.
type PriorSummary struct {
	Parameter string `json:"parameter"`
	Unit      string `json:"unit"`
	Prior     string `json:"prior"`
	Periodic  bool   `json:"periodic"`
}

// Check summarises a sound event; Load has done the checking.
func (p *Prepared) Check() Summary {
	s := Summary{
		Event: p.Config.Title, File: p.Config.File, Sound: true,
		Sites: p.sites, Analysis: p.analysis(), Notes: append([]string{}, p.Notes...),
	}
	for _, h := range p.hypotheses {
		entry := HypothesisSummary{Name: h.Name, Model: h.Model, Dimensions: h.set.Dim()}
		for i, q := range h.model.Parameters() {
			prior := h.set.Prior(i)
			periodic := q.Periodic && isFullCircle(prior, q)
			entry.Priors = append(entry.Priors, PriorSummary{q.Name, q.Unit, fmt.Sprint(prior), periodic})
		}
		if h.Hypothesis.Stable {
			s.Notes = append(s.Notes, fmt.Sprintf("stable = true leaves %.1f %% of the prior of %s", 100*h.allowed.mass, h.Name))
		}
		s.Hypotheses = append(s.Hypotheses, entry)
	}
	return s
}

// Lines are the summary for a reader.
func (s Summary) Lines() []string {
	a := s.Analysis
	lines := []string{
		s.Event,
		fmt.Sprintf("analysed: %g s from %g s before the start at %+g s, %g to %g Hz, %g samples/s", a.Duration, a.Gate, a.Start, a.Band[0], a.Band[1], a.SampleRate),
	}
	for _, site := range s.Sites {
		lines = append(lines, fmt.Sprintf("site %s: %s; noise: %s; delay %+.3f ms, response %+.3f %+.3f", site.Code, site.Strain, site.Noise, 1e3*float64(site.Delay), float64(site.AntennaPlus), float64(site.AntennaCross)))
	}
	for _, h := range s.Hypotheses {
		lines = append(lines, fmt.Sprintf("hypothesis %s: %s, %d free parameters", h.Name, h.Model, h.Dimensions))
		for _, p := range h.Priors {
			wrap := ""
			if p.Periodic {
				wrap = ", periodic"
			}
			lines = append(lines, strings.TrimRight(fmt.Sprintf("  %-16s %s%s %s", p.Parameter, p.Prior, wrap, p.Unit), " "))
		}
	}
	for _, n := range s.Notes {
		lines = append(lines, "note: "+n)
	}
	return lines
}
