package sampler

import (
	"math"

	"gonum.org/v1/gonum/stat/distuv"

	"knell/internal/random"
)

// mixture is a normalised density on the unit cube: Student-t distributions of
// one common number of degrees of freedom, each in its own chart of the cube.
//
// Student-t and not Gaussian, because the density serves to weigh a likelihood:
// where a Gaussian falls faster than the likelihood the weights have no variance
// to speak of. How heavy the tails are is chosen on held-out points
// (mixture_fit.go).
type mixture struct {
	dim        int
	freedom    float64 // degrees of freedom ν
	logNorm    float64 // ln of Γ((ν+d)/2) / (Γ(ν/2) (νπ)^(d/2))
	components []component
}

// component is one Student-t: mean and scale matrix in the chart's coordinates.
type component struct {
	ellipsoid
	chart
	share float64 // of the mixture
}

func newMixture(dim int, freedom float64, components []component) *mixture {
	d := float64(dim)
	a, _ := math.Lgamma(0.5 * (freedom + d))
	b, _ := math.Lgamma(0.5 * freedom)
	return &mixture{
		dim: dim, freedom: freedom, components: components,
		logNorm: a - b - 0.5*d*math.Log(freedom*math.Pi),
	}
}

// logStudent is the log-density in y of a component at squared distance d2.
func (m *mixture) logStudent(c *component, d2 float64) float64 {
	return m.logNorm - c.logDet - 0.5*(m.freedom+float64(m.dim))*math.Log1p(d2/m.freedom)
}

// logDensity returns ln q at the cube point u, with y (length dim) as scratch.
// It costs dim² operations for each component. At a wall, q may diverge, but its
// integral is 1.
func (m *mixture) logDensity(u, y []float64) float64 {
	sum := math.Inf(-1)
	for i := range m.components {
		c := &m.components[i]
		if i == 0 || c.centre != nil {
			c.into(u, y)
		}
		l := m.logStudent(c, c.distance2(y, math.Inf(1))) + math.Log(c.share) + logStretch(y)
		sum = logAdd(sum, l)
	}
	return sum
}

// draw writes a draw from the mixture to u, with y and z as scratch, all of
// length dim.
func (m *mixture) draw(rng *random.Rand, u, y, z []float64) {
	pick, c := rng.Float64(), &m.components[len(m.components)-1]
	for i := range m.components {
		if pick -= m.components[i].share; pick < 0 {
			c = &m.components[i]
			break
		}
	}
	// χ²/ν of the Student-t: a Gamma of shape and rate ν/2.
	scale := 1 / math.Sqrt(distuv.Gamma{Alpha: 0.5 * m.freedom, Beta: 0.5 * m.freedom, Src: rng}.Rand())
	for k := range z {
		z[k] = rng.NormFloat64() * scale
	}
	c.stretch(z, y)
	for k := range y {
		y[k] += c.mean[k]
	}
	c.outOf(y, u)
}
