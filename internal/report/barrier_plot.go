package report

import (
	"fmt"
	"math"
	"math/cmplx"
	"slices"

	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
)

// greybodyFloor is the smallest greybody factor that a picture shows; a wave of high l
// and low frequency has many decades below it.
const greybodyFloor = 1e-16

// barrierColumns are the numbers of a barrier's points by column, x in hertz where
// the points have a frequency in hertz.
type barrierColumns struct {
	x, reflected, greybody, amplified, phase []float64
}

func newBarrierColumns(points []BarrierPoint) *barrierColumns {
	c := &barrierColumns{}
	for _, p := range points {
		x := float64(p.Omega)
		if p.Frequency != nil {
			x = float64(*p.Frequency)
		}
		r := joined(p.Reflection)
		size := cmplx.Abs(r)
		phase := cmplx.Phase(r)
		if n := len(c.phase); n > 0 {
			// The branch nearest to the point before.
			phase += 2 * math.Pi * math.Round((c.phase[n-1]-phase)/(2*math.Pi))
			if math.IsNaN(phase) {
				phase = c.phase[n-1]
			}
		}
		c.x = append(c.x, x)
		c.reflected = append(c.reflected, size*size)
		c.greybody = append(c.greybody, float64(p.Greybody))
		c.amplified = append(c.amplified, -float64(p.Greybody))
		c.phase = append(c.phase, phase)
	}
	return c
}

// BarrierPicture draws a barrier's response: the reflected energy, the greybody factor
// on a logarithmic axis, and the phase of the reflection. line holds many points by
// growing frequency, which make the curves; the document's own points are dots on
// them. The band in which waves are amplified is shaded.
func BarrierPicture(d *BarrierDocument, line []BarrierPoint) Picture {
	curves, points := newBarrierColumns(line), newBarrierColumns(d.Points)
	xLow, xHigh := extent(append(append([]float64(nil), curves.x...), points.x...), always)
	if xLow > 0 && xLow < 0.1*xHigh {
		xLow = 0
	}
	x := axis{label: "frequency Mω", low: xLow, high: xHigh}
	edge := float64(d.M) * float64(d.HorizonFrequency)
	subtitle := "waves from the horizon side; time dependence exp(-iωt)"
	if d.Mass != nil {
		x.label = "frequency in the detector frame (Hz)"
		if scale := hertzPerOmega(d); scale > 0 && !math.IsInf(scale, 0) {
			edge *= scale
			subtitle += fmt.Sprintf("; %.6g solar masses, Mω = 0.1 at %.4g Hz", float64(*d.Mass), 0.1*scale)
		}
	}
	p := &page{
		title:    fmt.Sprintf("Barrier of a Kerr remnant: l = %d, m = %d, spin %g, %s parity", d.L, d.M, float64(d.Spin), d.Parity),
		subtitle: subtitle,
	}
	bottom := func(a axis, last bool) axis {
		if !last {
			a.label = ""
		}
		return a
	}
	_, top := extent(curves.reflected, always)
	deep, _ := extent(curves.greybody, always)
	reflected := newPanel(bottom(x, false), axis{label: "share of the energy", low: 1.1 * min(deep, 0), high: 1.1 * max(top, 1)})
	_, high := extent(append(append([]float64(nil), curves.greybody...), curves.amplified...), always)
	low := max(lowSize(curves.greybody)/3, greybodyFloor)
	greybody := newPanel(bottom(x, false), axis{label: "|greybody factor|", low: low, high: 2 * max(high, 1), log: true})
	phaseLow, phaseHigh := extent(curves.phase, always)
	margin := 0.05 * (phaseHigh - phaseLow)
	phase := newPanel(bottom(x, true), axis{label: "phase of R (rad)", low: phaseLow - margin, high: phaseHigh + margin})
	p.panels = []*panel{reflected, greybody, phase}

	solid, dashed := lineStyle(0), lineStyle(1)
	faint := lineStyle(2)
	edgeStyle := draw.LineStyle{Color: grey, Width: 0.8, Dashes: []vg.Length{3, 2}}
	// The band, if the picture reaches it.
	banded := max(0, edge) > x.low && min(0, edge) < x.high && edge != 0
	for _, panel := range p.panels {
		if banded {
			panel.Add(band{low: min(0, edge), high: max(0, edge), color: tint}, rules{})
			m := mark{at: edge, style: edgeStyle}
			if panel == reflected {
				m.text, panel.names = "ω = mΩ of the horizon", true
			}
			panel.Add(m)
		}
	}
	reflected.Add(
		curve{curves.x, curves.reflected, solid},
		curve{curves.x, curves.greybody, faint})
	greybody.Add(curve{curves.x, curves.greybody, faint}, curve{curves.x, curves.amplified, dashed})
	phase.Add(curve{curves.x, curves.phase, solid})
	dot := func(style draw.LineStyle) draw.GlyphStyle {
		return draw.GlyphStyle{Color: style.Color, Radius: 2.6, Shape: draw.CircleGlyph{}}
	}
	reflected.Add(dots{points.x, points.reflected, dot(solid)}, dots{points.x, points.greybody, dot(faint)})
	greybody.Add(dots{points.x, points.greybody, dot(faint)}, dots{points.x, points.amplified, dot(dashed)})
	// The points' own phases, on the curve's branch.
	for i := range points.x {
		points.phase[i] = onBranch(points.phase[i], points.x[i], curves)
	}
	phase.Add(dots{points.x, points.phase, dot(solid)})

	p.legend = []legendEntry{
		{text: "|R|² reflected; phase of R", line: solid},
		{text: "greybody factor 1 - |R|²", line: faint},
	}
	if banded {
		p.legend = append(p.legend,
			legendEntry{text: "|R|² - 1, amplified", line: dashed},
			legendEntry{text: "waves amplified", area: tint})
	}
	if len(points.x) > 0 {
		glyph := dot(draw.LineStyle{Color: ink})
		p.legend = append(p.legend, legendEntry{text: "frequencies asked for", glyph: &glyph})
	}
	return Picture{p}
}

func always(float64) bool { return true }

// hertzPerOmega is how many hertz M omega = 1 is, as the points say; 0 if none does.
func hertzPerOmega(d *BarrierDocument) float64 {
	best, scale := 0.0, 0.0
	for _, p := range d.Points {
		if w := math.Abs(float64(p.Omega)); p.Frequency != nil && w > best {
			best, scale = w, float64(*p.Frequency)/float64(p.Omega)
		}
	}
	return scale
}

// lowSize is the size that all but a hundredth of the values exceed: where they go
// through zero they would stretch a logarithmic axis for nothing.
func lowSize(values []float64) float64 {
	sizes := make([]float64, 0, len(values))
	for _, v := range values {
		if size := math.Abs(v); size > 0 && !math.IsInf(size, 0) {
			sizes = append(sizes, size)
		}
	}
	if len(sizes) == 0 {
		return 0
	}
	slices.Sort(sizes)
	return sizes[len(sizes)/100]
}

// onBranch moves a phase by whole turns to the curve at the nearest x.
func onBranch(phase, x float64, c *barrierColumns) float64 {
	best, near := math.Inf(1), phase
	for i, at := range c.x {
		if distance := math.Abs(at - x); distance < best {
			best, near = distance, c.phase[i]
		}
	}
	return phase + 2*math.Pi*math.Round((near-phase)/(2*math.Pi))
}
