package main

import (
	"math"
	"math/cmplx"
	"runtime"

	"golang.org/x/sync/errgroup"

	"knell/internal/random"
	"knell/models/kerr"
	"knell/models/kerr/internal/chart"
)

// measurePoints is how many random points a chart is measured at.
const measurePoints = 4000

// measure returns the largest relative difference of a chart from the direct
// calculation, and where. Spins are spread evenly in artanh, frequencies partly
// over the whole range, partly to where the function turns and to the ends.
func measure(j job, c *chart.Chart) (worst, spin, omega float64, err error) {
	workers := runtime.GOMAXPROCS(0)
	type result struct{ worst, spin, omega float64 }
	results := make([]result, measurePoints)
	var group errgroup.Group
	group.SetLimit(workers)
	for w := range workers {
		group.Go(func() error {
			for i := w; i < measurePoints; i += workers {
				rng := random.New(1, "tabulate", uint64(i))
				u := rng.Float64() * math.Atanh(kerr.MaxSpin)
				switch i % 20 {
				case 0:
					u = 0
				case 1:
					u = math.Atanh(kerr.MaxSpin)
				}
				a := spinAt(u)
				at := c.Low + (c.High-c.Low)*rng.Float64()
				switch i % 5 {
				case 0:
					at = float64(j.m)*kerr.HorizonFrequency(a) + 5*kerr.SurfaceGravity(a)*(2*rng.Float64()-1)
				case 1:
					at = gap * math.Pow(100, rng.Float64()) * math.Copysign(1, rng.Float64()-0.5)
				}
				if !(at >= c.Low && at <= c.High && math.Abs(at) >= c.Gap) {
					continue
				}
				got, err := c.At(u, at)
				if err != nil {
					return err
				}
				r, err := kerr.BarrierResponse(j.l, j.m, a, at, kerr.Odd)
				if err != nil {
					return err
				}
				want := r.Reflection
				if j.kind == chart.Transmission {
					want = r.Transmission
					got *= complex(at-float64(j.m)*kerr.HorizonFrequency(a), 0)
				}
				results[i] = result{cmplx.Abs(got-want) / cmplx.Abs(want), a, at}
			}
			return nil
		})
	}
	err = group.Wait()
	for _, r := range results {
		if r.worst > worst {
			worst, spin, omega = r.worst, r.spin, r.omega
		}
	}
	return worst, spin, omega, err
}
