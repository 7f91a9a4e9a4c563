package sampler

import (
	"fmt"
	"math"

	"gonum.org/v1/gonum/integrate/quad"
	"gonum.org/v1/gonum/mat"
)

const (
	// DefaultWindow is RatioSettings.Window's default.
	DefaultWindow = 0.5

	// ratioNodes is the Gauss-Legendre nodes on each side of the nested value.
	// The kernel is smooth there; 24 nodes leave 1e-12.
	ratioNodes = 24

	// nearShare of the window's half-width counts as near the nested value.
	nearShare = 0.25
)

// RatioSettings of SavageDickey. The zero value of every field means its default.
type RatioSettings struct {
	Seed uint64 // keys the simulated histories of an outcome without strands

	// Window is the share of the posterior that the density's window takes in,
	// above 0 and up to 0.9, default 0.5.
	Window float64

	// Periodic says that u = 0 and u = 1 of the dimension are the same place.
	Periodic bool

	// Workers is the number of goroutines, default 1. The result does not depend on it.
	Workers int
}

// Ratio is the Bayes factor of a nested pair of hypotheses.
type Ratio struct {
	LogBayesFactor   float64 // ln of the nested over the full hypothesis, nats
	Error            float64 // its standard deviation, nats
	EffectiveSamples float64 // (sum w)² / sum w² in the window
	Near             float64 // the same within a quarter of the window
	Share            float64 // of the posterior within a quarter of the window
	HalfWidth        float64 // of the window, in the cube coordinate
	Change           float64 // of LogBayesFactor with half the window, nats, NaN if that has no fit
	ChangeError      float64 // its standard deviation, nats
	Warnings         []string

	reached bool // by as many posterior samples as fewReaching
}

// fewReaching is the number of effective posterior samples of the whole run that
// must lie near the nested value: below it the density is that of a tail which the
// samples as such do not reach.
const fewReaching = 5

// share is the posterior probability of offsets below h.
func share(offset, weight []float64, h float64) float64 {
	var near, all float64
	for i, w := range weight {
		all += w
		if math.Abs(offset[i]) < h {
			near += w
		}
	}
	return near / all
}

