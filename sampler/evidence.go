package sampler

import (
	"math"
	"sync"

	"gonum.org/v1/gonum/mathext"
	"gonum.org/v1/gonum/stat/distuv"

	"knell/internal/random"
)

const (
	realisations = 160 // simulated shrinkage histories
	chunks       = 10  // they are spread over, whatever the number of workers
)

// weigh simulates the shrinkage of the prior volume and sets LogEvidence, its
// error, Information, LogWeight and EffectiveSamples.
//
// Each history draws t_i ~ Beta(n_i, 1) for every dead point and has volumes
// X_i = t_1 ... t_i. Point i stands for the volume between the midpoints of
// (X_(i-1), X_i) and (X_i, X_(i+1)); the first and the last also take what is
// outside. Points of a plateau need no rule of their own: they were removed one
// by one with a falling live number (arXiv:2010.13884). The prior draws of zero
// likelihood are such a plateau, whose shrinkage is one Beta draw.
func (o *Outcome) weigh(workers int) {
	n := len(o.LogLikelihood)
	// In units of its expectation exp(mean_i) each X_i is of order one, so that
	// nothing underflows however deep the run.
	start := o.priorShrinkage()
	down := make([]float64, n+1) // exp(-1/n_i), X_i over X_(i-1) in those units
	scale := make([]float64, n)  // L_i X_i over the largest, in those units
	up := make([]float64, n)     // one over down
	inverse := make([]float64, n)
	mean, top := start.mean, math.Inf(-1)
	for i, l := range o.LogLikelihood {
		inverse[i] = 1 / float64(o.LiveCount[i])
		up[i], down[i] = math.Exp(inverse[i]), math.Exp(-inverse[i])
		mean -= inverse[i]
		scale[i] = l + mean
		top = max(top, scale[i])
	}
	for i := range scale {
		scale[i] = math.Exp(scale[i] - top)
	}
	var logZ [realisations]float64
	var sums [chunks][]float64
	var wg sync.WaitGroup
	tickets := make(chan struct{}, max(workers, 1))
	for c := range chunks {
		wg.Add(1)
		tickets <- struct{}{}
		go func() {
			defer wg.Done()
			defer func() { <-tickets }()
			sums[c] = make([]float64, n)
			x := make([]float64, n+1) // x[i+1] is X_i in its units, x[0] the start
			w := make([]float64, n)
			for r := c; r < realisations; r += chunks {
				rng := random.New(o.seed, "shrinkage", uint64(r))
				v := math.Exp(start.draw(rng) - start.mean)
				x[0] = v
				for i, n := range inverse {
					t := n - rng.ExpFloat64()*n
					if t < smallest || t > -smallest { // as expm, which is not inlined
						v *= math.Exp(t)
					} else {
						v *= 1 + t*(1+t*(1./2+t*(1./6+t*(1./24+t*(1./120)))))
					}
					x[i+1] = v
				}
				// shell without its two special cases.
				w[0] = scale[0] * shell(x, up, down, 0)
				w[n-1] = scale[n-1] * shell(x, up, down, n-1)
				z := w[0]
				for i := 1; i < n-1; i++ {
					p := 0.5 * scale[i] * (x[i]*up[i] - x[i+2]*down[i+1])
					w[i] = p
					z += p
				}
				if n > 1 {
					z += w[n-1]
				}
				sum, share := sums[c], 1/z
				for i, p := range w {
					sum[i] += p * share
				}
				logZ[r] = math.Log(z) + top
			}
		}()
	}
	wg.Wait()
	o.LogEvidence, o.LogEvidenceError = meanSD(logZ[:])
	o.LogWeight = make([]float64, n)
	var square, logL float64
	for i := range n {
		var p float64
		for c := range chunks {
			p += sums[c][i] / realisations
		}
		o.LogWeight[i] = math.Log(p)
		square += p * p
		if p > 0 {
			logL += p * o.LogLikelihood[i]
		}
	}
	// The mean over the histories of Σ w ln L / Z - ln Z.
	o.Information = logL - o.LogEvidence
	o.FormulaError = math.Sqrt(max(o.Information, 0) / float64(o.LivePoints))
	o.EffectiveSamples = 1 / square
}

// smallest is where the series of expm ends: its next term is 0.006⁶/720 = 6e-17.
const smallest = -0.006

// expm is exp(t), by its series where t is so small that the next term is below
// rounding, as nearly all shrinkages are.
func expm(t float64) float64 {
	if math.Abs(t) > -smallest {
		return math.Exp(t)
	}
	return 1 + t*(1+t*(1./2+t*(1./6+t*(1./24+t*(1./120)))))
}

// shell is the volume of point i in units of X_i's expectation.
func shell(x, up, down []float64, i int) float64 {
	before := x[i] * up[i]
	here := x[i+1]
	if i == 0 {
		before = 2*before - here
	}
	var after float64
	if i+2 < len(x) {
		after = x[i+2] * down[i+1]
	} else {
		after = -here
	}
	return 0.5 * (before - after)
}

// shrinkage is the distribution of the prior volume of non-zero likelihood,
// seen through draws from the prior: ln X, X ~ Beta(a, b); b = 0 means X = 1.
type shrinkage struct {
	a, b float64
	mean float64
}

// priorShrinkage removes the zeros one by one with falling live number. Where
// the draws went on until enough were above zero, the last of them is there by
// that rule and does not count.
func (o *Outcome) priorShrinkage() shrinkage {
	s := shrinkage{a: float64(o.PriorDraws-o.PriorZeros) + 1, b: float64(o.PriorZeros)}
	if o.openEnded {
		s.a--
	}
	if s.b == 0 {
		return s
	}
	s.mean = mathext.Digamma(s.a) - mathext.Digamma(s.a+s.b)
	return s
}

// zeroVariance is the variance of ln of the volume of non-zero likelihood, to
// first order.
func (o *Outcome) zeroVariance() float64 {
	s := o.priorShrinkage()
	if s.b == 0 {
		return 0
	}
	return s.b / (s.a * (s.a + s.b))
}

func (s shrinkage) draw(rng *random.Rand) float64 {
	if s.b == 0 {
		return 0
	}
	// Two Gammas, not one Beta: the logarithm keeps its digits for tiny X.
	x := distuv.Gamma{Alpha: s.a, Beta: 1, Src: rng}.Rand()
	y := distuv.Gamma{Alpha: s.b, Beta: 1, Src: rng}.Rand()
	return math.Log(x) - math.Log(x+y)
}

func meanSD(v []float64) (mean, sd float64) {
	for _, x := range v {
		mean += x / float64(len(v))
	}
	for _, x := range v {
		sd += (x - mean) * (x - mean) / float64(len(v)-1)
	}
	return mean, math.Sqrt(sd)
}
