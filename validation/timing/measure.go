package main

import (
	"context"
	"fmt"
	"math"
	"time"

	"gonum.org/v1/gonum/stat"

	"knell/internal/random"
	"knell/internal/report"
	"knell/sampler"
)

const (
	// The sampler's own numbers.
	batchShare = sampler.BatchShare
	inFlight   = sampler.InFlight

	// What they were before batches overlapped.
	formerShare    = 16
	formerInFlight = 1

	// repeats is how often each schedule is played, for an error.
	repeats = 4
	// thresholdRounds of the other schedule are played.
	thresholdRounds = 400
)

// measure plays everything that the options ask for. The only error is that of ctx.
func measure(ctx context.Context, o options, status *report.StatusLine) (*document, error) {
	now := schedule{o.share, o.flight, o.own}
	before := schedule{formerShare, formerInFlight, o.own}
	d := &document{
		Seed: o.seed, Nats: o.nats, Own: o.own,
		Share: now.share, InFlight: now.inFlight, FormerShare: before.share, FormerInFlight: before.inFlight, Enough: enough,
		Efficiency: []efficiencyRow{}, LivePoints: []liveRow{}, OneThreshold: []thresholdRow{},
		options: o,
	}
	kinds, times := slots(o.calls), laws()
	total, ended, began := (len(o.live)+1)*len(kinds)*len(times)*len(o.workers), 0, time.Now()
	step := func() error {
		ended++
		if t := time.Now(); status.Due(t) {
			gone := t.Sub(began)
			left := time.Duration(float64(gone) * float64(total-ended) / float64(ended))
			status.Show(t, fmt.Sprintf("%d of %d cases, %s gone, about %s left", ended, total, report.Clock(gone), report.Clock(left)))
		}
		return ctx.Err()
	}
	for _, n := range o.live {
		for _, k := range kinds {
			for _, c := range times {
				for _, w := range o.workers {
					e := o.efficiency(now, n, w, k, c)
					f := o.efficiency(before, n, w, k, c)
					d.Efficiency = append(d.Efficiency, efficiencyRow{setting{w, k.calls, k.drawing(), c.name, k}, n, e.mean, e.error, f.mean, f.error})
					if err := step(); err != nil {
						return nil, err
					}
				}
			}
		}
		for _, w := range o.workers {
			rng := random.New(o.seed, "threshold", uint64(n), uint64(w)).Rand
			d.OneThreshold = append(d.OneThreshold, thresholdRow{
				n, w, oneThreshold(n, w, slot{1, true}), playThreshold(rng, n, w, thresholdRounds) / float64(w),
			})
		}
	}
	for _, k := range kinds {
		for _, c := range times {
			for _, w := range o.workers {
				n := recommend(ctx, least(now, w, c), func(live int) float64 { return o.once(now, live, w, k, c, 0) })
				d.LivePoints = append(d.LivePoints, liveRow{setting{w, k.calls, k.drawing(), c.name, k}, n})
				if err := step(); err != nil {
					return nil, err
				}
			}
		}
	}
	return d, nil
}

// efficiency is the mean of the repeats and its standard error.
func (o options) efficiency(s schedule, live, workers int, k slot, c callTimes) (e struct{ mean, error float64 }) {
	all := make([]float64, repeats)
	for i := range all {
		all[i] = o.once(s, live, workers, k, c, i)
	}
	var deviation float64
	e.mean, deviation = stat.MeanStdDev(all, nil)
	e.error = deviation / math.Sqrt(repeats)
	return e
}

// once plays a schedule through a whole run.
func (o options) once(s schedule, live, workers int, k slot, c callTimes, repeat int) float64 {
	size := s.size(live)
	batches := int(math.Ceil(o.nats * float64(live) / float64(size)))
	// The same stream for every schedule, number of live points and of workers, so
	// that they can be compared.
	rng := random.New(o.seed, "timing", uint64(k.calls), uint64(repeat)).Rand
	return s.play(workers, size, batches, batchTimes(rng, k, c))
}
