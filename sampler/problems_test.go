package sampler

import (
	"math"
)

// problem is a likelihood whose log-evidence is known.
type problem struct {
	name     string
	dim      int
	live     int
	want     float64 // ln Z
	source   string
	logL     func(u []float64) float64
	periodic []bool
}

func (p *problem) Dim() int                                   { return p.dim }
func (p *problem) LogLikelihood(u []float64) (float64, error) { return p.logL(u), nil }
func (p *problem) target() (Target, error)                    { return p, nil }

var _ Target = (*problem)(nil)

// gaussian is a normalised Gaussian of width 0.05 and correlation rho between
// all pairs, at the centre of the unit cube. Ten widths from every wall it is
// normalised over the cube to 1e-20: ln Z = 0.
func gaussian(dim int, rho float64) *problem {
	const sigma = 0.05
	d := float64(dim)
	// C = σ²((1-ρ) I + ρ 11ᵀ): eigenvalues σ²(1-ρ) and σ²(1-ρ+dρ).
	small, large := sigma*sigma*(1-rho), sigma*sigma*(1-rho+d*rho)
	norm := -0.5 * (d*math.Log(2*math.Pi) + (d-1)*math.Log(small) + math.Log(large))
	return &problem{
		name: "gaussian", dim: dim, live: 500, want: 0, source: "normalised density",
		logL: func(u []float64) float64 {
			var sum, square float64
			for _, x := range u {
				sum += x - 0.5
				square += (x - 0.5) * (x - 0.5)
			}
			along := sum * sum / d
			return norm - 0.5*((square-along)/small+along/large)
		},
	}
}

// shells: two shells of radius 2 and width 0.1 around (±3.5, 0, ...) in
// [-6, 6]^dim. ln Z by quadrature over the radius: -1.745642 in 2, -5.673601 in
// 5 dimensions; arXiv:0809.3437 prints -1.75, -5.67 (from memory).
func shells(dim int, want float64) *problem {
	const r, w = 2, 0.1
	norm := -0.5 * math.Log(2*math.Pi*w*w)
	return &problem{
		name: "shells", dim: dim, live: 500, want: want, source: "radial quadrature",
		logL: func(u []float64) float64 {
			var rest float64
			for _, x := range u[1:] {
				y := 12*x - 6
				rest += y * y
			}
			x := 12*u[0] - 6
			a := (math.Sqrt((x-3.5)*(x-3.5)+rest) - r) / w
			b := (math.Sqrt((x+3.5)*(x+3.5)+rest) - r) / w
			return logAdd(norm-0.5*a*a, norm-0.5*b*b)
		},
	}
}

// eggbox: 18 peaks on [0, 10π]²; ln Z = 235.85594 by quadrature (235.88 in print,
// arXiv:0809.3437, from memory, is that of a coarser grid).
func eggbox() *problem {
	return &problem{
		name: "eggbox", dim: 2, live: 500, want: 235.85594, source: "quadrature",
		logL: func(u []float64) float64 {
			return math.Pow(2+math.Cos(5*math.Pi*u[0])*math.Cos(5*math.Pi*u[1]), 5)
		},
	}
}

// rosenbrock on [-5, 5]^dim; ln Z = -5.804132 in 2 and -15.101691 in 4
// dimensions by quadrature along the chain.
func rosenbrock(dim int, want float64) *problem {
	return &problem{
		name: "rosenbrock", dim: dim, live: 500, want: want, source: "transfer-matrix quadrature",
		logL: func(u []float64) float64 {
			var sum float64
			for i := range dim - 1 {
				x, y := 10*u[i]-5, 10*u[i+1]-5
				sum += 100*(y-x*x)*(y-x*x) + (1-x)*(1-x)
			}
			return -sum
		},
	}
}

