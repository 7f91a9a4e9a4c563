package models

import (
	"math"
	"math/rand/v2"
	"testing"

	"knell/internal/constants"
	"knell/models/kerr"
)

// In straight coordinates the echo delay, and the phase of the surface's part of
// the round trip at the first mode's frequency at the centre, are the same
// wherever mass and spin are.
func TestBendsAreStraight(t *testing.T) {
	for _, mode := range []string{"2,2,0", "3,3,0", "2,-2,0", "2,0,0"} {
		t.Run(mode, func(t *testing.T) {
			s := Settings{Model: "cavity", Modes: []string{mode, "2,2,1"}, Reflectivity: "boltzmann", Grid: Grid{First: 60, Count: 10, Step: 1}, Length: 1}
			c := newTestModel(t, s).(*Cavity)
			l, m, n, err := ParseMode(mode)
			if err != nil {
				t.Fatal(err)
			}
			centre := namedTheta(t, c, modeValues(s.Modes))
			at, err := kerr.QuasiNormalMode(l, m, n, centre[1])
			if err != nil {
				t.Fatal(err)
			}
			hertz := real(at.Omega) / (2 * math.Pi * centre[0] * constants.SolarMassSeconds)
			rng := rand.New(rand.NewPCG(5, 6))
			bent := c.Bent()
			if len(bent) != 2 || c.Parameters()[bent[0]].Name != "offset" || c.Parameters()[bent[1]].Name != "echo_phase" {
				t.Fatalf("bent %v", bent)
			}
			const offset, phase = 0.3, 1.9 // straight coordinates
			var delay, turn float64
			for i := range 20 {
				theta := append([]float64{}, centre...)
				if i > 0 {
					theta[0], theta[1] = 40+60*rng.Float64(), 0.95*rng.Float64()
				}
				theta[bent[0]] = c.Bend(0, theta, centre)
				scale := theta[0] * constants.SolarMassSeconds
				ln := func() float64 {
					return theta[bent[0]]*math.Ln10 + math.Log(constants.PlanckLength/(theta[0]*constants.SolarMassMetres))
				}
				// At the straight coordinate 0 the delay is the centre's.
				got := kerr.EchoDelay(theta[1], ln()) * scale
				theta[bent[0]] = offset + c.Bend(0, theta, centre)
				theta[bent[1]] = phase + c.Bend(1, theta, centre)
				x0 := kerr.SurfaceTortoise(theta[1], ln())
				k := 2*math.Pi*hertz*scale - float64(m)*kerr.HorizonFrequency(theta[1])
				angle := theta[bent[1]] - 2*k*x0
				if i == 0 {
					delay, turn = got, angle
				}
				if math.Abs(got/delay-1) > 1e-12 {
					t.Errorf("mass %g, spin %g: delay %.15g s, want %.15g s", theta[0], theta[1], got, delay)
				}
				// The track's interpolation of the frequency, 1e-8, times some
				// hundred radians.
				if math.Abs(angle-turn) > 1e-5 {
					t.Errorf("mass %g, spin %g: phase %.12g, want %.12g", theta[0], theta[1], angle, turn)
				}
			}
		})
	}
}
