package report

import (
	"fmt"
	"math"

	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
)

// EchoCurves are the columns of the curves of a picture of echoes: by frequency in
// hertz the barrier's |R| and, for each law of the document, |q|.
type EchoCurves struct {
	Frequency []float64
	Barrier   []float64
	Ratio     [][]float64
}

// echoFloor is the smallest amplitude that a picture of echoes shows.
const echoFloor = 1e-6

// EchoPicture draws the amplitude per echo of each law by frequency, with the mode and
// the edge of the amplified band marked, and below it the echoes at the mode's
// frequency by time. Above 1 echoes grow: that part is shaded.
func EchoPicture(d *EchoDocument, curves *EchoCurves) Picture {
	xLow, xHigh := extent(curves.Frequency, always)
	xHigh = max(xHigh, 1.05*float64(d.Mode.Frequency))
	low, high := math.Inf(1), 1.0
	for _, ratio := range curves.Ratio {
		// Away from the high end, where all fall to nothing.
		for j, v := range ratio {
			if curves.Frequency[j] <= 1.15*float64(d.Mode.Frequency) && v > 0 {
				low = min(low, v)
			}
			high = max(high, v)
		}
	}
	low = min(max(low/2, echoFloor), 0.1)
	if xLow > 0 && xLow < 0.1*xHigh {
		xLow = 0
	}
	byFrequency := newPanel(
		axis{label: "frequency in the detector frame (Hz)", low: xLow, high: xHigh},
		axis{label: "amplitude per echo |q|", low: low, high: 2 * high, log: true})
	growing := band{low: 1, high: math.Inf(1), across: true, color: tint}
	byFrequency.names = true
	byFrequency.Add(growing, rules{})
	thin := draw.LineStyle{Color: grey, Width: 0.8, Dashes: []vg.Length{3, 2}}
	for _, m := range []mark{
		{at: float64(d.AmplifiedBelow), text: "mΩ of the horizon", left: float64(d.AmplifiedBelow) < float64(d.Mode.Frequency), style: thin},
		{at: float64(d.Mode.Frequency), text: fmt.Sprintf("mode (%d,%d,%d)", d.L, d.M, d.N), left: float64(d.AmplifiedBelow) >= float64(d.Mode.Frequency), style: thin},
	} {
		if m.at > 0 {
			byFrequency.Add(m)
		}
	}
	barrier := draw.LineStyle{Color: ink, Width: 0.9}
	byFrequency.Add(curve{curves.Frequency, curves.Barrier, barrier})

	p := &page{
		title: fmt.Sprintf("Echoes of a remnant: %.6g solar masses, spin %g", float64(d.Mass), float64(d.Spin)),
		subtitle: fmt.Sprintf("surface at offset %.6g (log10 of Planck lengths); l = %d, m = %d, %s parity; echoes every %.6g s",
			float64(d.Offset), d.L, d.M, d.Parity, float64(d.EchoDelay)),
	}
	least, most, last := 1.0, 1.0, 1
	for _, l := range d.Laws {
		for i, v := range l.Echoes {
			if x := float64(v); x > 0 && !math.IsInf(x, 0) {
				least, most = min(least, x), max(most, x)
			}
			last = max(last, i+1)
		}
	}
	least = min(max(least/2, echoFloor), 0.1)
	delay := float64(d.EchoDelay)
	byTime := newPanel(
		axis{label: fmt.Sprintf("arrival after the ringdown (s), at %.4g Hz", float64(d.Mode.Frequency)), low: -0.15 * delay, high: (float64(last) + 0.5) * delay},
		axis{label: "amplitude over the ringdown's", low: least, high: 2 * most, log: true})
	byTime.Add(growing, rules{})
	for i := range d.Laws {
		l, style := &d.Laws[i], lineStyle(i)
		if i < len(curves.Ratio) {
			byFrequency.Add(curve{curves.Frequency, curves.Ratio[i], style})
		}
		var x, y []float64
		for n := 0; n <= len(l.Echoes); n++ {
			x, y = append(x, float64(n)*delay), append(y, 1)
			if n > 0 {
				y[n] = float64(l.Echoes[n-1])
			}
		}
		glyph := draw.GlyphStyle{Color: style.Color, Radius: 3, Shape: glyphShapes[i%len(glyphShapes)]}
		faint := style
		faint.Width, faint.Dashes = 0.7, nil
		byTime.Add(curve{x, y, faint}, dots{x, y, glyph})
		p.legend = append(p.legend, legendEntry{text: l.label(), line: style, glyph: &glyph})
	}
	p.legend = append(p.legend,
		legendEntry{text: "barrier |R|: a perfect mirror", line: barrier},
		legendEntry{text: "echoes grow", area: tint})
	p.panels = []*panel{byFrequency, byTime}
	return Picture{p}
}

// glyphShapes tell the points of one panel apart.
var glyphShapes = []draw.GlyphDrawer{
	draw.CircleGlyph{}, draw.SquareGlyph{}, draw.PyramidGlyph{}, draw.BoxGlyph{}, draw.RingGlyph{}, draw.TriangleGlyph{}, draw.CrossGlyph{}, draw.PlusGlyph{},
}
