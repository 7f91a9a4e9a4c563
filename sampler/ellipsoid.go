package sampler

import (
	"math"
	"math/rand/v2"

	"gonum.org/v1/gonum/blas"
	"gonum.org/v1/gonum/blas/blas64"
	"gonum.org/v1/gonum/lapack/lapack64"
)

// leastPivot is the least diagonal element of the Cholesky factor of a
// correlation matrix that is taken for more than rounding: its square is the
// variance of a parameter given the others, in units of its own.
const leastPivot = 1e-7

// scatter is a symmetric dim×dim matrix by rows, of which the lower triangle is
// kept: a sum of outer products, or a covariance.
type scatter struct {
	dim int
	a   []float64
}

func newScatter(dim int) scatter { return scatter{dim, make([]float64, dim*dim)} }

// add adds d dᵀ.
func (s scatter) add(d []float64) {
	for r, x := range d {
		row := s.a[r*s.dim : r*s.dim+r+1]
		for k := range row {
			row[k] += x * d[k]
		}
	}
}

func (s scatter) scale(f float64) {
	for i := range s.a {
		s.a[i] *= f
	}
}

// ellipsoid is the set |L⁻¹(x - m)|² <= radius2 with L Lᵀ a covariance. Matrices
// are dim×dim by rows, lower triangular.
type ellipsoid struct {
	mean    []float64 // m
	factor  []float64 // L
	inverse []float64 // L⁻¹
	logDet  float64   // ln det L
	radius2 float64
	members []int // indices of the points it was fitted to
	shape   shape // that was used besides; only while the bound is fitted
}

// ellipsoid returns the ellipsoid of covariance s and the given mean, radius2
// unset. It reports false if s is singular.
func (s scatter) ellipsoid(mean []float64) (ellipsoid, bool) {
	dim := s.dim
	e := ellipsoid{mean: mean}
	// Scaled to unit diagonal, so that parameters known to very different
	// precision do not lose digits.
	width := make([]float64, dim)
	for r := range dim {
		width[r] = math.Sqrt(s.a[r*dim+r])
		if !(width[r] > 0) {
			return e, false
		}
	}
	// The factor and its inverse straight from the LAPACK routines: the
	// condition number that the matrix types also compute costs more than both.
	lower := make([]float64, dim*dim)
	for r := range dim {
		for k := 0; k <= r; k++ {
			lower[r*dim+k] = s.a[r*dim+k] / (width[r] * width[k])
		}
	}
	if _, ok := lapack64.Potrf(blas64.Symmetric{N: dim, Stride: dim, Data: lower, Uplo: blas.Lower}); !ok {
		return e, false
	}
	for r := range dim {
		if lower[r*dim+r] < leastPivot {
			return e, false
		}
	}
	inverse := append([]float64(nil), lower...)
	if !lapack64.Trtri(blas64.Triangular{N: dim, Stride: dim, Data: inverse, Uplo: blas.Lower, Diag: blas.NonUnit}) {
		return e, false
	}
	e.factor = make([]float64, dim*dim)
	e.inverse = inverse
	for r := range dim {
		for k := 0; k <= r; k++ {
			e.factor[r*dim+k] = lower[r*dim+k] * width[r]
			e.inverse[r*dim+k] = inverse[r*dim+k] / width[k]
		}
		e.logDet += math.Log(e.factor[r*dim+r])
	}
	return e, true
}

// fitEllipsoid is fitShaped with the pooled covariance as if a third of a point
// more had that.
func fitEllipsoid(points []float64, dim int, members []int, pooled scatter) (ellipsoid, bool) {
	return fitShaped(points, dim, members, pooledShape(pooled))
}

// fitShaped fits the given rows of the n×dim points: their mean, their
// covariance together with a shape, and the least radius that holds them, but
// not less than if they filled it uniformly (radius2 = dim + 2 in units of the
// covariance). So any number of points has a fit. It reports false if the
// covariance is singular.
func fitShaped(points []float64, dim int, members []int, s shape) (ellipsoid, bool) {
	mean := make([]float64, dim)
	n := float64(len(members))
	for _, i := range members {
		for k, x := range points[i*dim : (i+1)*dim] {
			mean[k] += x
		}
	}
	for k := range mean {
		mean[k] /= n
	}
	cov := newScatter(dim)
	d := make([]float64, dim)
	for _, i := range members {
		for k, x := range points[i*dim : (i+1)*dim] {
			d[k] = x - mean[k]
		}
		cov.add(d)
	}
	for i := range cov.a {
		cov.a[i] = (cov.a[i] + s.scatter.a[i]) / (n + s.weight)
	}
	e, ok := cov.ellipsoid(mean)
	if !ok {
		return e, false
	}
	e.members, e.shape = members, s
	e.radius2 = float64(dim + 2)
	for _, i := range members {
		e.radius2 = max(e.radius2, e.distance2(points[i*dim:(i+1)*dim], math.Inf(1)))
	}
	return e, true
}

// distance2 returns |L⁻¹(x - m)|², or some value above limit once that is sure.
func (e *ellipsoid) distance2(x []float64, limit float64) float64 {
	dim := len(e.mean)
	var sum float64
	for r := range dim {
		row := e.inverse[r*dim : r*dim+r+1]
		var y float64
		for k, a := range row {
			y += a * (x[k] - e.mean[k])
		}
		sum += y * y
		if sum > limit {
			break
		}
	}
	return sum
}

func (e *ellipsoid) contains(x []float64) bool {
	return e.distance2(x, e.radius2) <= e.radius2
}

// whiten writes L⁻¹(x - m) to y.
func (e *ellipsoid) whiten(x, y []float64) {
	lowerTimes(e.inverse, x, e.mean, y)
}

// stretch writes L z to v. z and v may not overlap.
func (e *ellipsoid) stretch(z, v []float64) {
	lowerTimes(e.factor, z, nil, v)
}

func lowerTimes(a, x, origin, y []float64) {
	dim := len(x)
	for r := range dim {
		row := a[r*dim : r*dim+r+1]
		var s float64
		if origin == nil {
			for k, c := range row {
				s += c * x[k]
			}
		} else {
			for k, c := range row {
				s += c * (x[k] - origin[k])
			}
		}
		y[r] = s
	}
}

// logVolume is the log of the ellipsoid's volume in the unit cube's measure.
func (e *ellipsoid) logVolume() float64 {
	return logBall(len(e.mean)) + e.logDet + 0.5*float64(len(e.mean))*math.Log(e.radius2)
}

// logBall is the log of the volume of the unit ball in dim dimensions.
func logBall(dim int) float64 {
	half := 0.5 * float64(dim)
	g, _ := math.Lgamma(half + 1)
	return half*math.Log(math.Pi) - g
}

// draw writes a uniform draw from the ellipsoid to x, with z as scratch.
func (e *ellipsoid) draw(rng *rand.Rand, x, z []float64) {
	direction(rng, z)
	r := math.Pow(rng.Float64(), 1/float64(len(z))) * math.Sqrt(e.radius2)
	for k := range z {
		z[k] *= r
	}
	e.stretch(z, x)
	for k := range x {
		x[k] += e.mean[k]
	}
}

// direction fills z with a uniformly random unit vector.
func direction(rng *rand.Rand, z []float64) {
	for {
		var sum float64
		for k := range z {
			z[k] = rng.NormFloat64()
			sum += z[k] * z[k]
		}
		if sum > 0 {
			for k := range z {
				z[k] /= math.Sqrt(sum)
			}
			return
		}
	}
}
