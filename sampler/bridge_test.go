package sampler

import (
	"context"
	"errors"
	"fmt"
	"math"
	"reflect"
	"strings"
	"testing"

	"knell/internal/random"
)

// wallCut is a normalised Gaussian of width 0.05 that the wall at u₀ = 0 cuts
// half a width from its mean, correlated 0.8 with u₁, and u₂ flat: Z is the
// Gaussian's marginal share inside, Φ(½); the other walls are nine widths away.
func wallCut() *problem {
	const sigma, rho = 0.05, 0.8
	norm := -math.Log(2*math.Pi*sigma*sigma) - 0.5*math.Log(1-rho*rho)
	return &problem{
		name: "wall", dim: 3, live: 200, source: "closed form",
		want: math.Log(0.5 * math.Erfc(-0.5/math.Sqrt2)),
		logL: func(u []float64) float64 {
			x, y := (u[0]-sigma/2)/sigma, (u[1]-0.5)/sigma
			return norm - 0.5*(x*x-2*rho*x*y+y*y)/(1-rho*rho)
		},
	}
}

// heavyTail is a product of Cauchy densities of half-width 0.02 at the centre,
// each with 2/π atan(½/0.02) of its mass inside the cube.
func heavyTail(dim int) *problem {
	const gamma = 0.02
	return &problem{
		name: "heavy tail", dim: dim, live: 200, source: "closed form",
		want: float64(dim) * math.Log(2/math.Pi*math.Atan(0.5/gamma)),
		logL: func(u []float64) float64 {
			var l float64
			for _, x := range u {
				l -= math.Log(math.Pi * gamma * (1 + (x-0.5)*(x-0.5)/(gamma*gamma)))
			}
			return l
		},
	}
}

func flat(dim int) *problem {
	return &problem{
		name: "flat", dim: dim, live: 200, want: 0, source: "L = 1",
		logL: func([]float64) float64 { return 0 },
	}
}

// routes are the two further routes by name.
var routes = []struct {
	name string
	run  func(*Outcome, context.Context, func() (Target, error), RouteSettings) (Estimate, error)
}{
	{"bridge", (*Outcome).Bridge},
	{"importance", (*Outcome).Importance},
}

// routeProblem is a problem and the way of drawing its run is held to, 0 for none.
type routeProblem struct {
	*problem
	force method
}

// routeProblems are those of every go test; slices draw from the points there are,
// so that points have common starts.
func routeProblems() []routeProblem {
	ps := []routeProblem{
		{flat(3), 0}, {gaussian(2, 0.95), 0}, {gaussian(5, 0.95), 0}, {gaussian(10, 0.95), 0}, {twoModes(2, 0.015), 0},
		{wallCut(), 0}, {ridge(), 0}, {heavyTail(2), 0}, {hollow(), 0},
		{gaussian(2, 0.95), fromSlices}, {wallCut(), fromSlices},
	}
	for _, p := range ps {
		p.live = 150
		if p.force == fromSlices {
			p.name += " by slices"
		}
	}
	return ps
}

// TestRoutesAreCalibrated: over seeds, (ln Z - truth)/error of either route must
// look like a unit normal.
func TestRoutesAreCalibrated(t *testing.T) {
	n, sigmas := 8, 3.0
	if *long {
		n, sigmas = *seeds, 4 // as TestLong
	}
	for _, p := range routeProblems() {
		if !strings.HasPrefix(fmt.Sprintf("%s/%d", p.name, p.dim), *only) {
			continue
		}
		var y [2]tally
		var size, components, warned, apart [2]float64
		for seed := range n {
			key := random.New(uint64(seed), "routes "+p.name, uint64(p.dim)).Uint64()
			o, err := Run(context.Background(), p.target, Settings{Seed: key, LivePoints: p.live, Periodic: p.periodic, force: p.force})
			if err != nil {
				t.Fatal(err)
			}
			for i, route := range routes {
				e, err := route.run(o, context.Background(), p.target, RouteSettings{Seed: key, Draws: 1000, Periodic: p.periodic})
				if err != nil {
					t.Fatal(err)
				}
				if e.Calls != 1000 || e.Route != route.name {
					t.Fatalf("%s: %d calls by %q, want 1000", route.name, e.Calls, e.Route)
				}
				y[i].z = append(y[i].z, (e.LogEvidence-p.want)/e.Error)
				y[i].err += e.Error / float64(n)
				size[i] += e.EffectiveSamples / float64(n)
				components[i] += float64(e.Components) / float64(n)
				warned[i] += float64(len(e.Warnings))
				apart[i] += float64(len(Agree(o, e)))
			}
		}
		for i, route := range routes {
			mean, sd := meanSD(y[i].z)
			t.Logf("%-18s %2d %-10s %d seeds: pull %+.2f ± %.2f, sd %.2f, error %.4f, effective %4.0f, components %.1f, warnings %.0f, apart from the run %.0f",
				p.name, p.dim, route.name, n, mean, 1/math.Sqrt(float64(n)), sd, y[i].err, size[i], components[i], warned[i], apart[i])
			y[i].check(t, &problem{name: p.name + ", " + route.name, dim: p.dim}, sigmas)
			if y[i].err > 0.03 {
				t.Errorf("%s/%d, %s: mean error %.3f nat, want less than 0.03", p.name, p.dim, route.name, y[i].err)
			}
			// A density that falls short of the posterior somewhere is right to be warned
			// of, and rare.
			if warned[i] > 1+0.02*float64(n) {
				t.Errorf("%s/%d, %s: %.0f warnings in %d runs", p.name, p.dim, route.name, warned[i], n)
			}
			// 0.3 % of right runs are beyond 3 errors.
			if apart[i] > 1+0.02*float64(n) {
				t.Errorf("%s/%d, %s: %.0f of %d runs disagree", p.name, p.dim, route.name, apart[i], n)
			}
		}
	}
}

