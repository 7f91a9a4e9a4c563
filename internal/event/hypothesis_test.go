package event

import (
	"math"
	"sort"
	"testing"

	"knell/internal/random"
)

// Straight coordinates move no prior mass: uniform points of the cube give every
// parameter its prior, and pairs of parameters stay independent.
func TestStraightCoordinatesKeepThePrior(t *testing.T) {
	p, err := Load(demo(t, "surface"))
	if err != nil {
		t.Fatal(err)
	}
	var h *hypothesis
	for _, candidate := range p.hypotheses {
		if candidate.Model == "cavity" {
			h = candidate
		}
	}
	if len(h.bends) != 2 {
		t.Fatalf("%d straight coordinates, want those of offset and echo phase", len(h.bends))
	}
	const n = 20000
	rng := random.New(3, "straight")
	u, theta := make([]float64, h.set.Dim()), make([]float64, h.set.Len())
	columns := map[string][]float64{}
	for range n {
		for i := range u {
			u[i] = rng.Float64()
		}
		h.place(u, theta)
		for i, name := range h.set.Names() {
			low, high := h.set.Prior(i).Support()
			if low == high {
				continue
			}
			// Every prior of the demo is uniform.
			x := (theta[i] - low) / (high - low)
			if !(x >= 0 && x <= 1) {
				t.Fatalf("%s = %g, outside its prior", name, theta[i])
			}
			columns[name] = append(columns[name], x)
		}
	}
	names := sortedKeys(columns)
	for i, a := range names {
		x := append([]float64(nil), columns[a]...)
		sort.Float64s(x)
		distance := 0.0
		for k, v := range x {
			distance = math.Max(distance, math.Abs(v-(float64(k)+0.5)/n))
		}
		// Kolmogorov-Smirnov: beyond 2/sqrt(n) with probability 2 exp(-8) = 7e-4.
		if distance > 2/math.Sqrt(n) {
			t.Errorf("%s leaves its prior: distance %g", a, distance)
		}
		for _, b := range names[:i] {
			sum := 0.0
			for k := range columns[a] {
				sum += (columns[a][k] - 0.5) * (columns[b][k] - 0.5) * 12
			}
			if z := sum / math.Sqrt(n); math.Abs(z) > 4.5 {
				t.Errorf("%s and %s correlate: z = %.2g", a, b, z)
			}
		}
	}
}
