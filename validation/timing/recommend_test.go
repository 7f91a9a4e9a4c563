package main

import (
	"context"
	"testing"
)

func TestRecommendedIsTheLeastThatIsEnough(t *testing.T) {
	for _, from := range []int{40, 1000, 123_456} {
		got := recommend(context.Background(), 32, func(live int) float64 {
			if live >= from {
				return 0.95
			}
			return 0.5
		})
		if got < from || float64(got) > 1.06*float64(from)+1 {
			t.Errorf("recommended %d, want %d or up to 5 %% more", got, from)
		}
	}
	if got := recommend(context.Background(), 32, func(int) float64 { return 0.5 }); got != 0 {
		t.Errorf("recommended %d where nothing is enough, want 0", got)
	}
	if got := recommend(context.Background(), 115, func(int) float64 { return 1 }); got != 115 {
		t.Errorf("recommended %d, want the 115 that the search begins with", got)
	}
}

func TestSearchBeginsWhereWorkersAreFed(t *testing.T) {
	s, all := schedule{32, 4, 0}, laws()
	for _, tc := range []struct {
		workers, law, want int
	}{
		{16, 0, 115}, // 4 of 32 parts in the air: 16 · 0.9 · 8
		{1024, 0, 7372},
		{2, 0, 32},
		{2, 3, 256}, // 8 slots per batch
	} {
		if got := least(s, tc.workers, all[tc.law]); got != tc.want {
			t.Errorf("%d workers, %s: search from %d, want %d", tc.workers, all[tc.law].name, got, tc.want)
		}
	}
}
