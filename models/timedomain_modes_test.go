package models

import (
	"fmt"
	"math"
	"math/cmplx"
	"testing"

	"knell/internal/checktable"
)

// What the time domain asks of a cavity of l = m = 2 holds for every other mode whose
// barrier is tabulated: nothing before the start, nothing wrapped around, the first
// echoes at their delays with the shape that the barrier's own integration gives.
func TestPhysicsOtherModesInTime(t *testing.T) {
	table := checktable.New(t, "cavities of other modes, spin 0.69, 68 solar masses; lags in samples of 1/32768 s")
	for _, tc := range []struct {
		mode, parity, law string
	}{
		{"2,1,0", "even", "constant"},
		{"2,0,0", "odd", "constant"},
		{"2,-1,1", "odd", "membrane"},
		{"2,-2,0", "odd", "lorentzian"},
		{"3,3,0", "odd", "constant"},
		{"3,-2,0", "even", "constant"},
		{"4,4,0", "odd", "constant"},
		{"4,0,0", "odd", "constant"},
	} {
		t.Run(tc.mode, func(t *testing.T) {
			c := timeCase{
				s:      Settings{Model: "cavity", Modes: []string{tc.mode}, Reflectivity: tc.law, Parity: tc.parity, Inclination: 1.2},
				values: other(amplitudeName(tc.mode)[len("amplitude_"):], map[string]float64{"offset": 0, "echo_phase": 0.4}),
			}
			switch tc.law {
			case "membrane":
				c.values["viscosity"] = 0.1
			case "lorentzian":
				c.values["reflectivity"], c.values["corner"] = 1, 20
			default:
				c.values["reflectivity"] = 0.9
			}
			short, long := timeSeries(t, c, 2, 1.5, probe), timeSeries(t, c, 4, 1.5, probe)
			change, peak := 0.0, largestOf(short)
			for i := range short {
				change = math.Max(change, cmplx.Abs(short[i]-long[i])/peak)
			}
			table.Absolute(tc.mode+", energy before the start", energy(long[len(long)/2:])/energy(long), 0, 1e-6, "causality")
			table.Absolute(tc.mode+", wrapped around", change, 0, 1e-6, "a signal that ends within the segment")
			e := trainOf(t, c, 2, 2)
			bounce, worst := e.bounce(t), 0.0
			for n := 1; n < len(e.parts); n++ {
				predicted := make([]complex128, len(bounce))
				for j := range predicted {
					predicted[j] = e.parts[n-1][j] * bounce[j]
				}
				lag, overlap := e.match(predicted, e.parts[n], e.delay)
				worst = math.Max(worst, cmplx.Abs(overlap-1))
				table.Absolute(fmt.Sprintf("%s, echo %d: lag", tc.mode, n), float64(lag), e.delay*timeRate, 1, "light ring to surface and back")
			}
			table.Worst(tc.mode+", echoes: overlap less 1", worst, 1e-6, "barrier integrated at each frequency")
		})
	}
}
