package report

import (
	"bytes"
	"math"
	"testing"
)

// someBarrier is an invented response.
func someBarrier() *BarrierDocument {
	mass, hertz := Number(68), Number(142.5)
	return &BarrierDocument{
		L: 2, M: 2, Spin: 0.7, Parity: "odd", HorizonFrequency: 0.2, Mass: &mass,
		Points: []BarrierPoint{
			{Omega: 0.3, Frequency: &hertz, Wave: -0.1, Reflection: [2]Number{0.75, -0.66875}, Transmission: [2]Number{0.0178, -0.0139},
				Greybody: -0.00140625, Separation: 3.40625,
				FromInfinity: &Scattering{[2]Number{-0.5, 0.25}, [2]Number{1e-3, 2e-3}}},
			{Omega: 0.5, Wave: 0.1, Reflection: [2]Number{0.046875, -0.875}, Transmission: [2]Number{-0.19, -3.1e-3},
				Greybody: 0.25, Separation: Number(math.NaN())},
		},
	}
}

func TestBarrierGolden(t *testing.T) {
	var text, table bytes.Buffer
	if err := someBarrier().WriteJSON(&text); err != nil {
		t.Fatal(err)
	}
	golden(t, "barrier.json", text.Bytes())
	if err := BarrierTable(&table, someBarrier()); err != nil {
		t.Fatal(err)
	}
	golden(t, "barrier.txt", table.Bytes())

	// No points are an empty list.
	text.Reset()
	if err := (&BarrierDocument{}).WriteJSON(&text); err != nil || !bytes.Contains(text.Bytes(), []byte(`"points": []`)) {
		t.Errorf("%v in %s", err, text.Bytes())
	}
}

func TestPhaseIsUnwound(t *testing.T) {
	// R = exp(i x²/2): its phase passes several turns.
	var points []BarrierPoint
	for i := range 101 {
		x := float64(i) / 10
		points = append(points, BarrierPoint{Omega: Number(x), Reflection: [2]Number{Number(math.Cos(x * x / 2)), Number(math.Sin(x * x / 2))}})
	}
	c := newBarrierColumns(points)
	for i, x := range c.x {
		if want := x * x / 2; math.Abs(c.phase[i]-want) > 1e-12*(1+want) {
			t.Fatalf("phase at %g is %g, want %g", x, c.phase[i], want)
		}
	}
	if got, want := onBranch(math.Remainder(12.5, 2*math.Pi), 5.01, c), 12.5; math.Abs(got-want) > 1e-12 {
		t.Errorf("phase on the curve's branch %g, want %g", got, want)
	}
}
