package sampler

import (
	"fmt"
	"math"
	"testing"
)

// moments returns E[Z] and E[Z²] of the sum of L_k (X_(k-1) - X_k) over k with
// constant live number n (arXiv:1102.0996; they follow from the moments n/(n+1),
// n/(n+2) of Beta(n, 1)).
func moments(logL []float64, n float64) (z, z2 float64) {
	var inner float64
	for k, l := range logL {
		like := math.Exp(l)
		a := math.Pow(n/(n+1), float64(k+1))
		inner += math.Exp(l) * math.Pow((n+1)/(n+2), float64(k+1))
		z += like * a / n
		z2 += 2 * like * a * inner / (n * (n + 1))
	}
	return z, z2
}

func TestEvidenceAgainstExactMoments(t *testing.T) {
	// A Gaussian in 4 dimensions with ideal dead points, ln X_k = -k/n.
	const n, steps, dim = 400, 400 * 16, 4
	o := &Outcome{seed: 3, LivePoints: n, Runs: 1, PriorDraws: n}
	for k := range steps {
		r2 := math.Exp(2 * (-float64(k+1) / n) / dim)
		o.LogLikelihood = append(o.LogLikelihood, -50*r2)
		o.LiveCount = append(o.LiveCount, n)
	}
	o.weigh(2)
	z, z2 := moments(o.LogLikelihood, n)
	relative := math.Sqrt(z2/(z*z) - 1) // sd of Z over its mean
	// The midpoint volumes lie half a step, 1/2n, above those of the moments;
	// E ln Z lies half a variance below ln E Z. 160 histories know the mean to
	// relative/√500 and the sd to 1/√1000 of itself: four of each.
	want := math.Log(z) - 0.5*relative*relative
	if d := o.LogEvidence - want; math.Abs(d) > 4*relative/math.Sqrt(realisations)+1.0/n {
		t.Errorf("ln Z = %.5f, want %.5f from the exact moments", o.LogEvidence, want)
	}
	if r := o.LogEvidenceError / relative; math.Abs(r-1) > 4/math.Sqrt(2*realisations) {
		t.Errorf("error %.4f, want %.4f from the exact moments", o.LogEvidenceError, relative)
	}
	// H = <ln L> - ln Z by the same weights as expectations.
	if math.Abs(o.FormulaError/o.LogEvidenceError-1) > 0.25 {
		t.Errorf("sqrt(H/n) = %.4f is far from the simulated error %.4f", o.FormulaError, o.LogEvidenceError)
	}
	checkWeights(t, o)
}

// Deep runs must not underflow: X falls to e^-2000 here.
func TestEvidenceOfADeepRun(t *testing.T) {
	const n = 100
	o := &Outcome{seed: 3, LivePoints: n, Runs: 1, PriorDraws: n}
	for k := range 2000 * n {
		o.LogLikelihood = append(o.LogLikelihood, 1e6+min(float64(k)/n*1.5, 2940))
		o.LiveCount = append(o.LiveCount, n)
	}
	o.weigh(1)
	if math.IsNaN(o.LogEvidence) || math.IsInf(o.LogEvidence, 0) || !(o.LogEvidenceError > 0) {
		t.Fatalf("ln Z = %g ± %g", o.LogEvidence, o.LogEvidenceError)
	}
	// L = e^(1e6 + 1.5 s) at X = e^-s up to s = 1960, flat beyond:
	// Z e^-1e6 = ∫ e^(0.5 s) ds + e^(2940 - 1960) = 3 e^980.
	want := 1e6 + 980 + math.Log(3)
	if z := (o.LogEvidence - want) / o.LogEvidenceError; math.Abs(z) > 0.2 {
		t.Errorf("ln Z = %g, want %g (error %g)", o.LogEvidence, want, o.LogEvidenceError)
	}
}

// The zeros among the first draws are a plateau of known statistics.
func TestPriorShrinkage(t *testing.T) {
	for _, tc := range []struct {
		draws, zeros int64
		open         bool
	}{{1000, 500, false}, {100000, 99500, true}, {40, 39, false}} {
		t.Run(fmt.Sprint(tc), func(t *testing.T) {
			o := &Outcome{PriorDraws: tc.draws, PriorZeros: tc.zeros, openEnded: tc.open}
			s := o.priorShrinkage()
			// Removed one by one: ln X = -Σ 1/j over the live numbers j, which
			// run from draws down to zeros removed; variance Σ 1/j².
			var mean, variance float64
			for i := range tc.zeros {
				j := float64(tc.draws - i)
				if tc.open {
					j--
				}
				mean -= 1 / j
				variance += 1 / (j * j)
			}
			if math.Abs(s.mean-mean) > 1e-9*math.Abs(mean) {
				t.Errorf("mean %.12g, want %.12g", s.mean, mean)
			}
			o.LogLikelihood, o.LiveCount, o.LivePoints = []float64{0}, []int{1}, 1
			o.weigh(1)
			if math.Abs(o.LogEvidence-mean) > 4*math.Sqrt(variance/realisations) {
				t.Errorf("ln Z = %g, want %g", o.LogEvidence, mean)
			}
			// Skewed for a single survivor: the sd of the sd is larger there.
			if r := o.LogEvidenceError / math.Sqrt(variance); math.Abs(r-1) > 0.2 {
				t.Errorf("error %g, want %g", o.LogEvidenceError, math.Sqrt(variance))
			}
		})
	}
}