// SavageDickey returns the Bayes factor of a hypothesis nested in that of the
// run: the one that fixes coordinate dimension of the cube at the value at. By
// the Savage-Dickey density ratio (Ann. Math. Stat. 42, 204 (1971)) it is the
// posterior density of the coordinate there over its prior density, and the
// latter is 1 on the cube. It holds if the nested hypothesis gives the other
// coordinates the prior they have in the full one at that value; priors that map
// the cube one coordinate at a time give that.
//
// The density is a local likelihood fit (Ann. Stat. 24, 1602 and 1619 (1996)): the logarithm of the
// density is a quadratic in the window |u - at| < h, by maximising
//
//	sum of w K((u-at)/h) ln f(u) - integral over the cube of K((u-at)/h) f(u),
//
// K(z) = (1-|z|³)³. The integral ends at a wall, so a value at the edge needs no
// correction: with a quadratic there is no bias of first order in h. It is exact
// for a Gaussian posterior, whatever the window. h is the least half-width that
// holds the share s.Window of the posterior (nearest neighbours, as the window
// must adapt to tails); h is at most ½ in a periodic coordinate.
//
// The error is the spread over replicas of the run, its strands drawn anew, or
// over histories of simulated shrinkage where the strands are not known. It does
// not hold the bias of the window; half
// the window is tried too, and a change beyond 3 of its own errors is a warning,
// as are few samples near the value.
//
// It costs no likelihood call.
func (o *Outcome) SavageDickey(dimension int, at float64, s RatioSettings) (Ratio, error) {
	var r Ratio
	if len(o.Points) == 0 || len(o.LogWeight) != len(o.Points) {
		return r, fmt.Errorf("sampler: density ratio from an outcome of %d points with %d weights, want a finished run", len(o.Points), len(o.LogWeight))
	}
	bad := func(field string, got any, want string) error {
		return &SettingError{field, fmt.Sprint(got), want}
	}
	if s.Window == 0 {
		s.Window = DefaultWindow
	}
	switch {
	case dimension < 0 || dimension >= o.dim():
		return r, bad("dimension", dimension, fmt.Sprintf("0 to %d", o.dim()-1))
	case !(at >= 0 && at <= 1):
		return r, bad("at", at, "a coordinate of the unit cube, 0 to 1")
	case !(s.Window > 0 && s.Window <= 0.9):
		return r, bad("Window", s.Window, fmt.Sprintf("0 (for %g) or above 0 and up to 0.9", DefaultWindow))
	case s.Workers < 0:
		return r, bad("Workers", s.Workers, "0 (for 1) or more")
	}
	all := o.posterior()
	offset := make([]float64, len(all.points))
	for i, u := range all.points {
		offset[i] = u[dimension] - at
		if s.Periodic {
			offset[i] = wrap(offset[i]+0.5) - 0.5
		}
	}
	wide, err := newWindow(offset, all.weight, at, s.Window, s.Periodic)
	if err != nil {
		return r, err
	}
	narrow, err := newWindow(offset, all.weight, at, s.Window/2, s.Periodic)
	if err != nil {
		return r, err
	}
	r.HalfWidth = wide.h
	r.EffectiveSamples = wide.effective(all.weight, 1)
	r.Near = wide.effective(all.weight, nearShare)
	r.Share = share(offset, all.weight, nearShare*wide.h)
	r.reached = r.Share*o.EffectiveSamples >= fewReaching
	var ok bool
	if r.LogBayesFactor, ok = wide.logDensity(all.weight); !ok {
		return r, fmt.Errorf("sampler: density ratio: the density of coordinate %d at %g has no fit by a quadratic in a window of half-width %.3g with %.0f effective samples", dimension, at, wide.h, r.EffectiveSamples)
	}
	half, halfOK := narrow.logDensity(all.weight)
	replicas := o.replicas(s.Seed)
	spread := make([]float64, replicas.count)
	change := make([]float64, replicas.count)
	failed := make([]bool, replicas.count)
	replicas.each(max(1, s.Workers), func(h int, weight []float64) {
		value, ok := wide.logDensity(weight)
		failed[h] = !ok
		spread[h] = value
		value, ok = narrow.logDensity(weight)
		failed[h] = failed[h] || !ok
		change[h] = value - spread[h]
	})
	var good, moved []float64
	for h, f := range failed {
		if !f {
			good = append(good, spread[h])
			moved = append(moved, change[h])
		}
	}
	if len(good) < replicas.count/2 {
		return r, fmt.Errorf("sampler: density ratio: the density of coordinate %d at %g has a fit in %d of %d replicas only", dimension, at, len(good), replicas.count)
	}
	r.Error = replicas.spread(good)
	if lost := replicas.count - len(good); lost > 0 {
		r.warn("%d of %d replicas have no fit: the error may be too small", lost, replicas.count)
	}
	r.Change, r.ChangeError = math.NaN(), replicas.spread(moved)
	if halfOK {
		r.Change = half - r.LogBayesFactor
	}
	if !r.steady() {
		r.warn("half the window changes the log Bayes factor by %+.3f nat, %.1f of that change's errors: the density is not a smooth curve at that scale", r.Change, math.Abs(r.Change)/r.ChangeError)
	}
	if !r.reached {
		r.warn("a share of %.2g of the posterior lies near the nested value: the density there is that of a far tail", r.Share)
	}
	if r.Near < fewEffective {
		r.warn("%.0f effective samples lie near the nested value, want at least %d: the density there is carried over from farther off", r.Near, fewEffective)
	}
	if o.Partial {
		r.warn("the run did not end by itself (%v): its posterior is unfinished", o.Status)
	}
	return r, nil
}

// Supported reports whether enough effective samples lie near the nested value,
// 50 of them, to know the density there without carrying it over from farther
// off, whether the posterior reaches it, and whether half the window gives the same
// within three errors. In a far tail even many points of little weight do not
// help: the density falls by more within the window than a quadratic follows.
func (r Ratio) Supported() bool { return r.Near >= fewEffective && r.reached && r.steady() }

// steady reports whether half the window gives the same.
func (r Ratio) steady() bool { return !(math.Abs(r.Change) > 3*r.ChangeError) }

func (r *Ratio) warn(format string, args ...any) {
	r.Warnings = append(r.Warnings, fmt.Sprintf(format, args...))
}

// window is the points of one coordinate around a value, scaled to z = (u-at)/h.
type window struct {
	h      float64
	index  []int     // points inside
	z      []float64 // of those
	kernel []float64 // of those
	node   []float64 // quadrature over z inside the cube
	mass   []float64 // kernel times weight times h of each node
}

