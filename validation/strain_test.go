package validation

import (
	"context"
	"fmt"
	"math"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"

	"gonum.org/v1/gonum/mat"
	"gonum.org/v1/gonum/stat"

	"knell/internal/event"
	"knell/internal/report"
)

// strainFolder names the environment variable of the folder with real strain: one
// file *H1*.hdf5 and one *L1*.hdf5, 32 s each.
const strainFolder = "KNELL_OPEN_STRAIN"

// openEvent is the event file for the real strain, to be filled with the paths.
// Time at H1, sky position and polarisation: arXiv:1905.00869. The remnant is
// seen nearly face-off, which leaves its inclination near pi.
const openEvent = `
title = "Real strain of one loud merger"
seed  = 71

[event]
time         = 1126259462.423
time_at      = "H1"
sky          = { right_ascension = 1.95, declination = -1.27 }
polarization = 0.82
inclination  = 2.8

[[site]]
code   = "H1"
strain = %q
noise  = { from = "data", average = "median", segment = 2.0 }

[[site]]
code   = "L1"
strain = %q
noise  = { from = "data", average = "median", segment = 2.0 }

[analysis]
sample_rate = 2048.0
duration    = 2.0
band        = [30.0, 900.0]
start       = 0.003
gate        = 0.25

[sampler]
live_points    = 400
evidence_error = 1.0

[[hypothesis]]
name  = "horizon"
model = "ringdown"
modes = ["2,2,0"]

[prior]
mass      = { kind = "uniform", low = 40.0, high = 140.0 }
spin      = { kind = "uniform", low = 0.0, high = 0.98 }
amplitude = { kind = "uniform", low = 0.0, high = 1e-20 }
`

func openStrain(t *testing.T) (h1, l1 string) {
	t.Helper()
	folder := os.Getenv(strainFolder)
	if folder == "" {
		t.Skip("the environment variable " + strainFolder + " names no folder with real strain")
	}
	find := func(site string) string {
		found, err := filepath.Glob(filepath.Join(folder, "*"+site+"*.hdf5"))
		if err != nil || len(found) != 1 {
			t.Fatalf("%s: %d files *%s*.hdf5, want one", folder, len(found), site)
		}
		path, err := filepath.Abs(found[0])
		if err != nil {
			t.Fatal(err)
		}
		return path
	}
	return find("H1"), find("L1")
}

// weighOpen weighs the event file after the replacements, old and new in turn.
func weighOpen(t *testing.T, replace ...string) (*report.Weighing, report.Posterior) {
	t.Helper()
	h1, l1 := openStrain(t)
	text := strings.NewReplacer(replace...).Replace(fmt.Sprintf(openEvent, h1, l1))
	c, err := event.Decode("open.toml", []byte(text))
	if err != nil {
		t.Fatal(err)
	}
	p, err := event.Load(c)
	if err != nil {
		t.Fatal(err)
	}
	w, posteriors, err := p.Weigh(context.Background(), event.Options{})
	if err != nil {
		t.Fatal(err)
	}
	return w, posteriors[0]
}

// column is one column of a posterior.
func column(t *testing.T, p report.Posterior, name string) []float64 {
	t.Helper()
	i := slices.Index(p.Columns, name)
	if i < 0 {
		t.Fatalf("no posterior column %s among %v", name, p.Columns)
	}
	return p.Values[i]
}

func quantile(x []float64, levels ...float64) []float64 {
	sorted := slices.Clone(x)
	slices.Sort(sorted)
	out := make([]float64, len(levels))
	for i, level := range levels {
		out[i] = stat.Quantile(level, stat.Empirical, sorted, nil)
	}
	return out
}