// With many draws importance sampling shows a density that is not normalised or
// a wrong share of the prior: the error is 2e-3 nat.
func TestImportanceHasNoBias(t *testing.T) {
	p := wallCut()
	o := finished(t, p)
	e, err := o.Importance(context.Background(), p.target, RouteSettings{Seed: 9, Draws: 100000, PriorShare: 0.3})
	if err != nil {
		t.Fatal(err)
	}
	t.Logf("log-evidence - truth = %.5f ± %.5f", e.LogEvidence-p.want, e.Error)
	if math.Abs(e.LogEvidence-p.want) > 3*e.Error || e.Error > 0.003 {
		t.Errorf("log-evidence %.5f ± %.5f, want %.5f", e.LogEvidence, e.Error, p.want)
	}
}

// finished is one short run of p.
func finished(t *testing.T, p *problem) *Outcome {
	t.Helper()
	o, err := Run(context.Background(), p.target, Settings{Seed: 1, LivePoints: p.live, Periodic: p.periodic})
	if err != nil {
		t.Fatal(err)
	}
	return o
}

func TestRoutesDoNotDependOnWorkers(t *testing.T) {
	p := ridge()
	p.live = 100
	o := finished(t, p)
	for _, route := range routes {
		var first Estimate
		for i, workers := range []int{1, 3, 16} {
			e, err := route.run(o, context.Background(), p.target, RouteSettings{Seed: 5, Draws: 300, Workers: workers, Periodic: p.periodic})
			if err != nil {
				t.Fatal(err)
			}
			if i == 0 {
				first = e
			} else if !reflect.DeepEqual(e, first) {
				t.Errorf("%s: %d workers give %+v, 1 gives %+v", route.name, workers, e, first)
			}
		}
		other, err := route.run(o, context.Background(), p.target, RouteSettings{Seed: 6, Draws: 300, Periodic: p.periodic})
		if err != nil {
			t.Fatal(err)
		}
		if other.LogEvidence == first.LogEvidence {
			t.Errorf("%s: another seed gives the same estimate", route.name)
		}
	}
}

func TestRoutesStop(t *testing.T) {
	p := gaussian(2, 0)
	p.live = 100
	o := finished(t, p)
	broken := errors.New("broken")
	for _, route := range routes {
		ctx, cancel := context.WithCancel(context.Background())
		q := *p
		q.logL = func(u []float64) float64 { cancel(); return p.logL(u) }
		if _, err := route.run(o, ctx, q.target, RouteSettings{}); !errors.Is(err, context.Canceled) {
			t.Errorf("%s cancelled: error %v, want %v", route.name, err, context.Canceled)
		}
		for _, bad := range []float64{math.NaN(), math.Inf(1)} {
			q.logL = func([]float64) float64 { return bad }
			var at *PointError
			if _, err := route.run(o, context.Background(), q.target, RouteSettings{}); !errors.As(err, &at) || len(at.Point) != 2 {
				t.Errorf("%s, likelihood %v: error %v, want a PointError", route.name, bad, err)
			}
		}
		q.logL = func([]float64) float64 { return math.Inf(-1) }
		if _, err := route.run(o, context.Background(), q.target, RouteSettings{}); err == nil || !strings.Contains(err.Error(), "zero") {
			t.Errorf("%s, zero likelihood: error %v", route.name, err)
		}
		if _, err := route.run(o, context.Background(), func() (Target, error) { return nil, broken }, RouteSettings{}); !errors.Is(err, broken) {
			t.Errorf("%s: error %v, want that of the target", route.name, err)
		}
		if _, err := route.run(o, context.Background(), flat(3).target, RouteSettings{}); err == nil {
			t.Errorf("%s: a target of other dimension gives no error", route.name)
		}
		if _, err := route.run(&Outcome{}, context.Background(), p.target, RouteSettings{}); err == nil {
			t.Errorf("%s: an outcome without points gives no error", route.name)
		}
		for _, s := range []RouteSettings{
			{Draws: 99}, {Draws: -1}, {Components: -1}, {PriorShare: -0.1}, {PriorShare: 1.1}, {PriorShare: math.NaN()},
			{Workers: -1}, {Periodic: []bool{true}},
		} {
			var setting *SettingError
			if _, err := route.run(o, context.Background(), p.target, s); !errors.As(err, &setting) {
				t.Errorf("%s, %+v: error %v, want a SettingError", route.name, s, err)
			}
		}
	}
}

