package models

import (
	"math"
	"strconv"
)

// excitation says what sets the cavity ringing.
//
//   - barrier: the wave that falls in from the barrier as the ringdown leaves
//     it outwards; h = h_H (1 + q + ... + q^N).
//   - source: a source at x_s in the cavity (excitation_source.go),
//     h = h_H (1 + Rs exp(-2 i k (x0 - x_s))) (1 + q + ...).
//   - infall: besides the ringdown, which has no echoes then, a pulse of its own
//     shape that falls through the barrier (excitation_infall.go),
//     h = h_H + K z, K = T Rs exp(-2 i k x0) (1 + q + ...).
//
// Every sum ends with what arrives within the data.
type excitation int

const (
	fromBarrier excitation = iota
	fromSource
	fromInfall
)

func parseExcitation(name string) (excitation, error) {
	switch name {
	case "", "barrier":
		return fromBarrier, nil
	case "source":
		return fromSource, nil
	case "infall":
		return fromInfall, nil
	}
	return fromBarrier, &SettingError{"excitation", strconv.Quote(name), `"barrier", "source" or "infall"`}
}

// parameters are those that the excitation adds to a cavity's.
func (e excitation) parameters() []Parameter {
	switch e {
	case fromSource:
		return []Parameter{
			{Name: "source_depth", Note: "where the source is, as a share of the tortoise distance from the light ring (0) to the surface (1)", Low: 0, High: 1},
		}
	case fromInfall:
		return []Parameter{
			{Name: "infall_amplitude", Note: "strain amplitude that the infalling pulse would have if surface and barrier let all of it out", Low: 0, High: 1},
			{Name: "infall_phase", Unit: "rad", Note: "phase of the infalling pulse", Low: 0, High: 2 * math.Pi, Periodic: true},
			{Name: "infall_width", Unit: "s", Note: "standard deviation in time of the infalling pulse's Gaussian", Low: 1e-9, High: maxStart},
			{Name: "infall_carrier", Note: "carrier frequency of the infalling pulse over the first mode's frequency", Low: 0, High: 10, Default: 1, HasDefault: true},
		}
	}
	return nil
}
