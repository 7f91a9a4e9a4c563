package kerr

import (
	"fmt"
	"math"
	"math/cmplx"
	"sync"
)

// The superradiant band of one (l, m > 0) has a table of its own, because what
// decides about stability is by how much |R| exceeds 1, and that may be 1e-10: no
// table of R itself keeps it. With p = mΩ_H - ω = -k > 0,
//
//	|R|² - 1 = ω^(2ν+1) p G,   ν = l + 4 ν2 ω²,
//
// where ν is the beginning of the renormalised angular momentum: it carries the
// logarithm of ω that the band's low end has (see angularShift). ln G and arg R are
// smooth over the whole band and held as polynomials: Chebyshev sums in u = artanh(a) from 0 to artanh(MaxSpin)
// and in t = y(p)/y(mΩ_H), y = asinh(p/κ) + gainEven p, which is fine on the scale
// of the surface gravity where the wave turns over at the horizon (t = 0, ω =
// mΩ_H) and even further out (t = 1, ω = 0). Being polynomials they also continue
// ln R to complex ω near the band.
//
// Against the direct route |R|² - 1 is good to 1e-6 of itself (2e-7 for l = 2) and
// arg R to 1e-6 rad: see TestGainTable.
const (
	gainSpins  = 36
	gainPoints = 32
	gainEven   = 1.5
)

// gainTable holds Chebyshev coefficients, by order in u and in t.
type gainTable struct {
	lnGain [gainSpins][gainPoints]float64 // ln G
	phase  [gainSpins][gainPoints]float64 // arg R, mean of both parities
	split  [gainSpins][gainPoints]float64 // arg R of Odd less that mean
}

// gainTables are computed when first asked for, once: a thousand direct
// responses each.
var gainTables = func() (tables [maxMultipole + 1][maxMultipole + 1]func() (*gainTable, error)) {
	for l := minMultipole; l <= maxMultipole; l++ {
		for m := 1; m <= l; m++ {
			tables[l][m] = sync.OnceValues(func() (*gainTable, error) { return newGainTable(l, m) })
		}
	}
	return tables
}()

func checkWave(l, m int) error {
	if l < minMultipole || l > maxMultipole {
		return fmt.Errorf("kerr: l = %d, want %d to %d", l, minMultipole, maxMultipole)
	}
	if absInt(m) > l {
		return fmt.Errorf("kerr: m = %d, want %d to %d", m, -l, l)
	}
	return nil
}

// gainPoint is the j-th of n zeros of T_n, growing, mapped to 0..1.
func gainPoint(j, n int) float64 {
	s := math.Sin((float64(j) + 0.5) * math.Pi / float64(2*n))
	return s * s
}

func newGainTable(l, m int) (*gainTable, error) {
	g := new(gainTable)
	for i := range gainSpins {
		b := newBand(l, m, math.Tanh(gainPoint(i, gainSpins)*math.Atanh(MaxSpin)))
		turn := 0.0
		for j := range gainPoints {
			p := b.wave(gainPoint(j, gainPoints))
			omega := b.turn - p
			res, err := BarrierResponse(l, m, b.spin, omega, Odd)
			if err != nil {
				return nil, err
			}
			g.lnGain[i][j] = math.Log(-res.Greybody) - (float64(2*l+1)+b.shift*omega*omega)*math.Log(omega) - math.Log(p)
			split := math.Atan(12 * omega / teukolskyStarobinsky(m, b.spin, omega, res.Separation))
			// The nearest branch to where the phase was, carried on by that of a
			// wave turned back at a fixed place.
			raw, guide := cmplx.Phase(res.Reflection)-split, b.guide(p)
			if j > 0 {
				raw += 2 * math.Pi * math.Round((turn+guide-raw)/(2*math.Pi))
			} else if i > 0 {
				raw += 2 * math.Pi * math.Round((g.phase[i-1][0]-raw)/(2*math.Pi))
			}
			turn = raw - guide
			g.phase[i][j], g.split[i][j] = raw, split
		}
	}
	g.lnGain, g.phase, g.split = gainCoefficients(&g.lnGain), gainCoefficients(&g.phase), gainCoefficients(&g.split)
	return g, nil
}