// credibleLevel is the share of the samples (x, y) where their density is higher
// than at the point: a density estimate with a Gaussian kernel of the samples'
// own covariance, narrowed by n^(-1/6), the rule for two dimensions.
func credibleLevel(x, y []float64, atX, atY float64) float64 {
	n := float64(len(x))
	cov := mat.NewSymDense(2, []float64{
		stat.Variance(x, nil), stat.Covariance(x, y, nil),
		stat.Covariance(x, y, nil), stat.Variance(y, nil),
	})
	var chol mat.Cholesky
	if !chol.Factorize(cov) {
		return math.NaN()
	}
	var inverse mat.SymDense
	if err := chol.InverseTo(&inverse); err != nil {
		return math.NaN()
	}
	width := math.Pow(n, -1.0/6)
	a, b, c := inverse.At(0, 0)/(width*width), inverse.At(0, 1)/(width*width), inverse.At(1, 1)/(width*width)
	density := func(px, py float64) float64 {
		sum := 0.0
		for i := range x {
			dx, dy := x[i]-px, y[i]-py
			sum += math.Exp(-0.5 * (a*dx*dx + 2*b*dx*dy + c*dy*dy))
		}
		return sum
	}
	here, above := density(atX, atY), 0.0
	for i := range x {
		if density(x[i], y[i]) > here {
			above++
		}
	}
	return above / n
}

func TestCredibleLevel(t *testing.T) {
	// A grid of equal-weight points of a disc: the density falls outwards only
	// by the kernel, and far away there is none.
	var x, y []float64
	for i := -20; i <= 20; i++ {
		for j := -20; j <= 20; j++ {
			if i*i+j*j <= 400 {
				// Denser towards the centre.
				r := math.Hypot(float64(i), float64(j)) / 20
				x, y = append(x, float64(i)*r), append(y, float64(j)*r)
			}
		}
	}
	if v := credibleLevel(x, y, 0, 0); v > 0.02 {
		t.Errorf("the centre is at level %g, want near 0", v)
	}
	// Radius r^2/20 for a uniform disc in r: half of the points within r^2 = 200.
	if v := credibleLevel(x, y, 10, 0); math.Abs(v-0.5) > 0.08 {
		t.Errorf("the circle with half of the points is at level %g", v)
	}
	if v := credibleLevel(x, y, 100, 0); v != 1 {
		t.Errorf("far away is at level %g, want 1", v)
	}
}

// Three milliseconds after the peak, one mode finds the remnant that the whole
// signal gave.
func TestRemnantOfRealStrain(t *testing.T) {
	w, p := weighOpen(t)
	h := w.Hypotheses[0]
	t.Logf("ln Z over noise %.2f ± %.2f, %d calls, %s", h.LogEvidenceOver, h.LogEvidenceError, h.Calls, h.Verdict)
	for _, s := range h.Summary {
		t.Logf("%s: %.4g, 90 %% from %.4g to %.4g %s", s.Parameter, s.Median, s.Low90, s.High90, s.Unit)
	}
	// "Decisive" in any reading; the width of the priors is counted against it.
	if h.LogEvidenceOver < 5 {
		t.Errorf("ln Z over noise = %.2f, want above 5", h.LogEvidenceOver)
	}
	// arXiv:1602.03840 and arXiv:1606.04856.
	const mass, spin = 68, 0.69
	level := credibleLevel(column(t, p, "mass"), column(t, p, "spin"), mass, spin)
	t.Logf("mass %d and spin %g are on the edge of the %.0f %% region", mass, spin, 100*level)
	if !(level < 0.9) {
		t.Errorf("mass %d and spin %g lie outside the 90 %% region (level %.3f)", mass, spin, level)
	}
	for _, tc := range []struct {
		column string
		want   float64
	}{
		// arXiv:1602.03841.
		{"frequency_220", 251},
		{"damping_time_220", 0.004},
	} {
		q := quantile(column(t, p, tc.column), 0.05, 0.5, 0.95)
		t.Logf("%s: published %g, found %.4g from %.4g to %.4g", tc.column, tc.want, q[1], q[0], q[2])
		if tc.want < q[0] || tc.want > q[2] {
			t.Errorf("%s: published %g lies outside %.4g to %.4g", tc.column, tc.want, q[0], q[2])
		}
	}
}

// The same settings on strain before the event find nothing.
func TestNothingBeforeRealEvent(t *testing.T) {
	for _, time := range []string{"1126259454.423", "1126259458.423"} {
		w, _ := weighOpen(t, "1126259462.423", time, "live_points    = 400", "live_points    = 150")
		h := w.Hypotheses[0]
		t.Logf("at %s: ln Z over noise %.2f ± %.2f, largest ln L %.2f", time, h.LogEvidenceOver, h.LogEvidenceError, h.MaxLogLikelihood)
		if h.LogEvidenceOver > 3 {
			t.Errorf("at %s: ln Z over noise = %.2f, want below 3", time, h.LogEvidenceOver)
		}
	}
}
