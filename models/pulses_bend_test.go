package models

import (
	"math"
	"math/cmplx"
	"testing"

	"knell/internal/constants"
)

// The straight coordinate of the turn leaves a copy's phase at a fixed time as the
// delay changes: with a sharp copy of an undamped stretch, its spectrum at the
// mode's frequency.
func TestPulsesTurnIsStraight(t *testing.T) {
	s := Settings{Model: "pulses", Modes: []string{"2,2,0"}, Grid: Grid{First: 490, Count: 20, Step: 0.5}, Length: 0.6}
	m := newTestModel(t, s)
	b := m.(Bender)
	values := map[string]float64{"mass": 68, "spin": 0.69, "amplitude_220": 1, "phase_220": 1, "pulse_delay": 0.3, "pulse_amplitude": 0.5, "pulse_damping": 0, "pulse_turn": 1}
	centre := namedTheta(t, m, values)
	turn := b.Bent()[0]
	if name := m.Parameters()[turn].Name; name != "pulse_turn" {
		t.Fatalf("bent is %s", name)
	}
	copyAt := func(delay, turned float64) complex128 {
		theta := append([]float64(nil), centre...)
		theta[turn-4], theta[turn] = delay, turned-2*math.Pi*math.Floor(turned/(2*math.Pi))
		with := fill(t, m, theta, s.Grid.Count)
		theta[turn-2] = 0 // pulse_amplitude
		without := fill(t, m, theta, s.Grid.Count)
		omega, _, _, err := m.(*Pulses).ringing.tracks[0].At(0.69)
		if err != nil {
			t.Fatal(err)
		}
		hertz := real(omega) / (68 * constants.SolarMassSeconds) / (2 * math.Pi)
		j := int(math.Round(hertz/s.Grid.Step)) - s.Grid.First
		return complex(with.PlusRe[j]-without.PlusRe[j], with.PlusIm[j]-without.PlusIm[j])
	}
	theta := append([]float64(nil), centre...)
	straight := 1 - b.Bend(0, theta, centre)
	first := copyAt(0.3, 1)
	theta[turn-4] = 0.3013
	second := copyAt(0.3013, straight+b.Bend(0, theta, centre))
	bare := copyAt(0.3013, 1)
	// The tail at negative frequency, 240 / (2 2 pi 250) = 0.08 of the resonance,
	// turns the other way, by up to twice 0.08 rad.
	if off := math.Abs(cmplx.Phase(second / first)); off > 0.16 {
		t.Errorf("the copy's phase moves by %g rad along the straight coordinate", off)
	}
	// Without it by 2 pi 250 0.0013 = 2.0 rad.
	if off := math.Abs(cmplx.Phase(bare / first)); off < 1.5 {
		t.Errorf("and by %g rad without it: the test sees nothing", off)
	}
}
