package models

import "math"

// powerLaw reflects reflectivity (1 + |k|/kc)^-exponent, kc = corner T_H: a long
// tail beyond the corner.
var powerLaw = reflectivity{
	name: "power",
	parameters: []Parameter{
		{Name: "reflectivity", Note: "amplitude reflectivity of the surface at k = 0", Low: 0, High: 1},
		cornerParameter(),
		{Name: "exponent", Note: "power with which the reflectivity falls beyond the corner", Low: 0, High: 100},
	},
	fill: func(law []float64, temperature, k0, dk float64, rs []float64) {
		fillPower(law[0], law[1]*temperature, law[2], k0, dk, rs)
	},
}

// Between fresh powers fillPower takes the binomial series
//
//	(x + d)^-p = x^-p sum_n C(-p, n) (d/x)^n,   x = kc + |k|,
//
// to powerTerms, as long as |d/x| <= powerReach / (p + powerTerms): the next term
// is below (0.2^9 / 9!) = 1.4e-12 of the value.
const (
	powerTerms = 8
	powerReach = 0.2
)

// fillPower writes scale * (1 + |k0 + j dk| / corner)^-p, relative error below
// 1e-11.
func fillPower(scale, corner, p, k0, dk float64, rs []float64) {
	var c [powerTerms + 1]float64
	c[0] = 1
	for n := 1; n <= powerTerms; n++ {
		c[n] = -c[n-1] * (p + float64(n-1)) / float64(n)
	}
	reach := powerReach / (p + powerTerms)
	step := math.Abs(dk)
	for j := 0; j < len(rs); {
		k := k0 + float64(j)*dk
		x := corner + math.Abs(k)
		// How many bins the series serves, and on which side of k = 0.
		span := reach * x / step
		u := step / x
		if k*dk < 0 {
			span = math.Min(span, -k/dk)
			u = -u
		}
		end := len(rs)
		if span < float64(end-j-1) {
			end = j + int(span) + 1
		}
		value := scale * math.Pow(1+math.Abs(k)/corner, -p)
		rs[j] = value
		for i, start := j+1, j; i < end; i++ {
			d := float64(i-start) * u
			rs[i] = value * (1 + d*(c[1]+d*(c[2]+d*(c[3]+d*(c[4]+d*(c[5]+d*(c[6]+d*(c[7]+d*c[8]))))))))
		}
		j = end
	}
}
