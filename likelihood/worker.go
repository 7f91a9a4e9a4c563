package likelihood

import (
	"math"

	"gonum.org/v1/gonum/dsp/fourier"

	"knell/models"
)

// Worker evaluates a Gaussian with scratch space of its own; it belongs to one
// goroutine.
type Worker struct {
	g      *Gaussian
	re, im []float64 // coefficients of P h over the band
	gated  []float64
	// Either the window's scratch or that of a full transform.
	window       *windowScratch
	fft          *fourier.FFT
	coefficients []complex128
	sequence     []float64
}

// Worker returns a worker for one more goroutine.
func (g *Gaussian) Worker() *Worker {
	w := &Worker{g: g, gated: make([]float64, g.settings.Gate)}
	count := g.settings.Grid.Count
	if g.window != nil {
		w.window = g.window.scratch()
		w.re = w.window.re[g.window.pad : g.window.pad+count]
		w.im = w.window.im[g.window.pad : g.window.pad+count]
		return w
	}
	w.re, w.im = make([]float64, count), make([]float64, count)
	w.fft = fourier.NewFFT(g.samples)
	w.coefficients = make([]complex128, g.samples/2+1)
	w.sequence = make([]float64, g.samples)
	return w
}

// LogRatio returns ln L(h) - ln L(0) in nats, <d|h> - <h|h>/2 summed over the
// sites with the gate taken off both. h has the grid's length and is only
// borrowed. It allocates nothing.
func (w *Worker) LogRatio(h *models.Polarizations) float64 {
	total := 0.0
	for i := range w.g.sites {
		cross, square := w.products(&w.g.sites[i], h)
		total += cross - square/2
	}
	return total
}

// OptimalSNR returns sqrt(<h|h>) of each site, with the gate taken off.
func (w *Worker) OptimalSNR(h *models.Polarizations, out []float64) []float64 {
	out = out[:0]
	for i := range w.g.sites {
		_, square := w.products(&w.g.sites[i], h)
		out = append(out, math.Sqrt(max(0, square)))
	}
	return out
}

// products returns <d|h> and <h|h> at one site.
func (w *Worker) products(s *prepared, h *models.Polarizations) (cross, square float64) {
	cross, square = project(s, h, w.re, w.im)
	if len(w.gated) == 0 {
		return cross, square
	}
	if w.window != nil {
		w.g.window.apply(w.window, w.gated)
	} else {
		first := w.g.settings.Grid.First
		for j := range w.re {
			w.coefficients[first+j] = complex(w.re[j], w.im[j])
		}
		w.fft.Sequence(w.sequence, w.coefficients)
		copy(w.gated, w.sequence)
	}
	return cross, square - s.gate.square(w.gated)
}

// project sums <d|h> and the ungated <h|h> over the band and leaves the
// coefficients of P h in outRe and outIm.
func project(s *prepared, h *models.Polarizations, outRe, outIm []float64) (cross, square float64) {
	n := len(outRe)
	plusRe, plusIm := h.PlusRe[:n], h.PlusIm[:n]
	crossRe, crossIm := h.CrossRe[:n], h.CrossIm[:n]
	dataRe, dataIm, weight := s.dataRe[:n], s.dataIm[:n], s.weight[:n]
	gateRe, gateIm := s.gateRe[:n], s.gateIm[:n]
	outIm = outIm[:n]
	fp, fc := s.plus, s.cross
	for j := range outRe {
		re := fp*plusRe[j] + fc*crossRe[j]
		im := fp*plusIm[j] + fc*crossIm[j]
		cross += dataRe[j]*re + dataIm[j]*im
		square += weight[j] * (re*re + im*im)
		outRe[j], outIm[j] = re*gateRe[j]-im*gateIm[j], re*gateIm[j]+im*gateRe[j]
	}
	return cross, square
}
