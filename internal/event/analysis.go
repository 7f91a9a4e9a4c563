package event

import (
	"math"

	"knell/models"
)

// rampPerGate is the width of the join between the band and the loud noise
// outside it, in units of one over the gate: a few resolution elements of the
// gate, so that the join correlates samples over less than the gate.
const rampPerGate = 4

// ramp is the width of that join in Hz. A narrow one costs signal: the filter
// that it stands for rings across the analysis start, and what rings into the
// gate is lost.
func (a Analysis) ramp() float64 {
	if a.Gate > 0 {
		return rampPerGate / a.Gate
	}
	return rampPerGate / a.Duration
}

// pastBand is how far beyond the band's upper edge, as a factor, the model goes
// on: there the loud noise exceeds that of the band by less than below it.
const pastBand = 1.25

// grid is where the model is computed: the band and its joins, in which the
// noise is not loud enough yet for what the model leaves out not to matter. The
// joins may reach into the transitions of the conditioning filters, which change
// the signal there; by then the noise is loud enough for that.
func (a Analysis) grid() models.Grid {
	first := int(math.Ceil((a.Low-a.ramp())*a.Duration - 1e-9))
	last := int(math.Floor((pastBand*a.High+a.ramp())*a.Duration + 1e-9))
	first, last = max(1, first), min(last, a.samples()/2-1)
	return models.Grid{First: first, Count: last - first + 1, Step: 1 / a.Duration}
}

// gateSamples is the gate's length in samples.
func (a Analysis) gateSamples() int { return int(math.Round(a.Gate * a.SampleRate)) }

// samples is the segment's length.
func (a Analysis) samples() int { return int(math.Round(a.Duration * a.SampleRate)) }
