package sampler

import (
	"context"
	"runtime"
	"testing"
	"time"
)

// costly is a problem whose likelihood keeps a core busy for a time: a sleep would
// let more than one worker share it. Every slowEvery-th call of a target takes slowTimes
// as long; 0 for none. Each worker has a target of its own, so that counting needs no
// lock; which calls are slow depends on the workers, the numbers do not.
type costly struct {
	*problem
	spins                int
	slowEvery, slowTimes int
	calls                int
	sink                 uint64
}

func (c *costly) LogLikelihood(u []float64) (float64, error) {
	c.calls++
	spins := c.spins
	if c.slowEvery > 0 && c.calls%c.slowEvery == 0 {
		spins *= c.slowTimes
	}
	c.sink += spin(spins)
	return c.problem.LogLikelihood(u)
}

// spin does work that nothing can leave out, and touches no memory.
//
//go:noinline
func spin(n int) uint64 {
	x := uint64(n) | 1
	for range n {
		x ^= x << 13
		x ^= x >> 7
		x ^= x << 17
	}
	return x
}

// spinsOf measures how many spins take d: the fastest of some trials, because other
// work of the machine only adds.
func spinsOf(d time.Duration) int {
	const trial = 200_000
	best := time.Duration(1 << 62)
	var sink uint64
	defer func() { runtime.KeepAlive(sink) }()
	for range 10 {
		began := time.Now()
		sink += spin(trial)
		best = min(best, time.Since(began))
	}
	return int(float64(trial) * float64(d) / float64(best))
}

// BenchmarkSpeedup runs the same run with one worker and with two, on a likelihood of
// 100 microseconds, and reports the ratio of the times as speedup. It needs two idle
// cores to mean anything: what else runs on them is in it.
func BenchmarkSpeedup(b *testing.B) {
	if runtime.GOMAXPROCS(0) < 2 {
		b.Skip("one processor")
	}
	spins := spinsOf(100 * time.Microsecond)
	for _, tc := range []struct {
		name                 string
		slowEvery, slowTimes int
	}{
		{"equal", 0, 1},
		{"every 200th 50 times slower", 200, 50},
	} {
		b.Run(tc.name, func(b *testing.B) {
			p := gaussian(4, 0.95)
			timed := func(seed uint64, workers int) (time.Duration, float64) {
				began := time.Now()
				o, err := Run(context.Background(), func() (Target, error) {
					return &costly{problem: p, spins: spins, slowEvery: tc.slowEvery, slowTimes: tc.slowTimes}, nil
				}, Settings{Seed: seed, LivePoints: 500, Workers: workers})
				if err != nil {
					b.Fatal(err)
				}
				return time.Since(began), o.LogEvidence
			}
			var one, two time.Duration
			for seed := uint64(0); b.Loop(); seed++ {
				t1, z1 := timed(seed, 1)
				t2, z2 := timed(seed, 2)
				if z1 != z2 {
					b.Fatalf("ln Z = %v with one worker, %v with two", z1, z2)
				}
				one += t1
				two += t2
			}
			b.ReportMetric(float64(one)/float64(two), "speedup")
		})
	}
}