// logGamma mixture of arXiv:1304.7808 on [-30, 30]^dim: the density is
// normalised, so ln Z = -dim ln 60.
func logGamma(dim int) *problem {
	lg := func(x, loc float64) float64 { z := x - loc; return z - math.Exp(z) }
	nd := func(x, loc float64) float64 { return -0.5*(x-loc)*(x-loc) - 0.5*math.Log(2*math.Pi) }
	return &problem{
		name: "log-gamma", dim: dim, live: 500, want: -float64(dim) * math.Log(60), source: "normalised density",
		logL: func(u []float64) float64 {
			x, y := 60*u[0]-30, 60*u[1]-30
			l := -2*math.Ln2 + logAdd(lg(x, 10), lg(x, -10)) + logAdd(nd(y, 10), nd(y, -10))
			for i := 2; i < dim; i++ {
				if x := 60*u[i] - 30; i+1 <= (dim+2)/2 {
					l += lg(x, 10)
				} else {
					l += nd(x, 10)
				}
			}
			return l
		},
	}
}

// twoModes: a wide Gaussian (σ = 0.06) of mass 0.3 and a narrow one of
// mass 0.7, normalised: ln Z = 0.
func twoModes(dim int, narrow float64) *problem {
	mode := func(u []float64, at, sigma float64) float64 {
		var s float64
		for _, x := range u {
			s += (x - at) * (x - at)
		}
		return -0.5*s/(sigma*sigma) - float64(dim)*(math.Log(sigma)+0.5*math.Log(2*math.Pi))
	}
	return &problem{
		name: "two modes", dim: dim, live: 500, want: 0, source: "normalised density",
		logL: func(u []float64) float64 {
			return logAdd(math.Log(0.3)+mode(u, 0.4, 0.06), math.Log(0.7)+mode(u, 0.8, narrow))
		},
	}
}

// plateau: L = 1 on half of the prior, and a cone of cubes above it, so that
// Z = ½ + ½ ∫ exp(h (1-v)) dv = ½ + ½ (e^h - 1)/h with v the enclosed volume.
func plateau() *problem {
	const dim, h = 3, 6.0
	return &problem{
		name: "half plateau", dim: dim, live: 500, want: math.Log(0.5 + 0.5*math.Expm1(h)/h), source: "closed form",
		logL: func(u []float64) float64 {
			var m float64
			for _, x := range u {
				m = max(m, math.Abs(2*x-1))
			}
			v := 2 * m * m * m
			if v >= 1 {
				return 0
			}
			return h * (1 - v)
		},
	}
}

// steps is the tiered problem of arXiv:2010.13884, all plateaus: 2 dimensions,
// α = ½, s = 0.1, ln Z = -2.852361 by its sum.
func steps() *problem {
	const alpha, s, dim = 0.5, 0.1, 2
	return &problem{
		name: "steps", dim: dim, live: 500, want: -2.852361, source: "sum over tiers",
		logL: func(u []float64) float64 {
			m := max(math.Abs(u[0]-0.5), math.Abs(u[1]-0.5))
			i := math.Floor(dim * math.Log(2*m) / math.Log(alpha))
			return -math.Pow(alpha, 2*i/dim) / (8 * s * s)
		},
	}
}

// hollow has zero likelihood but in a corner cube of volume 0.2^3 = 0.008, where
// it is a normalised Gaussian well inside: ln Z = 0.
func hollow() *problem {
	g := gaussian(3, 0)
	return &problem{
		name: "mostly zero", dim: 3, live: 500, want: 0, source: "normalised density",
		logL: func(u []float64) float64 {
			var v [3]float64
			for k, x := range u {
				if x > 0.2 {
					return math.Inf(-1)
				}
				v[k] = 0.5 + (x-0.1)*5
			}
			return g.logL(v[:]) + 3*math.Log(5)
		},
	}
}

