package models

import "math"

// train is a finite sequence of equal pulses: the first at a delay, with a factor
// and a phase of its own, each later one a spacing after the one before it, damped
// and turned against it. Its transform is that of one pulse at t = 0 times
//
//	first exp(-i (turn0 + w delay)) (1 + q + ... + q^(count-1)),
//	q = damping exp(-i (turn + w spacing)),  w = 2 pi f,
//
// beside the V of the pulse (see ringing), and beside U the same with turn0 and
// turn reversed. A turn is a turn of the wave's complex amplitude C, and so, for
// the (l, -m) partner and at negative frequency, of its conjugate: the signal is
// real, and a delayed wave of phase phi + turn is what it looks like. (A turn of
// the whole transform at f > 0 would not be causal.)
//
// Where the spacing in time depends on the frequency, q is multiplied by
//
//	exp(2 pi i spacing stretch scale (sqrt(1 + u^2) - 1)),  u = (f - centre) / scale,
//
// beside V, and beside U by the conjugate with u = (f + centre) / scale. The
// spacing of the part near f is then spacing (1 - stretch u / sqrt(1 + u^2)).
type train struct {
	count                       uint
	first, delay, startTurn     float64
	damping, spacing, pulseTurn float64
	stretch, centre, scale      float64 // centre and scale in Hz
}

// maxPulses bounds how many pulses are counted, for spacings far below anything
// that could be resolved.
const maxPulses = 1 << 30

// arrivals is how many pulses come within the given length.
func arrivals(length, delay, spacing float64) uint {
	if !(delay < length) {
		return 0
	}
	return 1 + uint(math.Min((length-delay)/spacing, maxPulses))
}

// sums holds what the two parts of a pulse's transform are multiplied by, with
// scratch space.
type sums struct {
	vRe, vIm, uRe, uIm []float64
	cos, sin           []float64
}

func newSums(n int) sums {
	block := make([]float64, 6*n)
	cut := func(i int) []float64 { return block[i*n : (i+1)*n : (i+1)*n] }
	return sums{cut(0), cut(1), cut(2), cut(3), cut(4), cut(5)}
}

// fill writes the factors of t over the grid.
func (s *sums) fill(t train, g Grid) {
	n := g.Count
	step := -2 * math.Pi * g.Step
	vRe, vIm, uRe, uIm, cos, sin := s.vRe[:n], s.vIm[:n], s.uRe[:n], s.uIm[:n], s.cos[:n], s.sin[:n]
	fillTurns(0, step*t.delay, float64(g.First), uRe, uIm)
	fillTurns(0, step*t.spacing, float64(g.First), cos, sin)
	startSin, startCos := math.Sincos(t.startTurn)
	startSin, startCos = startSin*t.first, startCos*t.first
	turnSin, turnCos := math.Sincos(t.pulseTurn)
	turnSin, turnCos = turnSin*t.damping, turnCos*t.damping
	// Half turns are the same in both senses.
	alike := t.stretch == 0 && (t.pulseTurn == 0 || t.pulseTurn == math.Pi || t.pulseTurn == 2*math.Pi)
	for j := range vRe {
		c, s := cos[j], sin[j]
		qr, qi := c*turnCos+s*turnSin, s*turnCos-c*turnSin
		pr, pi := c*turnCos-s*turnSin, s*turnCos+c*turnSin
		if t.stretch != 0 {
			f := g.Frequency(j)
			s, c = t.dispersion(f - t.centre)
			qr, qi = qr*c-qi*s, qr*s+qi*c
			s, c = t.dispersion(f + t.centre)
			pr, pi = pr*c+pi*s, pi*c-pr*s
		}
		qr, qi = geometricSum(qr, qi, t.count)
		if alike {
			pr, pi = qr, qi
		} else {
			pr, pi = geometricSum(pr, pi, t.count)
		}
		c, s = uRe[j], uIm[j]
		ar, ai := c*startCos+s*startSin, s*startCos-c*startSin
		br, bi := c*startCos-s*startSin, s*startCos+c*startSin
		vRe[j], vIm[j] = ar*qr-ai*qi, ar*qi+ai*qr
		uRe[j], uIm[j] = br*pr-bi*pi, br*pi+bi*pr
	}
}

// dispersion is sine and cosine of the phase that the stretch gives q beside V at
// a distance from the centre.
func (t *train) dispersion(distance float64) (sin, cos float64) {
	u := distance / t.scale
	return math.Sincos(2 * math.Pi * t.spacing * t.stretch * t.scale * (math.Sqrt(1+u*u) - 1))
}
