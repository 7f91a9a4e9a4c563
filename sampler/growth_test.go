package sampler

import (
	"context"
	"math"
	"testing"
	"time"
)

func XTestGrowthTry(t *testing.T) {
	p := gaussian(8, 0.95)
	for _, c := range []Settings{
		{LivePoints: 200, PosteriorSamples: 20000},
		{LivePoints: 500, PosteriorSamples: 20000},
		{LivePoints: 2900},
		{LivePoints: 500},
		{LivePoints: 500, EvidenceError: 0.1},
		{LivePoints: 2000},
	} {
		c.Seed = 3
		b := time.Now()
		o, err := Run(context.Background(), p.target, c)
		if err != nil {
			t.Fatal(err)
		}
		t.Logf("%d %g %g: calls %d, points %d ess %.0f err %.4f boot %.4f z %.2f  rank %.3g %.3g %v %.1fs %v", c.LivePoints, c.EvidenceError, c.PosteriorSamples, o.Calls, len(o.Points), o.EffectiveSamples, o.LogEvidenceError, o.BootstrapError, (o.LogEvidence-p.want)/o.LogEvidenceError, o.InsertionRankP, o.InsertionRankBlockP, o.Phases, time.Since(b).Seconds(), o.Verdict)
	}
	_ = math.Pi
}