// ridge: a phase φ and four amplitudes a. The phase enters as φ + 3a₁ - 2a₂,
// sharply, once around; a is a Gaussian. With period 1 in φ the integral over φ
// is that of exp(κ(cos 2πφ - 1)) whatever a is: Z = e^-κ I₀(κ), the rest
// normalised. The ridge winds through the phase's cut several times.
func ridge() *problem {
	const kappa, sigma = 200.0, 0.04
	// e^-κ I₀(κ) at κ = 200: asymptotic series (2πκ)^-½ (1 + 1/8κ + 9/128κ² + 75/1024κ³).
	const k = kappa
	want := -0.5*math.Log(2*math.Pi*k) + math.Log(1+1/(8*k)+9/(128*k*k)+75/(1024*k*k*k))
	return &problem{
		name: "periodic ridge", dim: 5, live: 500, want: want, source: "Bessel function, asymptotic series",
		periodic: []bool{true, false, false, false, false},
		logL: func(u []float64) float64 {
			l := kappa * (math.Cos(2*math.Pi*(u[0]+3*u[1]-2*u[2])) - 1)
			for _, x := range u[1:] {
				l += -0.5*(x-0.5)*(x-0.5)/(sigma*sigma) - 0.5*math.Log(2*math.Pi*sigma*sigma)
			}
			return l
		},
	}
}

// winding is like ridge, in 7 dimensions with two curved pairs: given its partner
// x, a coordinate is a narrow Gaussian around ½ + 2.5 (x - ½)². All factors are
// normalised along lines of unit Jacobian, so ln Z is that of the phase.
func winding() *problem {
	p := ridge()
	const kappa, wide, narrow = 200.0, 0.08, 0.01
	normal := func(x, sigma float64) float64 {
		return -0.5*x*x/(sigma*sigma) - 0.5*math.Log(2*math.Pi*sigma*sigma)
	}
	return &problem{
		name: "curved winding ridge", dim: 7, live: 1000, want: p.want, source: p.source,
		periodic: []bool{true, false, false, false, false, false, false},
		logL: func(u []float64) float64 {
			l := kappa * (math.Cos(2*math.Pi*(u[0]+3*u[1]-2*u[2])) - 1)
			for _, k := range []int{1, 2, 3, 4} {
				l += normal(u[k]-0.5, wide)
			}
			for _, k := range []int{5, 6} {
				x := u[k-3] - 0.5
				l += normal(u[k]-0.5-2.5*x*x, narrow)
			}
			return l
		},
	}
}

// spikeAndSlab in dim dimensions on a unit cube centred on 0 (Bayesian Anal. 1,
// 833 (2006) has dim = 20): 100 N(0, 0.01) + N(0, 0.1), Z = 101 less the slab's
// tails: erf(5/√2)^dim of it is inside.
func spikeAndSlab(dim int) *problem {
	mode := func(s, sigma float64) float64 {
		return -0.5*s/(sigma*sigma) - float64(dim)*(math.Log(sigma)+0.5*math.Log(2*math.Pi))
	}
	return &problem{
		name: "spike and slab", dim: dim, live: 500,
		want:   math.Log(100 + math.Pow(math.Erf(5/math.Sqrt2), float64(dim))),
		source: "normalised densities",
		logL: func(u []float64) float64 {
			var s float64
			for _, x := range u {
				s += (x - 0.5) * (x - 0.5)
			}
			return logAdd(math.Log(100)+mode(s, 0.01), mode(s, 0.1))
		},
	}
}

func problems() []*problem {
	return []*problem{
		gaussian(2, 0.95), gaussian(4, 0.95), gaussian(8, 0.95), gaussian(12, 0.95),
		shells(2, -1.745642), shells(5, -5.673601),
		eggbox(), rosenbrock(2, -5.804132), rosenbrock(4, -15.101691),
		logGamma(2), logGamma(6), twoModes(2, 0.015), twoModes(5, 0.03),
		plateau(), steps(), hollow(), ridge(), winding(), spikeAndSlab(5),
	}
}