// A run that knows one of two modes only: the routes' density misses the other.
// The other, of 0.7 of the evidence, is met by about twelve of the 400 prior
// draws: that must show as a weight that dominates and as a disagreement with the
// run, ln 0.3 by its own account.
func TestRoutesSayWhatIsMissing(t *testing.T) {
	both := twoModes(2, 0.05)
	one := gaussian(2, 0)
	one.live = 100
	one.logL = func(u []float64) float64 {
		if u[0]+u[1] > 1.2 {
			return math.Inf(-1)
		}
		return both.logL(u)
	}
	o := finished(t, one)
	e, err := o.Importance(context.Background(), both.target, RouteSettings{Seed: 2, Draws: 4000})
	if err != nil {
		t.Fatal(err)
	}
	if len(e.Warnings) == 0 || !strings.Contains(e.Warnings[0], "largest importance weight") {
		t.Errorf("%+v: want a warning of the largest weight", e)
	}
	if math.Abs(e.LogEvidence) > 4*e.Error {
		t.Errorf("log-evidence %.2f ± %.2f, want 0", e.LogEvidence, e.Error)
	}
	if math.Abs(o.LogEvidence-math.Log(0.3)) > 4*o.LogEvidenceError {
		t.Errorf("log-evidence of one mode %.2f ± %.2f, want ln 0.3", o.LogEvidence, o.LogEvidenceError)
	}
	if w := Agree(o, e); len(w) != 1 {
		t.Errorf("Agree: %q, want one warning", w)
	}
	o.Partial = true
	if e, err = o.Bridge(context.Background(), both.target, RouteSettings{Seed: 2}); err != nil || len(e.Warnings) != 1 || !strings.Contains(e.Warnings[0], "by itself") {
		t.Errorf("%+v, %v: want one warning of the unfinished run", e, err)
	}
}

func TestAgree(t *testing.T) {
	o := &Outcome{LogEvidence: 100, LogEvidenceError: 0.4}
	for _, c := range []struct {
		gap  float64
		want int
	}{{1.4, 0}, {-1.4, 0}, {1.6, 1}, {-1.6, 1}, {math.NaN(), 1}} {
		// Combined error 0.5: the limit is at 1.5.
		got := Agree(o, Estimate{Route: "bridge", LogEvidence: 100 + c.gap, Error: 0.3}, Estimate{LogEvidence: 100})
		if len(got) != c.want || c.want == 1 && !strings.Contains(got[0], "bridge") {
			t.Errorf("difference %g: %q, want %d warnings", c.gap, got, c.want)
		}
	}
	if got := Agree(&Outcome{}, Estimate{LogEvidence: 1e-15}); len(got) != 0 {
		t.Errorf("rounding without errors: %q", got)
	}
}

// histories against weigh: both average the same volumes, so the mean weights
// agree; and given all the rest the weight of a point is that of an exponential
// variate, of relative variance 1, which midpoints halve.
func TestHistories(t *testing.T) {
	p := hollow()
	p.live = 200
	o := finished(t, p)
	const n = 400
	mean := make([]float64, len(o.Points))
	rough := make([]float64, n)
	all := make([][]float64, n)
	o.histories(3, n, 1, func(r int, weight []float64) {
		s := newSample(o.Points, weight)
		all[r] = s.weight
		// Differences of neighbours see the points' own noise, not the shared one.
		var square, norm float64
		for i := 1; i < len(weight); i += 2 {
			d := s.weight[i] - s.weight[i-1]
			square += d * d
			w := math.Exp(o.LogWeight[i]) + math.Exp(o.LogWeight[i-1])
			norm += w * w / 2
		}
		rough[r] = square / norm
	})
	for _, w := range all {
		for i := range mean {
			mean[i] += w[i] / n
		}
	}
	var shift float64
	for i, m := range mean {
		shift += math.Abs(m-math.Exp(o.LogWeight[i])) / 2
	}
	// Each mean has a relative error near 1/√400, times √(2/π)/2 in the sum;
	// twice that for what histories share.
	if limit := 2 * 0.4 / math.Sqrt(n); shift > limit {
		t.Errorf("mean weights differ from those of weigh by %.3f in total variation, want at most %.3f", shift, limit)
	}
	// E(d²) = 2 w²: 1 in units of norm; with midpoints a quarter of it. The
	// weights' steps from point to point are small.
	if m, _ := meanSD(rough); math.Abs(m-1) > 0.15 {
		t.Errorf("square difference of neighbours %.2f, want 1", m)
	}
}
