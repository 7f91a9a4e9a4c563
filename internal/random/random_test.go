package random

import (
	"math"
	"testing"
)

// The streams are promised: a changed first value changes every published
// result, so it must be a decision and not an accident.
func TestStreamIsPinned(t *testing.T) {
	for _, tc := range []struct {
		seed    uint64
		purpose string
		index   []uint64
		want    uint64
	}{
		{1, "live", nil, 897281606935242431},
		{1, "live", []uint64{0}, 12509143090778851654},
		{1, "replace", []uint64{3, 7}, 5449280643151218667},
	} {
		got := New(tc.seed, tc.purpose, tc.index...).Uint64()
		if got != tc.want {
			t.Errorf("New(%d, %q, %v) starts with %d, want %d", tc.seed, tc.purpose, tc.index, got, tc.want)
		}
	}
}

func TestKeysDoNotCollide(t *testing.T) {
	seen := map[uint64]string{}
	for _, purpose := range []string{"", "a", "a\x01\x00\x00\x00\x00\x00\x00\x00", "b"} {
		for _, index := range [][]uint64{nil, {0}, {1}, {0, 0}, {1, 0}, {0, 1}} {
			v := New(5, purpose, index...).Uint64()
			if other, ok := seen[v]; ok {
				t.Errorf("purpose %q index %v repeats the stream of %s", purpose, index, other)
			}
			seen[v] = purpose
		}
	}
}

func TestStateRoundTrip(t *testing.T) {
	a := New(9, "walk", 2)
	a.Uint64()
	state, err := a.MarshalBinary()
	if err != nil {
		t.Fatal(err)
	}
	var b Rand
	if err := b.UnmarshalBinary(state); err != nil {
		t.Fatal(err)
	}
	for i := range 5 {
		if x, y := a.NormFloat64(), b.NormFloat64(); x != y {
			t.Fatalf("draw %d differs after restoring: %v, %v", i, x, y)
		}
	}
}

// Streams of neighbouring indices must be uncorrelated: the correlation of n
// pairs of uniforms has standard deviation 1/sqrt(n); five of them are allowed.
func TestNeighboursAreUncorrelated(t *testing.T) {
	const n = 40000
	a, b := New(1, "x", 0), New(1, "x", 1)
	var sum float64
	for range n {
		sum += (a.Float64() - 0.5) * (b.Float64() - 0.5) * 12
	}
	if z := sum / math.Sqrt(n); math.Abs(z) > 5 {
		t.Errorf("neighbouring streams correlate: z = %g", z)
	}
}
