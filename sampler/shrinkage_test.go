package sampler

import (
	"context"
	"fmt"
	"math"
	"testing"
)

// Shrinkage test (arXiv:1407.5459): where the contours are cubes, the volume
// within a contour is known, and the ratios of successive dead points' volumes
// must be Beta(n, 1), that is their n-th powers uniform and independent.
func TestShrinkageOfCubes(t *testing.T) {
	for _, way := range []method{fromUnion, fromSlices} {
		for _, dim := range []int{2, 5, 9} {
			t.Run(fmt.Sprintf("%v/%d", way, dim), func(t *testing.T) {
				p := &problem{dim: dim, logL: func(u []float64) float64 {
					var m float64
					for _, x := range u {
						m = max(m, math.Abs(2*x-1))
					}
					return -float64(dim) * m * 60 // information about dim (ln 60 - 1)
				}}
				var u []float64
				var drift float64
				for seed := range uint64(2) {
					o, err := Run(context.Background(), p.target, Settings{Seed: seed, LivePoints: 200, force: way})
					if err != nil {
						t.Fatal(err)
					}
					logX := 0.0
					for i, l := range o.LogLikelihood {
						next := float64(dim) * math.Log(-l/float64(dim)/60)
						u = append(u, math.Exp(float64(o.LiveCount[i])*(next-logX)))
						drift += 1 + float64(o.LiveCount[i])*(next-logX)
						logX = next
					}
				}
				n := float64(len(u))
				t.Logf("%g points, K-S p = %.3f, drift %.2f sd", n, uniformP(u), drift/math.Sqrt(n))
				// n ln t has mean -1 and sd 1; seeds are fixed, so 1e-3 and its
				// counterpart of 3.3 sd are passed once or not.
				if p := uniformP(u); p < 1e-3 {
					t.Errorf("shrinkages are not Beta(n, 1): p = %.2g", p)
				}
				if math.Abs(drift) > 3.3*math.Sqrt(n) {
					t.Errorf("total shrinkage is off by %.1f sd", drift/math.Sqrt(n))
				}
			})
		}
	}
}
