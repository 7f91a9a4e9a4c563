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
	long       = flag.Bool("long", false, "run the long calibration of the evidences")
	seeds      = flag.Int("seeds", 60, "seeds per problem of the long calibration")
	only       = flag.String("only", "", "problems of the long calibration, by prefix of name/dim")
	force      = flag.String("force", "", "way of drawing of the long calibration: ellipsoids or slices")
	sliceSteps = flag.Int("slice-steps", 0, "slice steps of the long calibration, 0 for the default")
	live       = flag.Int("live", 0, "live points of the long calibration, 0 for the problem's own")
)

// tally gathers the runs of one problem with different seeds.
type tally struct {
	z     []float64
	rankP []float64
	rank  []float64 // all insertion ranks, on [0, 1)
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
		y.rank = append(y.rank, o.ranks...)
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
	edge, edgeErr := y.edge()
	fmt.Fprintf(&b, "%-20s %3d %4d  %+6.2f ± %.2f  %5.2f ± %.2f  %+.3f %.3f %9.0f  rank KS p %.3f  edge %+.5f ± %.5f  warn %d ", p.name, p.dim, len(y.z),
		mean, 1/math.Sqrt(n), sd, 1/math.Sqrt(2*(n-1)), y.dz, y.err, y.calls, uniformP(y.rankP), edge, edgeErr, y.warn)
	for _, m := range methodNames[1:] {
		if ph := y.phase[m]; ph != nil {
			fmt.Fprintf(&b, " %s %.1f×%.0f", m, float64(ph.Calls)/float64(ph.Points), float64(ph.Points)/n)
		}
	}
	return b.String()
}

// edge estimates the share of the volume, at its edge, that is never drawn, and
// its standard error. A share f raises the mean rank by f/2, and the
// log-evidence by f times the information. Of all tests here it sees the least
// leak of the ellipsoids; to slices that stay near their start it is blind.
func (y tally) edge() (share, err float64) {
	rank, _ := meanSD(y.rank)
	return 2 * (rank - 0.5), 2 / math.Sqrt(12*float64(len(y.rank)))
}

// shortRuns are the problems of every go test, with live points that keep it
// short.
func shortRuns() []*problem {
	ps := []*problem{
		gaussian(2, 0.95), gaussian(8, 0.95), gaussian(12, 0.95),
		shells(2, -1.745642), eggbox(), rosenbrock(2, -5.804132), logGamma(2),
		twoModes(5, 0.03), plateau(), steps(), hollow(), ridge(), spikeAndSlab(5),
	}
	for _, p := range ps {
		p.live = 200
	}
	return ps
}

// TestEvidenceIsCalibrated: over seeds, (ln Z - truth)/error must look like a
// unit normal, for each problem and for all together. -long runs more problems,
// more seeds and more live points.
func TestEvidenceIsCalibrated(t *testing.T) {
	const n, sigmas = 8, 4
	var all, rankP []float64
	for _, p := range shortRuns() {
		y := calibrate(t, p, n, Settings{})
		t.Log(y.row(p))
		y.check(t, p, sigmas)
		all = append(all, y.z...)
		rankP = append(rankP, y.rankP...)
	}
	tally{z: all, rankP: rankP}.check(t, &problem{name: "all problems"}, sigmas)
}

// check fails t if the mean or the spread of z is off by more than k standard
// errors, 1/√n of the mean and √(2/n) of the mean square.
func (y tally) check(t *testing.T, p *problem, k float64) {
	t.Helper()
	var mean, square float64
	n := float64(len(y.z))
	for _, z := range y.z {
		mean += z / n
		square += z * z / n
	}
	if math.Abs(mean) > k/math.Sqrt(n) {
		t.Errorf("%s/%d: mean z = %.2f, want 0 ± %.2f", p.name, p.dim, mean, k/math.Sqrt(n))
	}
	// For few seeds the mean square is skewed: the upper limit of a chi-squared
	// of n degrees at k sigmas by its cube-root normal approximation.
	c := 1 - 2/(9*n)
	if hi, lo := math.Pow(c+k*math.Sqrt(2/(9*n)), 3), math.Pow(max(0, c-k*math.Sqrt(2/(9*n))), 3); square > hi || square < lo {
		t.Errorf("%s/%d: mean square of z = %.2f, want 1 within [%.2f, %.2f]", p.name, p.dim, square, lo, hi)
	}
	if share, err := y.edge(); len(y.rank) > 0 && math.Abs(share) > k*err+1/float64(p.live) {
		t.Errorf("%s/%d: a share %.4f ± %.4f of the volume is not drawn, want at most 1/%d", p.name, p.dim, share, err, p.live)
	}
	if q := uniformP(y.rankP); q < 1e-4 {
		t.Errorf("%s/%d: insertion-rank p-values are not uniform: p = %.2g", p.name, p.dim, q)
	}
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
	s.SliceSteps = *sliceSteps
	for _, p := range problems() {
		if !strings.HasPrefix(fmt.Sprintf("%s/%d", p.name, p.dim), *only) {
			continue
		}
		y := calibrate(t, p, *seeds, s)
		fmt.Println(y.row(p))
		y.check(t, p, 4)
	}
}