// teukolskyStarobinsky returns Re C > 0, from |C|² and Im C = ±12ω.
func teukolskyStarobinsky(m int, spin, omega, separation float64) float64 {
	am, aw := spin*float64(m), spin*omega
	b := background{m: m, a: spin, w: omega, lambda: separation + aw*aw - 2*am*omega}
	return b.teukolskyStarobinsky()
}

// gainCoefficients turns values at gainPoint into coefficients, in both directions.
func gainCoefficients(value *[gainSpins][gainPoints]float64) (c [gainSpins][gainPoints]float64) {
	var half [gainSpins][gainPoints]float64
	for i := range gainSpins {
		for n := range gainPoints {
			for j := range gainPoints {
				half[i][n] += gainWeight(n, j, gainPoints) * value[i][j]
			}
		}
	}
	for n := range gainSpins {
		for i := range gainSpins {
			for j := range gainPoints {
				c[n][j] += gainWeight(n, i, gainSpins) * half[i][j]
			}
		}
	}
	return c
}

func gainWeight(n, j, size int) float64 {
	w := 2 / float64(size)
	if n == 0 {
		w /= 2
	}
	// Points grow, so the angle runs down from π.
	return w * math.Cos(float64(n)*(math.Pi-(float64(j)+0.5)*math.Pi/float64(size)))
}

// band is the superradiant band of (l, m > 0) at one spin.
type band struct {
	l, m        int
	spin        float64
	turn, kappa float64 // mΩ_H, κ
	edge, span  float64 // asinh(mΩ_H/κ), y(mΩ_H)
	shift       float64 // 8 ν2
	lnGain      [gainPoints]float64
	phase       [gainPoints]float64 // of one parity; not set without setPhase
}

func newBand(l, m int, spin float64) band {
	b := band{l: l, m: m, spin: spin, turn: float64(m) * HorizonFrequency(spin), kappa: SurfaceGravity(spin), shift: 8 * angularShift(l)}
	b.edge = math.Asinh(b.turn / b.kappa)
	b.span = b.edge + gainEven*b.turn
	return b
}

// angularShift returns ν2 of the renormalised angular momentum
// ν = l + ν2 (2ω)² + O(ω³) (Living Rev. Relativ. 6, 6 (2003)). Without it
// TestGainTable fails.
func angularShift(l int) float64 {
	const s2 = spinWeight * spinWeight
	x := float64(l)
	up, down := (x+1)*(x+1)-s2, x*x-s2
	return (-2 - s2/(x*(x+1)) + up*up/((2*x+1)*(2*x+2)*(2*x+3)) - down*down/((2*x-1)*2*x*(2*x+1))) / (2*x + 1)
}

// setGain sums the table over orders in u; setPhase does the same for arg R.
func (b *band) setGain(g *gainTable) {
	weights := b.orders()
	b.lnGain = [gainPoints]float64{}
	blendOrders(&b.lnGain, &g.lnGain, &weights, 1)
}

func (b *band) setPhase(g *gainTable, parity Parity) {
	weights := b.orders()
	b.phase = [gainPoints]float64{}
	blendOrders(&b.phase, &g.phase, &weights, 1)
	sign := 1.0
	if parity == Even {
		sign = -1
	}
	blendOrders(&b.phase, &g.split, &weights, sign)
}

// orders returns T_n at the band's u.
func (b *band) orders() (t [gainSpins]float64) {
	x := 2*math.Atanh(b.spin)/gainRange - 1
	t[0], t[1] = 1, x
	for n := 2; n < gainSpins; n++ {
		t[n] = 2*x*t[n-1] - t[n-2]
	}
	return t
}

var gainRange = math.Atanh(MaxSpin)

func blendOrders(sum *[gainPoints]float64, c *[gainSpins][gainPoints]float64, weights *[gainSpins]float64, sign float64) {
	for n := range weights {
		w := sign * weights[n]
		row := &c[n]
		for j := range sum {
			sum[j] += w * row[j]
		}
	}
}

