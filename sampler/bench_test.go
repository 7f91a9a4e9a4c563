package sampler

import (
	"context"
	"fmt"
	"testing"
)

// BenchmarkOverhead runs likelihoods that cost next to nothing: the time per
// call is the sampler's own.
func BenchmarkOverhead(b *testing.B) {
	for _, workers := range []int{1, 2} {
		for _, p := range []*problem{gaussian(4, 0.95), gaussian(8, 0.95), ridge(), logGamma(6)} {
			b.Run(fmt.Sprintf("%s/%d/workers=%d", p.name, p.dim, workers), func(b *testing.B) {
				var calls, points, iterations float64
				b.ReportAllocs()
				for seed := uint64(0); b.Loop(); seed++ {
					o, err := Run(context.Background(), p.target, Settings{Seed: seed, LivePoints: 1000, Workers: workers, Periodic: p.periodic})
					if err != nil {
						b.Fatal(err)
					}
					calls += float64(o.Calls)
					points += float64(len(o.Points))
					iterations++
				}
				b.ReportMetric(float64(b.Elapsed().Nanoseconds())/calls, "ns/call")
				b.ReportMetric(float64(b.Elapsed().Nanoseconds())/points, "ns/point")
				b.ReportMetric(calls/points, "calls/point")
			})
		}
	}
}
