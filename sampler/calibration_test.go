package sampler

import (
	"context"
	"flag"
	"fmt"
	"math"
	"strings"
	"testing"

	"knell/internal/random"
)

var (
	long  = flag.Bool("long", false, "run the long calibration of the evidences")
	seeds = flag.Int("seeds", 60, "seeds per problem of the long calibration")
	only  = flag.String("only", "", "problems of the long calibration, by prefix of name/dim")
	force = flag.String("force", "", "way of drawing of the long calibration: ellipsoids or slices")
	live  = flag.Int("live", 0, "live points of the long calibration, 0 for the problem's own")
)

// tally gathers the runs of one problem with different seeds.
type tally struct {
	z     []float64
	rankP []float64
	dz    float64
	err   float64
	calls float64
	phase map[string]*Phase
	warn  int
}

func calibrate(t testing.TB, p *problem, n int, s Settings) tally {
	y := tally{phase: map[string]*Phase{}}
	for seed := range n {
		// Of its own for each problem, so that problems are independent.
		s.Seed = random.New(uint64(seed), p.name, uint64(p.dim)).Uint64()
		s.Periodic = p.periodic
		if s.LivePoints == 0 {
			s.LivePoints = p.live
		}
		o, err := Run(context.Background(), p.target, s)
		if err != nil {
			t.Fatal(err)
		}
		y.z = append(y.z, (o.LogEvidence-p.want)/o.LogEvidenceError)
		y.dz += (o.LogEvidence - p.want) / float64(n)
		y.err += o.LogEvidenceError / float64(n)
		y.rankP = append(y.rankP, o.InsertionRankP)
		y.calls += float64(o.Calls) / float64(n)
		y.warn += len(o.Warnings)
		for _, ph := range o.Phases {
			if y.phase[ph.Name] == nil {
				y.phase[ph.Name] = &Phase{}
			}
			y.phase[ph.Name].Calls += ph.Calls
			y.phase[ph.Name].Points += ph.Points
		}
	}
	return y
}

// row formats a line of the table.
func (y tally) row(p *problem) string {
	mean, sd := meanSD(y.z)
	n := float64(len(y.z))
	var b strings.Builder
	fmt.Fprintf(&b, "%-15s %3d %4d  %+6.2f ± %.2f  %5.2f ± %.2f  %+.3f %.3f %9.0f  rank KS p %.3f  warn %d ", p.name, p.dim, len(y.z),
		mean, 1/math.Sqrt(n), sd, 1/math.Sqrt(2*(n-1)), y.dz, y.err, y.calls, uniformP(y.rankP), y.warn)
	for _, m := range methodNames[1:] {
		if ph := y.phase[m]; ph != nil {
			fmt.Fprintf(&b, " %s %.1f×%.0f", m, float64(ph.Calls)/float64(ph.Points), float64(ph.Points)/n)
		}
	}
	return b.String()
}

// TestLong prints the calibration table and checks it.
func TestLong(t *testing.T) {
	if !*long {
		t.Skip("the long calibration runs with -long")
	}
	var s Settings
	for m, name := range methodNames {
		if *force != "" && name == *force {
			s.force = method(m)
		}
	}
	s.LivePoints = *live
	for _, p := range problems() {
		if !strings.HasPrefix(fmt.Sprintf("%s/%d", p.name, p.dim), *only) {
			continue
		}
		y := calibrate(t, p, *seeds, s)
		fmt.Println(y.row(p))
	}
}
