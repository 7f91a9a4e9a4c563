package report

import (
	"bytes"
	"testing"
)

// someEcho is an invented cavity.
func someEcho() *EchoDocument {
	growth := Number(334.125)
	return &EchoDocument{
		Mass: 68, Spin: 0.67, L: 2, M: 2, N: 0, Parity: "odd", Offset: 0.5, ProperDistance: 5.1e-35, LogGap: -80.25,
		HorizonFrequency: 91.25, AmplifiedBelow: 182.5, Temperature: 16.125, TemperatureKelvin: 7.75e-10,
		HorizonRadius: 1.75, LightRing: 2.0625, Retrograde: 3.6875, BarrierTortoise: -2.125, SurfaceTortoise: -435.25,
		EchoDelay: 0.29, ModeSpacing: 3.4375, DelayAtMode: 0.294, SpacingAtMode: 3.40625,
		Mode:      EchoMode{Omega: [2]Number{0.52, -0.0825}, Frequency: 247, DampingTime: 0.0041, Reflection: [2]Number{0.125, -0.6875}, Magnitude: 0.69877},
		Stability: EchoStability{Gain: 0.00175, GainFrequency: 164.25, MaxReflectivity: 0.999125},
		Laws: []EchoLaw{
			{Law: "constant", Parameters: []EchoParameter{{"reflectivity", 1}}, Surface: 1, Ratio: 0.5, Flux: 0.25,
				Echoes: []Number{0.5, 0.25, 0.125, 0.0625, 0.03125}, LargestRatio: 1.0009, GrowthTime: &growth},
			{Law: "boltzmann", Parameters: []EchoParameter{{"reflectivity", 1}, {"temperature", 1.5}}, Surface: 0.25, Ratio: 0.125, Flux: 0.015625,
				Echoes: []Number{0.125, 0.015625}, LargestRatio: 1, Stable: true},
			{Law: "lorentzian", Parameters: []EchoParameter{{"corner", 2}}, Surface: 1, Ratio: 0.5, Flux: 0.25, LargestRatio: 1.0000004, Note: "no cavity mode lies where echoes would grow"},
		},
	}
}

func someEchoCurves() *EchoCurves {
	return &EchoCurves{
		Frequency: []float64{10, 100, 180, 250, 400},
		Barrier:   []float64{1, 1.001, 1.002, 0.7, 1e-4},
		Ratio:     [][]float64{{1, 1.001, 1.002, 0.7, 1e-4}, {0.01, 0.1, 1, 0.1, 1e-8}, {0, 0, 0, 0, 0}},
	}
}

func TestEchoGolden(t *testing.T) {
	var text, table bytes.Buffer
	if err := someEcho().WriteJSON(&text); err != nil {
		t.Fatal(err)
	}
	golden(t, "echo.json", text.Bytes())
	if err := EchoTable(&table, someEcho()); err != nil {
		t.Fatal(err)
	}
	golden(t, "echo.txt", table.Bytes())
}
