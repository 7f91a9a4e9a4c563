package sampler

import (
	"math"
	"slices"
	"sync"
	"sync/atomic"

	"knell/internal/random"
)

const (
	// mostReplicas of a run, or as many as keep replicas times points below
	// replicaWork, but at least leastReplicas. A standard deviation over 100 is
	// good to 7 percent.
	mostReplicas, leastReplicas = 100, 50
	replicaWork                 = 20_000_000

	// doubtfulTension is the disagreement between the two errors of ln Z, in
	// its own standard errors, above which a run is in doubt.
	doubtfulTension = 4
)

// resampling draws bootstrap replicas of a run: as many strands as it has, with
// replacement, those that begin at the prior and those that begin later each
// among themselves. A replica is a run of its own, with a live number of its
// own at each likelihood; a strand drawn c times is c strands that tie at every
// point, removed one by one as a plateau is.
//
// The volumes of a replica are the expected ones for its live numbers, so what
// varies from replica to replica is what varies from run to run.
type resampling struct {
	o      *Outcome
	groups [][]int32 // strands by where they begin
	count  int       // of strands
	born   []int32   // strands of the points in the order they were drawn
	before []int32   // how many of born were drawn below each dead point
	top    float64   // largest expected ln(L X), to keep numbers in range
	up     []float64 // expected volume before each dead point over that after it
	scale  []float64 // its likelihood times the latter, over the largest
	start  shrinkage
	most   int       // replicas
	swell  float64   // n/(n-1): a bootstrap variance of n strands is too small by it
	shift  []float64 // added to ln L in the weights, or nil
}

// resample prepares replicas of o, or returns nil if its strands are not known.
// shift, if not nil, is added to the log-likelihood of each point.
func (o *Outcome) resample(shift []float64) *resampling {
	if !o.hasStrands() {
		return nil
	}
	n := len(o.LogLikelihood)
	r := &resampling{o: o, start: o.priorShrinkage(), shift: shift, groups: make([][]int32, 2)}
	r.most = min(mostReplicas, max(leastReplicas, replicaWork/n))
	r.count = int(slices.Max(o.Strand)) + 1
	seen := make([]bool, r.count)
	for i, s := range o.Strand {
		if !seen[s] {
			seen[s] = true
			g := 0
			if !math.IsInf(o.Birth[i], -1) {
				g = 1
			}
			r.groups[g] = append(r.groups[g], s)
		}
	}
	r.swell = 1
	if n := float64(len(r.groups[0])); n > 1 {
		r.swell = n / (n - 1)
	}
	order := rising(o.Birth)
	r.born, r.before = make([]int32, n), make([]int32, n)
	r.up, r.scale = make([]float64, n), make([]float64, n)
	for e, i := range order {
		r.born[e] = o.Strand[i]
	}
	e, logX := 0, r.start.mean
	r.top = math.Inf(-1)
	for i, l := range o.LogLikelihood {
		for e < n && o.Birth[order[e]] < l {
			e++
		}
		r.before[i] = int32(e)
		r.up[i] = math.Exp(1 / float64(o.LiveCount[i]))
		logX -= 1 / float64(o.LiveCount[i])
		r.scale[i] = r.logL(i) + logX
		r.top = max(r.top, r.scale[i])
	}
	for i, l := range r.scale {
		r.scale[i] = math.Exp(l - r.top)
	}
	return r
}

func (r *resampling) logL(i int) float64 {
	if r.shift == nil {
		return r.o.LogLikelihood[i]
	}
	return r.o.LogLikelihood[i] + r.shift[i]
}

// draw sets how often each strand comes in replica number at and the ln of the
// volume of non-zero likelihood.
func (r *resampling) draw(at int, times []int32) (logX float64) {
	rng := random.New(r.o.seed, "bootstrap", uint64(at))
	clear(times)
	for _, g := range r.groups {
		for range g {
			times[g[rng.IntN(len(g))]]++
		}
	}
	return r.start.draw(rng)
}

