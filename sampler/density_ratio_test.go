package sampler

import (
	"context"
	"errors"
	"math"
	"reflect"
	"strings"
	"testing"

	"knell/internal/random"
)

// nestedPair is a full hypothesis in 3 dimensions, a Gaussian of width 0.1 around
// mean in u₀ and of widths 0.1 around ½, correlated 0.6, in the other two. The hypothesis
// that fixes u₀ has the conditional likelihood. The evidences are those of the
// factor in u₀: full ∫ N over [0, 1], nested N(at).
func nestedPair(mean float64) *problem {
	const sigma, rho = 0.1, 0.6
	norm := -math.Log(2*math.Pi*sigma*sigma) - 0.5*math.Log(1-rho*rho)
	return &problem{
		name: "nested pair", dim: 3, live: 150,
		want: math.Log(normalCDF((1-mean)/sigma) - normalCDF(-mean/sigma)), source: "closed form",
		logL: func(u []float64) float64 {
			x, y, z := (u[0]-mean)/sigma, (u[1]-0.5)/sigma, (u[2]-0.5)/sigma
			return norm - 0.5*(y*y-2*rho*y*z+z*z)/(1-rho*rho) - 0.5*x*x - 0.5*math.Log(2*math.Pi*sigma*sigma)
		},
	}
}

// at is ln of the factor in u₀ of the nested hypothesis.
func (p *problem) at(mean, at float64) float64 {
	const sigma = 0.1
	return -0.5*(at-mean)*(at-mean)/(sigma*sigma) - 0.5*math.Log(2*math.Pi*sigma*sigma)
}

func normalCDF(x float64) float64 { return 0.5 * math.Erfc(-x/math.Sqrt2) }

// ratioCase has the log posterior density of coordinate 0 at a value.
type ratioCase struct {
	name     string
	p        *problem
	at       float64
	want     float64
	periodic bool
	force    method // the way of drawing, 0 for none
}

func ratioCases() []ratioCase {
	var cases []ratioCase
	for _, c := range []struct {
		name     string
		mean, at float64
	}{
		{"inside, at the peak", 0.4, 0.4},
		{"inside, two widths off", 0.4, 0.6},
		{"at the edge, near the peak", 0.05, 0},
		{"at the edge, one width beyond the peak", 0.1, 0},
		{"at the upper edge, two widths off", 0.8, 1},
	} {
		p := nestedPair(c.mean)
		cases = append(cases, ratioCase{c.name, p, c.at, p.at(c.mean, c.at) - p.want, false, 0})
	}
	// An exponential of mean 0.1 that ends at the wall: e^(-10u) 10/(1-e^-10).
	exponential := &problem{dim: 2, live: 150, logL: func(u []float64) float64 {
		return -10*u[0] - 50*(u[1]-0.5)*(u[1]-0.5)
	}}
	cases = append(cases, ratioCase{"exponential at the edge", exponential, 0, math.Log(-10 / math.Expm1(-10)), false, 0})
	// exp(4 cos 2πu) over the circle has the mean I₀(4) = 11.30192195213633 (40 digits by series).
	circle := &problem{dim: 2, live: 150, periodic: []bool{true, false}, logL: func(u []float64) float64 {
		return 4*math.Cos(2*math.Pi*u[0]) - 50*(u[1]-0.5)*(u[1]-0.5)
	}}
	cases = append(cases, ratioCase{"periodic, at the cut", circle, 0, 4 - math.Log(11.30192195213633), true, 0})
	slices := nestedPair(0.4)
	cases = append(cases, ratioCase{"inside, one width off, by slices", slices, 0.5, slices.at(0.4, 0.5) - slices.want, false, fromSlices})
	return append(cases, ratioCase{"flat, at the edge", flat(2), 1, 0, false, 0})
}

// TestSavageDickeyIsCalibrated: over seeds, (estimate - truth)/error must look
// like a unit normal.
func TestSavageDickeyIsCalibrated(t *testing.T) {
	n, sigmas := 8, 3.0
	if *long {
		n, sigmas = *seeds, 4 // as TestLong
	}
	for _, c := range ratioCases() {
		var y tally
		var size, near float64
		warned := 0
		for seed := range n {
			key := random.New(uint64(seed), c.name).Uint64()
			o, err := Run(context.Background(), c.p.target, Settings{Seed: key, LivePoints: c.p.live, Periodic: c.p.periodic, force: c.force})
			if err != nil {
				t.Fatal(err)
			}
			r, err := o.SavageDickey(0, c.at, RatioSettings{Seed: key, Periodic: c.periodic})
			if err != nil {
				t.Fatal(err)
			}
			y.z = append(y.z, (r.LogBayesFactor-c.want)/r.Error)
			y.err += r.Error / float64(n)
			size += r.EffectiveSamples / float64(n)
			near += r.Near / float64(n)
			warned += len(r.Warnings)
		}
		mean, sd := meanSD(y.z)
		t.Logf("%-40s %d seeds: pull %+.2f ± %.2f, sd %.2f, error %.4f, effective %4.0f, near %4.0f, warnings %d",
			c.name, n, mean, 1/math.Sqrt(float64(n)), sd, y.err, size, near, warned)
		y.check(t, &problem{name: c.name}, sigmas)
	}
}

