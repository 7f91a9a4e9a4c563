package kerr

import (
	"math"

	"knell/models/kerr/internal/chart"
)

// A chart of R is for odd parity. The other parity's R is that times
//
//	(Re C - 12iω)/(Re C + 12iω)
//
// (see BarrierResponse), smooth over every piece. turnEven multiplies it in: from
// coefficients to values at the nodes of a piece and back.

// separationTerms is how many Chebyshev coefficients in aω hold the separation
// constant to rounding for |aω| <= MaxFrequency.
const separationTerms = 32

// separations is A as a function of aω, for |aω| up to MaxFrequency.
type separations [separationTerms]float64

func newSeparations(l, m int) (*separations, error) {
	var v [separationTerms]float64
	for i := range v {
		h, err := newHarmonic(l, m, complex(MaxFrequency*chebyshevNode(i, separationTerms), 0))
		if err != nil {
			return nil, err
		}
		v[i] = real(h.separation)
	}
	s := new(separations)
	for k := range s {
		for i, x := range v {
			s[k] += x * chebyshevAt(k, i, separationTerms) * 2 / separationTerms
		}
	}
	s[0] /= 2
	return s, nil
}

// at sums the series by Clenshaw's recurrence.
func (s *separations) at(c float64) float64 {
	x := c / MaxFrequency
	var b1, b2 float64
	for k := separationTerms - 1; k > 0; k-- {
		b1, b2 = s[k]+2*x*b1-b2, b1
	}
	return s[0] + x*b1 - b2
}

// chebyshevNode returns the i-th zero of T_n, growing, and chebyshevAt T_k there.
func chebyshevNode(i, n int) float64 { return -math.Cos(math.Pi * (float64(i) + 0.5) / float64(n)) }

func chebyshevAt(k, i, n int) float64 {
	return math.Cos(math.Pi * float64(k) * (float64(n-i) - 0.5) / float64(n))
}

func turnEven(c *chart.Chart) error {
	sep, err := newSeparations(c.L, c.M)
	if err != nil {
		return err
	}
	const nx, nt = cellTerms, chart.MaxTerms
	var atX [nx][nx]float64 // [node][degree]
	var atT [nt][nt]float64
	for i := range atX {
		for k := range atX[i] {
			atX[i][k] = chebyshevAt(k, i, nx)
		}
	}
	for i := range atT {
		for k := range atT[i] {
			atT[i][k] = chebyshevAt(k, i, nt)
		}
	}
	for i := range c.Panels {
		p := &c.Panels[i]
		var spin [nt]float64
		for j := range spin {
			spin[j] = math.Tanh((p.Low+p.High)/2 + (p.High-p.Low)/2*chebyshevNode(j, nt))
		}
		for k := range p.Pieces {
			var rows [nx][nt]complex128 // coefficient in x, node in t
			for i, n := range chart.Terms {
				re := p.Planes[i][2*n*k:]
				im := re[n:]
				for j := range nt {
					w := &atT[j]
					rows[i][j] = complex(chart.Sum(re[:n], w[:]), chart.Sum(im[:n], w[:]))
				}
			}
			for j := range nt {
				low := chart.Sum(p.Bounds[k*chart.BoundTerms:(k+1)*chart.BoundTerms], atT[j][:])
				high := chart.Sum(p.Bounds[(k+1)*chart.BoundTerms:(k+2)*chart.BoundTerms], atT[j][:])
				var v [nx]complex128
				for x := range v {
					for i := range nx {
						w := atX[x][i]
						v[x] += complex(w*real(rows[i][j]), w*imag(rows[i][j]))
					}
					omega := (low+high)/2 + (high-low)/2*chebyshevNode(x, nx)
					v[x] *= evenTurn(c.M, spin[j], omega, sep.at(spin[j]*omega))
				}
				for i := range nx {
					var s complex128
					for x, z := range v {
						w := atX[x][i]
						s += complex(w*real(z), w*imag(z))
					}
					rows[i][j] = s * complex(scaleOf(i, nx), 0)
				}
			}
			for i, n := range chart.Terms {
				re := p.Planes[i][2*n*k:]
				im := re[n:]
				for d := range n {
					var s complex128
					for j := range nt {
						w := atT[j][d]
						s += complex(w*real(rows[i][j]), w*imag(rows[i][j]))
					}
					f := scaleOf(d, nt)
					re[d], im[d] = f*real(s), f*imag(s)
				}
			}
		}
	}
	return nil
}

// scaleOf is what turns a sum over nodes into the coefficient of T_k.
func scaleOf(k, n int) float64 {
	if k == 0 {
		return 1 / float64(n)
	}
	return 2 / float64(n)
}

// evenTurn returns R of even parity over R of odd parity, of either sign of ω.
func evenTurn(m int, spin, omega, separation float64) complex128 {
	b := background{m: m, a: spin, w: omega, lambda: separation + spin*spin*omega*omega - 2*spin*float64(m)*omega}
	c := complex(b.teukolskyStarobinsky(), 12*omega)
	return quo(complex(real(c), -imag(c)), c)
}