// place returns t of p; wave is its inverse, by Newton's method.
func (b *band) place(p float64) float64 {
	return (math.Asinh(p/b.kappa) + gainEven*p) / b.span
}

func (b *band) wave(t float64) float64 {
	target := t * b.span
	p := min(b.kappa*math.Sinh(target), b.turn)
	for range 60 {
		step := (target - math.Asinh(p/b.kappa) - gainEven*p) / (1/math.Hypot(p, b.kappa) + gainEven)
		p += step
		if math.Abs(step) <= 1e-15*p {
			break
		}
	}
	return min(max(p, 0), b.turn)
}

// guide is the phase of a wave turned back at x = (r - r+)/(r+ - r-) = 3√(1 + kh²),
// inside the barrier's foot when the wave is slow there and further out when it is
// fast; it is only good for telling branches of a phase apart.
func (b *band) guide(p float64) float64 {
	d := 2 * rootOfDeficit(b.spin)
	kh := p / (2 * b.kappa)
	x := 3 * math.Sqrt(1+kh*kh)
	return 2*(b.turn-p)*TortoiseLog(b.spin, math.Log(d*x)) - 2*float64(b.m)*b.spin/d*math.Log(x/(1+x))
}

// gain returns |R|² - 1 at k = -p, for 0 <= p <= mΩ_H.
func (b *band) gain(p float64) float64 { return b.gainAt(p, math.Asinh(p/b.kappa)) }

// gainAt is gain for a p that comes with asinh(p/κ).
func (b *band) gainAt(p, asinh float64) float64 {
	omega := b.turn - p
	if p <= 0 || omega <= 0 {
		return 0
	}
	t := (asinh + gainEven*p) / b.span
	return power(omega, 2*b.l+1) * p * math.Exp(gainSum(&b.lnGain, t)+b.shift*omega*omega*math.Log(omega))
}

// lnR returns ln R at complex ω near the band. Its imaginary part on the band is arg R without jumps.
func (b *band) lnR(omega complex128) complex128 {
	if omega == 0 {
		return complex(0, gainSum(&b.phase, 1))
	}
	p := complex(b.turn, 0) - omega
	y := cmplx.Asinh(p/complex(b.kappa, 0)) + gainEven*p
	t := y / complex(b.span, 0)
	lnGain, phase := gainSums(&b.lnGain, &b.phase, t)
	g := p * cmplx.Exp(lnGain+complex(b.shift, 0)*omega*omega*cmplx.Log(omega))
	for range 2*b.l + 1 {
		g *= omega
	}
	return log1p(g)/2 + complex(-imag(phase), real(phase))
}

// log1p keeps the digits of small complex x, which cmplx.Log(1+x) does not.
func log1p(x complex128) complex128 {
	re, im := real(x), imag(x)
	return complex(math.Log1p(re*(2+re)+im*im)/2, math.Atan2(im, 1+re))
}

func power(x float64, n int) float64 {
	v := x
	for range n - 1 {
		v *= x
	}
	return v
}

// gainSum sums Σ c_n T_n(x), x = 2t - 1, by Clenshaw's recurrence, even and odd
// orders apart: two short chains of additions instead of a long one.
func gainSum(c *[gainPoints]float64, t float64) float64 {
	x := 2*t - 1
	y := 2 * (2*x*x - 1)
	var e1, e2, o1, o2 float64
	for n := gainPoints - 2; n > 0; n -= 2 {
		e1, e2 = y*e1-e2+c[n], e1
		o1, o2 = y*o1-o2+c[n+1], o1
	}
	return y/2*e1 - e2 + c[0] + x*(y*o1-o2+c[1]-o1)
}

// gainSums sums two series at one complex t.
func gainSums(c, d *[gainPoints]float64, t complex128) (sumC, sumD complex128) {
	x := 2 * (2*t - 1)
	var c1, c2, d1, d2 complex128
	for n := gainPoints - 1; n > 0; n-- {
		c1, c2 = x*c1-c2+complex(c[n], 0), c1
		d1, d2 = x*d1-d2+complex(d[n], 0), d1
	}
	return x/2*c1 - c2 + complex(c[0], 0), x/2*d1 - d2 + complex(d[0], 0)
}
