package main

import (
	"encoding/json"
	"io"
)

// document is what --json prints. A number that is not known is null.
type document struct {
	Seed        uint64  `json:"seed"`
	LivePoints  int     `json:"live_points"`
	Samples     float64 `json:"effective_samples"`
	Share       float64 `json:"error_share"`
	Interrupted bool    `json:"interrupted"`
	Problems    []row   `json:"problems"`
}

func writeDocument(out io.Writer, o options, rows []row, interrupted bool) error {
	e := json.NewEncoder(out)
	e.SetIndent("", "  ")
	return e.Encode(document{o.seed, o.live, o.samples, o.share, interrupted, rows})
}
