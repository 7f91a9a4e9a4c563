package main

import (
	"encoding/json"
	"io"
)

// document is what --json prints.
type document struct {
	Seed           uint64          `json:"seed"`
	Nats           float64         `json:"nats"`
	Own            float64         `json:"own"`
	Share          int             `json:"batch_share"`
	InFlight       int             `json:"in_flight"`
	FormerShare    int             `json:"former_batch_share"`
	FormerInFlight int             `json:"former_in_flight"`
	Enough         float64         `json:"efficiency_wanted"`
	Efficiency     []efficiencyRow `json:"efficiency"`
	OneThreshold   []thresholdRow  `json:"one_threshold"`
	LivePoints     []liveRow       `json:"live_points"`

	options options
}

// setting is what a row is for.
type setting struct {
	Workers   int    `json:"workers"`
	Calls     int    `json:"calls"` // mean calls of a slot
	Drawing   string `json:"drawing"`
	CallTimes string `json:"call_times"`

	slot slot
}

// efficiencyRow is the efficiency of the sampler's schedule and of its former one,
// with standard errors.
type efficiencyRow struct {
	setting
	Live        int     `json:"live_points"`
	Efficiency  float64 `json:"efficiency"`
	Error       float64 `json:"error"`
	Former      float64 `json:"former"`
	FormerError float64 `json:"former_error"`
}

// thresholdRow is the efficiency of proposals at one threshold, by the law and as
// played.
type thresholdRow struct {
	Live    int     `json:"live_points"`
	Workers int     `json:"workers"`
	Law     float64 `json:"law"`
	Played  float64 `json:"played"`
}

// liveRow is the least live points for the efficiency wanted, 0 if none was found.
type liveRow struct {
	setting
	Live int `json:"live_points"`
}

func writeDocument(out io.Writer, d *document) error {
	e := json.NewEncoder(out)
	e.SetIndent("", "  ")
	return e.Encode(d)
}