// tricube is (1-|z|³)³.
func tricube(z float64) float64 {
	c := 1 - math.Abs(z*z*z)
	return c * c * c
}

// newWindow takes in a share of the weight around offset 0.
func newWindow(offset, weight []float64, at, share float64, periodic bool) (*window, error) {
	away := make([]float64, len(offset))
	for i, x := range offset {
		away[i] = math.Abs(x)
	}
	order := rising(away)
	w := &window{}
	var sum float64
	for _, i := range order {
		sum += weight[i]
		w.h = math.Abs(offset[i])
		if sum >= share {
			break
		}
	}
	if !(w.h > 0) {
		return nil, fmt.Errorf("sampler: density ratio: a share %.2g of the posterior lies exactly at the nested value", sum)
	}
	for i, d := range offset {
		if z := d / w.h; math.Abs(z) < 1 {
			w.index = append(w.index, i)
			w.z = append(w.z, z)
			w.kernel = append(w.kernel, tricube(z))
		}
	}
	low, high := -1.0, 1.0
	if !periodic {
		low, high = max(low, -at/w.h), min(high, (1-at)/w.h)
	}
	var node, mass [ratioNodes]float64
	for _, side := range [][2]float64{{low, 0}, {0, high}} {
		if side[1] <= side[0] {
			continue
		}
		quad.Legendre{}.FixedLocations(node[:], mass[:], side[0], side[1])
		for k, z := range node {
			w.node = append(w.node, z)
			w.mass = append(w.mass, mass[k]*tricube(z)*w.h)
		}
	}
	return w, nil
}

// effective is (sum w)² / sum w² of the points with |z| < limit.
func (w *window) effective(weight []float64, limit float64) float64 {
	var sum, square float64
	for j, i := range w.index {
		if math.Abs(w.z[j]) < limit {
			sum += weight[i]
			square += weight[i] * weight[i]
		}
	}
	if square == 0 {
		return 0
	}
	return sum * sum / square
}

// logDensity returns ln of the fitted density at z = 0, for weights of all
// points that need not be normalised. It reports false if there is no maximum.
func (w *window) logDensity(weight []float64) (float64, bool) {
	var total float64
	for _, v := range weight {
		total += v
	}
	var m [3]float64 // moments of the points
	for j, i := range w.index {
		v := weight[i] / total * w.kernel[j]
		m[0] += v
		m[1] += v * w.z[j]
		m[2] += v * w.z[j] * w.z[j]
	}
	var area float64
	for _, v := range w.mass {
		area += v
	}
	if !(m[0] > 0 && area > 0) {
		return 0, false
	}
	// Newton's method for the coefficients c of ln f = c₀ + c₁ z + c₂ z², which
	// maximise the concave m·c - ∫ K f. Its gradient is m less the moments of f.
	c := [3]float64{math.Log(m[0] / area), 0, 0}
	objective := func(c [3]float64) (float64, [5]float64) {
		var g [5]float64
		for k, z := range w.node {
			f := w.mass[k] * math.Exp(c[0]+z*(c[1]+z*c[2]))
			for p := range g {
				g[p] += f
				f *= z
			}
		}
		return m[0]*c[0] + m[1]*c[1] + m[2]*c[2] - g[0], g
	}
	value, g := objective(c)
	for range 100 {
		gradient := mat.NewVecDense(3, []float64{m[0] - g[0], m[1] - g[1], m[2] - g[2]})
		var chol mat.Cholesky
		if !chol.Factorize(mat.NewSymDense(3, []float64{g[0], g[1], g[2], g[1], g[2], g[3], g[2], g[3], g[4]})) {
			return 0, false
		}
		var step mat.VecDense
		if err := chol.SolveVecTo(&step, gradient); err != nil {
			return 0, false
		}
		gain := mat.Dot(&step, gradient)
		if gain < 1e-20*m[0] {
			return c[0], true
		}
		scale := 1.0
		for ; ; scale /= 2 {
			if scale < 1e-6 {
				// Rounding, if the promised gain is below it.
				return c[0], gain < 1e-12*m[0]
			}
			trial := c
			for k := range trial {
				trial[k] += scale * step.AtVec(k)
			}
			v, h := objective(trial)
			if v >= value+1e-4*scale*gain {
				c, value, g = trial, v, h
				break
			}
		}
	}
	return 0, false
}