// weigh sets the weights of the points in a replica, which sum to 1, and returns
// its ln Z.
func (r *resampling) weigh(times []int32, logX float64, weight []float64) float64 {
	e, live := int32(0), 0
	last, sum := -1, 0.0
	// The replica's volume over the expected one after each point of the run.
	v := math.Exp(logX - r.start.mean)
	for i, s := range r.o.Strand {
		for ; e < r.before[i]; e++ {
			live += int(times[r.born[e]])
		}
		v *= r.up[i]
		m := int(times[s])
		if m == 0 {
			weight[i] = 0
			continue
		}
		var down float64
		for k := range m {
			down += 1 / float64(live-k)
		}
		lost := 1 - expm(-down)
		if down < 1e-5 { // the difference has no digits to spare
			lost = -math.Expm1(-down)
		}
		weight[i] = r.scale[i] * v * lost
		sum += weight[i]
		v -= v * lost
		live -= m
		last = i
	}
	if last >= 0 { // the volume above the last point, as in Outcome.weigh
		for _, up := range r.up[last+1:] {
			v /= up
		}
		rest := r.scale[last] * v
		weight[last] += rest
		sum += rest
	}
	for i := range weight {
		weight[i] /= sum
	}
	return math.Log(sum) + r.top
}

// each calls f once per replica from up to the given number of goroutines, with
// its number, ln Z and weights, which are only lent. What f stores under the
// replica's number does not depend on the workers.
func (r *resampling) each(workers int, f func(at int, logZ float64, weight []float64)) {
	var next atomic.Int64
	var wg sync.WaitGroup
	for range min(max(workers, 1), r.most) {
		wg.Add(1)
		go func() {
			defer wg.Done()
			times := make([]int32, r.count)
			weight := make([]float64, len(r.o.LogLikelihood))
			for {
				at := int(next.Add(1)) - 1
				if at >= r.most {
					return
				}
				logX := r.draw(at, times)
				f(at, r.weigh(times, logX, weight), weight)
			}
		}()
	}
	wg.Wait()
}

// spread is the standard error of a statistic from its values in the replicas.
// It is infinite where a replica had no weight at all: the statistic rests on a
// few strands.
func (r *resampling) spread(values []float64) float64 {
	for _, v := range values {
		if math.IsNaN(v) || math.IsInf(v, 0) {
			return math.Inf(1)
		}
	}
	_, sd := meanSD(values)
	return sd * math.Sqrt(r.swell)
}

// bootstrapError sets BootstrapError and ErrorTension.
//
// Allowance: of the logarithm of the ratio of the two errors, the simulated one
// over R histories has a variance of 1/2R, the bootstrap over B replicas 1/2B,
// and n strands of kurtosis κ know their own variance to (κ-1)/n of its square,
// which is (κ-1)/4n here. κ is that of the strands' influences on ln Z.
func (o *Outcome) bootstrapError(workers int) {
	r := o.resample(nil)
	if r == nil {
		return
	}
	logZ := make([]float64, r.most)
	r.each(workers, func(at int, z float64, _ []float64) { logZ[at] = z })
	o.BootstrapError = r.spread(logZ)
	// A likelihood of one value has no error: both are rounding.
	if rounding := 1e-12 * (1 + math.Abs(o.LogEvidence)); o.BootstrapError < rounding || o.LogEvidenceError < rounding {
		o.ErrorTension = 0
		return
	}
	var two, four float64
	influence := o.strandInfluence()
	for _, x := range influence {
		two += x * x
		four += x * x * x * x
	}
	n := float64(len(influence))
	own := 0.0
	if two > 0 {
		own = max(0, n*four/(two*two)-1) / (4 * n)
	}
	own += 1/(2*float64(r.most)) + 1/(2*float64(realisations))
	o.ErrorTension = math.Log(o.BootstrapError/o.LogEvidenceError) / math.Sqrt(own)
}

// strandInfluence returns by how much ln Z changes, to first order, per copy of
// each strand that is added to the run. With the posterior weight p_i of a point,
// G_i that of the points above it, n_i its live number and a_i = p_i - G_i/n_i,
// a strand adds a_i at each of its points and takes a_i/n_i at each removal it
// lives through. They sum to 0, and the sum of their squares is the variance of
// ln Z.
func (o *Outcome) strandInfluence() []float64 {
	n := len(o.LogLikelihood)
	a := make([]float64, n)
	var above float64
	for i := n - 1; i >= 0; i-- {
		p := math.Exp(o.LogWeight[i])
		a[i] = p - above/float64(o.LiveCount[i])
		above += p
	}
	taken := make([]float64, n+1) // running sum of a_i/n_i
	for i, x := range a {
		taken[i+1] = taken[i] + x/float64(o.LiveCount[i])
	}
	influence := make([]float64, slices.Max(o.Strand)+1)
	for i, s := range o.Strand {
		// The first removal it lived through is the first above its birth.
		from, _ := slices.BinarySearchFunc(o.LogLikelihood, o.Birth[i], upTo)
		influence[s] += a[i] - (taken[i+1] - taken[from])
	}
	return influence
}
