package validation

import (
	"context"
	"fmt"
	"math"

	"gonum.org/v1/gonum/stat"
	"gonum.org/v1/gonum/stat/distuv"

	"knell/sampler"
)

// Pull is one run's log-evidence against the truth.
type Pull struct {
	Seed        uint64
	LogEvidence float64 // nats
	Error       float64 // as quoted by the run, nats
	Z           float64 // (LogEvidence - truth) / Error
	Calls       int64
}

// PullsOf runs the sampler for seeds s.Seed, s.Seed+1 and so on, each with the
// settings s, and compares with the true log-evidence in nats. A run that did
// not converge is an error: its number is no answer.
func PullsOf(ctx context.Context, newTarget func() (sampler.Target, error), s sampler.Settings, seeds int, truth float64) ([]Pull, error) {
	var pulls []Pull
	for i := range seeds {
		run := s
		run.Seed = s.Seed + uint64(i)
		o, err := sampler.Run(ctx, newTarget, run)
		if err != nil {
			return nil, err
		}
		if o.Status != sampler.Converged {
			return nil, fmt.Errorf("validation: the run of seed %d ended by %v, want converged", run.Seed, o.Status)
		}
		pulls = append(pulls, Pull{
			Seed: run.Seed, LogEvidence: o.LogEvidence, Error: o.LogEvidenceError,
			Z: (o.LogEvidence - truth) / o.LogEvidenceError, Calls: o.Calls,
		})
	}
	return pulls, nil
}

// Normality says whether pulls can be draws from a unit normal.
type Normality struct {
	Mean, Deviation float64 // of the pulls; the deviation about their own mean
	// MeanLimit is three standard errors of the mean of as many unit normals;
	// Low and High bound the central 99.7 % of the deviation (chi-squared with
	// one degree of freedom fewer than there are pulls).
	MeanLimit, Low, High float64
}

// UnitNormal compares pulls, two at least, with a unit normal.
func UnitNormal(pulls []Pull) Normality {
	if len(pulls) < 2 {
		panic(fmt.Sprintf("validation: %d pulls, want two at least", len(pulls)))
	}
	z := make([]float64, len(pulls))
	for i, p := range pulls {
		z[i] = p.Z
	}
	free := float64(len(z) - 1)
	chi := distuv.ChiSquared{K: free}
	// The two tails beyond three standard deviations of a normal.
	tail := distuv.UnitNormal.CDF(-3)
	n := Normality{
		MeanLimit: 3 / math.Sqrt(float64(len(z))),
		Low:       math.Sqrt(chi.Quantile(tail) / free),
		High:      math.Sqrt(chi.Quantile(1-tail) / free),
	}
	n.Mean, n.Deviation = stat.MeanStdDev(z, nil)
	return n
}

// Sound says whether both the mean and the deviation are within their limits.
func (n Normality) Sound() bool {
	return math.Abs(n.Mean) < n.MeanLimit && n.Deviation > n.Low && n.Deviation < n.High
}
