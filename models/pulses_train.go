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
	s.fillOne(t, g, 1, s.vRe, s.vIm)
	if isHalfTurns(t.startTurn) && isHalfTurns(t.pulseTurn) && t.stretch == 0 {
		// Both senses of turning are one.
		copy(s.uRe, s.vRe)
		copy(s.uIm, s.vIm)
		return
	}
	s.fillOne(t, g, -1, s.uRe, s.uIm)
}

func isHalfTurns(turn float64) bool {
	return turn == 0 || turn == math.Pi || turn == 2*math.Pi
}

func (s *sums) fillOne(t train, g Grid, sense float64, re, im []float64) {
	n := g.Count
	step := -2 * math.Pi * g.Step
	fillTurns(-sense*t.startTurn, step*t.delay, float64(g.First), re[:n], im[:n])
	cos, sin := s.cos[:n], s.sin[:n]
	if t.count > 1 {
		fillTurns(-sense*t.pulseTurn, step*t.spacing, float64(g.First), cos, sin)
		if t.stretch != 0 {
			t.disperse(g, sense, cos, sin)
		}
	}
	re, im = re[:n], im[:n]
	for j := range re {
		sr, si := t.first, 0.0
		if t.count > 1 {
			sr, si = geometricSum(t.damping*cos[j], t.damping*sin[j], t.count)
			sr, si = t.first*sr, t.first*si
		}
		re[j], im[j] = re[j]*sr-im[j]*si, re[j]*si+im[j]*sr
	}
}

// disperse multiplies q by its phase from the stretch.
func (t train) disperse(g Grid, sense float64, cos, sin []float64) {
	turns := sense * 2 * math.Pi * t.spacing * t.stretch * t.scale
	for j := range cos {
		u := (g.Frequency(j) - sense*t.centre) / t.scale
		s, c := math.Sincos(turns * (math.Sqrt(1+u*u) - 1))
		cos[j], sin[j] = cos[j]*c-sin[j]*s, cos[j]*s+sin[j]*c
	}
}
