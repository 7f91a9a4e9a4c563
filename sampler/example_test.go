package sampler_test

import (
	"context"
	"fmt"
	"math"

	"knell/sampler"
)

// hill is a normal density of width 0.1 around the centre of the unit square, times
// exp(7).
type hill struct{}

func (hill) Dim() int { return 2 }

func (hill) LogLikelihood(u []float64) (float64, error) {
	x, y := (u[0]-0.5)/0.1, (u[1]-0.5)/0.1
	return 7 - (x*x+y*y)/2 - math.Log(2*math.Pi*0.01), nil
}

func newHill() (sampler.Target, error) { return hill{}, nil }

// What a finished run is good for.
func ExampleOutcome() {
	ctx := context.Background()
	o, err := sampler.Run(ctx, newHill, sampler.Settings{Seed: 1, LivePoints: 1000})
	if err != nil {
		fmt.Println(err)
		return
	}

	// Moments, quantiles and intervals of a coordinate, or of any function of the
	// points, with their errors.
	x := make([]float64, len(o.Points))
	for i, u := range o.Points {
		x[i] = u[0]
	}
	posterior := o.Posterior()
	mean, err := posterior.Mean(x)
	if err != nil {
		fmt.Println(err)
		return
	}
	interval, err := posterior.Central(x, 0.9)
	if err != nil {
		fmt.Println(err)
		return
	}
	fmt.Printf("mean %.1f, 90 %% from %.1f to %.1f, known to 0.01: %v\n", mean.Value, interval.Low.Value, interval.High.Value, interval.High.Error < 0.01)

	// Draws that need no weights.
	draws, _ := o.EqualWeight(1, 100)
	fmt.Println(len(draws), "draws")

	// The same evidence another way, and the ratio of the hypothesis that holds the
	// first coordinate at ½ to that which leaves it free: ln of the normal's peak, 1.38.
	bridge, err := o.Bridge(ctx, newHill, sampler.RouteSettings{Seed: 1})
	if err != nil {
		fmt.Println(err)
		return
	}
	ratio, err := o.SavageDickey(0, 0.5, sampler.RatioSettings{})
	if err != nil {
		fmt.Println(err)
		return
	}
	fmt.Printf("ln Z = %.1f by bridge sampling, warnings %d\n", bridge.LogEvidence, len(sampler.Agree(o, bridge)))
	fmt.Printf("nested over full right: %v\n", math.Abs(ratio.LogBayesFactor-1.38) < 3*ratio.Error)
	// Output:
	// mean 0.5, 90 % from 0.3 to 0.7, known to 0.01: true
	// 100 draws
	// ln Z = 7.0 by bridge sampling, warnings 0
	// nested over full right: true
}

// The same run under another prior: one that rises with the first coordinate, of
// density 2 u. Over the flat prior's, ln Z changes by ln of the mean of 2 u, which is
// 0 here, and the mean moves by the variance over ½, to 0.52.
func ExampleOutcome_ReweightBy() {
	o, err := sampler.Run(context.Background(), newHill, sampler.Settings{Seed: 1, LivePoints: 1000})
	if err != nil {
		fmt.Println(err)
		return
	}
	p, err := o.ReweightBy(func(u []float64) float64 { return math.Log(2 * u[0]) })
	if err != nil {
		fmt.Println(err)
		return
	}
	x := make([]float64, len(o.Points))
	for i, u := range o.Points {
		x[i] = u[0]
	}
	mean, err := p.Mean(x)
	if err != nil {
		fmt.Println(err)
		return
	}
	fmt.Println(math.Abs(p.LogRatio.Value) < 3*p.LogRatio.Error, p.LogRatio.Error < 0.02)
	fmt.Println(math.Abs(mean.Value-0.52) < 3*mean.Error, mean.Error < 0.01)
	fmt.Println(p.EffectiveSamples > 500)
	// Output:
	// true true
	// true true
	// true
}
