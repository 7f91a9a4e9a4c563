package main

import (
	"context"
	"testing"
)

func TestRecommendedIsTheLeastThatIsEnough(t *testing.T) {
	for _, from := range []int{40, 1000, 123_456} {
		got := recommend(context.Background(), schedule{32, 4, 0}, 4, func(live int) float64 {
			if live >= from {
				return 0.95
			}
			return 0.5
		})
		if got < from || float64(got) > 1.06*float64(from)+1 {
			t.Errorf("recommended %d, want %d or up to 5 %% more", got, from)
		}
	}
	if got := recommend(context.Background(), schedule{32, 4, 0}, 4, func(int) float64 { return 0.5 }); got != 0 {
		t.Errorf("recommended %d where nothing is enough, want 0", got)
	}
	// 4 of 32 parts in the air: 16 workers are fed at 0.9 by 16 · 0.9 · 8 = 115 points.
	if got := recommend(context.Background(), schedule{32, 4, 0}, 16, func(int) float64 { return 1 }); got != 115 {
		t.Errorf("recommended %d, want no search below 115", got)
	}
}
