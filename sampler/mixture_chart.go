package sampler

import (
	"math"

	"gonum.org/v1/gonum/mathext"
)

// chart maps the unit cube to the whole space: y_k = Φ⁻¹(v_k) with Φ the normal
// distribution function, where v_k = u_k, or (u_k - centre_k + ½) mod 1 in a
// periodic dimension, which is thus cut opposite the centre.
//
// A coordinate that the likelihood does not constrain is then a standard normal,
// and a density that a wall cuts off falls smoothly. Nothing is lost outside the
// walls, so a density normalised in y is normalised on the cube, whatever the
// dimension; truncating a correlated Gaussian at the walls would need an
// integral that has no closed form.
type chart struct {
	centre   []float64 // nil when no dimension is periodic
	periodic []bool
}

// wallGap is the distance from a wall below which a coordinate counts as being
// at that distance: half the spacing of the numbers just below 1. It keeps
// |y| < 8.3. The prior has 1e-16 of its volume beyond.
const wallGap = 0x1p-54

// into writes Φ⁻¹ of u to y.
func (c *chart) into(u, y []float64) {
	for k := range y {
		y[k] = c.coordinate(k, u[k])
	}
}

func (c *chart) coordinate(k int, v float64) float64 {
	if c.centre != nil && c.periodic[k] {
		v = wrap(v - c.centre[k] + 0.5)
	}
	return mathext.NormalQuantile(min(max(v, wallGap), 1-2*wallGap))
}

// outOf writes the cube point of y to u.
func (c *chart) outOf(y, u []float64) {
	for k, v := range y {
		u[k] = 0.5 * math.Erfc(-v/math.Sqrt2)
		if c.centre != nil && c.periodic[k] {
			u[k] = wrap(u[k] + c.centre[k] - 0.5)
		}
	}
}

// logStretch is ln of the product of dy/du, 1/φ(y) in each dimension.
func logStretch(y []float64) float64 {
	s := 0.5 * float64(len(y)) * math.Log(2*math.Pi)
	for _, v := range y {
		s += 0.5 * v * v
	}
	return s
}

// chartAround returns the chart cut opposite the circular mean of the points.
func chartAround(points [][]float64, members []int, periodic []bool) chart {
	c := chart{periodic: periodic}
	for k, p := range periodic {
		if !p {
			continue
		}
		if c.centre == nil {
			c.centre = make([]float64, len(periodic))
		}
		var cos, sin float64
		for _, i := range members {
			s, co := math.Sincos(2 * math.Pi * points[i][k])
			sin += s
			cos += co
		}
		c.centre[k] = wrap(math.Atan2(sin, cos) / (2 * math.Pi))
	}
	return c
}
