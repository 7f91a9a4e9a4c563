package trials

import (
	"context"
	"io"
	"slices"
	"sync"
	"testing"
)

// Whatever order the runs of two cases end in, the first case is told first, each as
// soon as it can be, and results stand by number.
func TestRunTellsCasesInOrder(t *testing.T) {
	cases := []Case{{Choice: Choice{"a", 1}}, {Choice: Choice{"b", 1}}}
	for _, workers := range []int{1, 2, 4} {
		var (
			told []int
			got  [][]int
			hold = make(chan struct{})
			once sync.Once
		)
		Run(context.Background(), NewMeter(io.Discard, cases, 2, workers), func(at, run int, tell func(float64)) (int, bool) {
			// With a worker for every run, the first of all waits for the last.
			if workers == 4 && at == 0 && run == 0 {
				<-hold
			}
			if at == 1 && run == 1 {
				once.Do(func() { close(hold) })
			}
			if workers == 1 && at == 1 && !slices.Equal(told, []int{0}) {
				t.Errorf("told %v before the second case, want 0", told)
			}
			tell(0.5)
			return 10*at + run, true
		}, func(at int, runs []int) {
			told = append(told, at)
			got = append(got, runs)
		})
		if !slices.Equal(told, []int{0, 1}) || !slices.Equal(got[0], []int{0, 1}) || !slices.Equal(got[1], []int{10, 11}) {
			t.Errorf("%d workers: told %v of %v, want 0 and 1 with their runs", workers, told, got)
		}
	}
}

func TestRunTellsOfEveryCaseAfterAnInterrupt(t *testing.T) {
	cases := []Case{{Choice: Choice{"a", 1}}, {Choice: Choice{"b", 1}}, {Choice: Choice{"c", 1}}}
	ctx, cancel := context.WithCancel(context.Background())
	defer cancel()
	made, seen := 0, []int{}
	Run(ctx, NewMeter(io.Discard, cases, 3, 1), func(at, run int, _ func(float64)) (bool, bool) {
		made++
		if at == 1 && run == 1 {
			cancel()
			return false, false
		}
		return true, true
	}, func(at int, runs []bool) {
		n := 0
		for _, done := range runs {
			if done {
				n++
			}
		}
		seen = append(seen, at, n)
	})
	if want := []int{0, 3, 1, 1, 2, 0}; made != 5 || !slices.Equal(seen, want) {
		t.Errorf("%d runs, cases and finished runs %v; want 5, %v", made, seen, want)
	}
}
