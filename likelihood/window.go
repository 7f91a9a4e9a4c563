package likelihood

import (
	"math"

	"gonum.org/v1/gonum/blas/blas64"
	"gonum.org/v1/gonum/dsp/fourier"
)

// window computes the gated stretch of a sequence from the sequence's spectrum
// over the band without transforming the whole segment.
//
// Only g of N samples are wanted. Multiplied in time by a smooth w(n) that has
// died out where copies shifted by L samples would reach the gate, the sequence
// may be folded to period L = 2 g or a little more; in frequency that is a
// convolution with a short kernel, taken at every (N/L)-th bin only. One real
// transform of L points then gives w(n) times the wanted samples, and w goes
// into the gate's factor. The kernel is exp(beta (sqrt(1 - z^2) - 1)) with z
// from -1 to 1 over taps coarse bins, a form whose transform dies out nearly as
// fast as any (arXiv:1808.06736, from memory); the samples of w are summed from it exactly,
// so what is left is the folded tail, below 1e-10 of the largest sample.
type window struct {
	folded int       // L
	stride int       // N / L
	kernel []float64 // taps * stride + 1 values, even
	first  int       // the coarse bin that the first dot product yields
	count  int       // coarse bins
	pad    int       // zeros before the band in the padded spectrum
	padded int       // length of the padded spectrum
	shift  int       // samples by which the gate's centre follows sample 0
	taper  []float64 // w(n) / stride over the gate
}

const (
	windowTaps = 12
	// windowBeta is the kernel's exponent for folding to twice the gate:
	// 2.3 per tap (arXiv:1808.06736, section 4).
	windowBeta = 2.30 * windowTaps
)

// newWindow plans for a gate of g samples in a segment of n, and a band of count
// bins from first. It returns nil where the segment cannot be folded to less
// than a quarter; a full transform serves then.
func newWindow(n, g, first, count int) *window {
	folded := 0
	for l := 2 * g; g > 0 && l <= n/4; l++ {
		if n%l == 0 && l%2 == 0 {
			folded = l
			break
		}
	}
	if folded == 0 {
		return nil
	}
	w := &window{folded: folded, stride: n / folded, shift: g / 2}
	reach := windowTaps * w.stride / 2
	w.kernel = make([]float64, 2*reach+1)
	for u := -reach; u <= reach; u++ {
		z := float64(u) / float64(reach)
		w.kernel[u+reach] = math.Exp(windowBeta * (math.Sqrt(1-z*z) - 1))
	}
	w.taper = make([]float64, g)
	for i := range w.taper {
		angle := 2 * math.Pi * float64(i-w.shift) / float64(n)
		sum := w.kernel[reach]
		for u := 1; u <= reach; u++ {
			sum += 2 * w.kernel[reach+u] * math.Cos(angle*float64(u))
		}
		// Taking every stride-th bin divides the sequence by stride.
		w.taper[i] = sum / float64(w.stride)
	}
	// Coarse bin j takes the fine bins j*stride - reach .. j*stride + reach.
	low := floorDiv(first-reach, w.stride) + 1
	high := floorDiv(first+count-1+reach, w.stride)
	w.first, w.count = low, high-low+1
	w.pad = first - (low*w.stride - reach)
	w.padded = (w.count-1)*w.stride + len(w.kernel)
	return w
}

func floorDiv(a, b int) int {
	q := a / b
	if a%b != 0 && (a < 0) != (b < 0) {
		q--
	}
	return q
}

// windowScratch is one goroutine's space.
type windowScratch struct {
	re, im       []float64 // padded spectrum
	coefficients []complex128
	sequence     []float64
	fft          *fourier.FFT
}

func (w *window) scratch() *windowScratch {
	return &windowScratch{
		re: make([]float64, w.padded), im: make([]float64, w.padded),
		coefficients: make([]complex128, w.folded/2+1),
		sequence:     make([]float64, w.folded),
		fft:          fourier.NewFFT(w.folded),
	}
}

// apply writes taper times the gated samples to out, from the spectrum over the
// band in s.re and s.im (after pad zeros), which must carry the phase that puts
// the gate's centre at sample 0.
func (w *window) apply(s *windowScratch, out []float64) {
	clear(s.coefficients)
	kernel := blas64.Vector{N: len(w.kernel), Inc: 1, Data: w.kernel}
	half := w.folded / 2
	for j := range w.count {
		at := j * w.stride
		re := blas64.Dot(kernel, blas64.Vector{N: len(w.kernel), Inc: 1, Data: s.re[at : at+len(w.kernel)]})
		im := blas64.Dot(kernel, blas64.Vector{N: len(w.kernel), Inc: 1, Data: s.im[at : at+len(w.kernel)]})
		// Fold: coarse bins repeat with period L, and those of negative
		// frequency are the conjugates of the positive ones.
		bin := (w.first + j) % w.folded
		if bin < 0 {
			bin += w.folded
		}
		switch {
		case bin == 0 || bin == half:
			s.coefficients[bin] += complex(2*re, 0)
		case bin < half:
			s.coefficients[bin] += complex(re, im)
		default:
			s.coefficients[w.folded-bin] += complex(re, -im)
		}
	}
	s.fft.Sequence(s.sequence, s.coefficients)
	for i := range out {
		k := i - w.shift
		if k < 0 {
			k += w.folded
		}
		out[i] = s.sequence[k]
	}
}