// The nested hypothesis as a run of its own: the difference of the two
// log-evidences is the log Bayes factor. Both sides against each other, within 4
// combined errors.
func TestSavageDickeyAgainstTwoRuns(t *testing.T) {
	const at = 0.5
	full := nestedPair(0.4)
	nested := &problem{dim: 2, live: 150, logL: func(u []float64) float64 { return full.logL([]float64{at, u[0], u[1]}) }}
	a, b := finished(t, full), finished(t, nested)
	r, err := a.SavageDickey(0, at, RatioSettings{})
	if err != nil {
		t.Fatal(err)
	}
	want := b.LogEvidence - a.LogEvidence
	sigma := math.Sqrt(r.Error*r.Error + a.LogEvidenceError*a.LogEvidenceError + b.LogEvidenceError*b.LogEvidenceError)
	t.Logf("density ratio %.3f ± %.3f, two runs %.3f ± %.3f", r.LogBayesFactor, r.Error, want, math.Hypot(a.LogEvidenceError, b.LogEvidenceError))
	if math.Abs(r.LogBayesFactor-want) > 4*sigma {
		t.Errorf("density ratio %.3f, two runs %.3f, want equal within %.3f", r.LogBayesFactor, want, 4*sigma)
	}
}

// exact is an outcome of equal-weight points at given places of one coordinate.
func exact(u []float64) *Outcome {
	o := &Outcome{LivePoints: len(u), Runs: 1}
	for i, x := range u {
		o.Points = append(o.Points, []float64{x})
		o.LogLikelihood = append(o.LogLikelihood, 0)
		o.LogWeight = append(o.LogWeight, -math.Log(float64(len(u))))
		o.LiveCount = append(o.LiveCount, len(u)-i)
	}
	return o
}

// Points at the quantiles of a truncated Gaussian and of an exponential carry no
// noise, so what is left is the bias: none for ln f quadratic, but for the
// quantiles' own 1/n.
func TestLocalLikelihoodHasNoBias(t *testing.T) {
	const n = 4000
	var gauss, exponential []float64
	low := normalCDF(-1.0)
	for i := range n {
		p := (float64(i) + 0.5) / n
		gauss = append(gauss, 0.1+0.1*math.Sqrt2*math.Erfinv(2*(low+p*(1-low))-1))
		exponential = append(exponential, -math.Log1p(p*math.Expm1(-10))/10)
	}
	for _, c := range []struct {
		name     string
		u        []float64
		at, want float64
	}{
		{"Gaussian one width from the wall, at the wall", gauss, 0, -0.5 - math.Log(0.1*math.Sqrt(2*math.Pi)*(1-low))},
		{"the same, at the peak", gauss, 0.1, -math.Log(0.1 * math.Sqrt(2*math.Pi) * (1 - low))},
		{"exponential, at the wall", exponential, 0, math.Log(-10 / math.Expm1(-10))},
	} {
		for _, window := range []float64{0.25, 0.5, 0.8} {
			r, err := exact(c.u).SavageDickey(0, c.at, RatioSettings{Window: window})
			if err != nil {
				t.Fatal(err)
			}
			if math.Abs(r.LogBayesFactor-c.want) > 2e-3 {
				t.Errorf("%s, window %g: %.5f, want %.5f", c.name, window, r.LogBayesFactor, c.want)
			}
		}
	}
}

func TestSavageDickeyWarns(t *testing.T) {
	p := nestedPair(0.3)
	o := finished(t, p)
	has := func(at float64, s RatioSettings, part string) {
		t.Helper()
		r, err := o.SavageDickey(0, at, s)
		if err != nil {
			t.Fatal(err)
		}
		if !strings.Contains(strings.Join(r.Warnings, "\n"), part) {
			t.Errorf("at %g: warnings %q, want one with %q", at, r.Warnings, part)
		}
	}
	has(0.75, RatioSettings{}, "near the nested value") // 4.5 widths off
	// Two narrow peaks in one window.
	var u []float64
	for i := range 2000 {
		u = append(u, 0.45+0.1*float64(i%2)+0.004*math.Sqrt2*math.Erfinv(2*(float64(i)+0.5)/2000-1))
	}
	peaks := o
	o = exact(u)
	has(0.45, RatioSettings{Window: 0.9}, "half the window")
	o = peaks
	o.Partial = true
	has(0.3, RatioSettings{}, "unfinished")
}

func TestSavageDickeyRefuses(t *testing.T) {
	p := flat(2)
	p.live = 100
	o := finished(t, p)
	var setting *SettingError
	for _, c := range []struct {
		dimension int
		at        float64
		s         RatioSettings
	}{
		{-1, 0.5, RatioSettings{}}, {2, 0.5, RatioSettings{}}, {0, -0.1, RatioSettings{}}, {0, 1.1, RatioSettings{}},
		{0, math.NaN(), RatioSettings{}}, {0, 0.5, RatioSettings{Window: 1}}, {0, 0.5, RatioSettings{Window: math.NaN()}}, {0, 0.5, RatioSettings{Workers: -1}},
	} {
		if _, err := o.SavageDickey(c.dimension, c.at, c.s); !errors.As(err, &setting) {
			t.Errorf("%+v: error %v, want a SettingError", c, err)
		}
	}
	if _, err := (&Outcome{}).SavageDickey(0, 0.5, RatioSettings{}); err == nil {
		t.Error("an outcome without points gives no error")
	}
	a, err := o.SavageDickey(0, 0.5, RatioSettings{Seed: 1})
	if err != nil {
		t.Fatal(err)
	}
	b, err := o.SavageDickey(0, 0.5, RatioSettings{Seed: 1, Workers: 7})
	if err != nil || !reflect.DeepEqual(a, b) {
		t.Errorf("7 workers give %+v, %v; 1 gives %+v", b, err, a)
	}
}
