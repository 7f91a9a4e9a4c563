package report

import (
	"image/color"
	"math"

	"gonum.org/v1/plot"
	"gonum.org/v1/plot/font"
	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
)

// Colours of lines that stay apart for readers with any kind of colour vision (the
// values are a fact of the trade: common practice, from memory).
var (
	blue      = color.NRGBA{0x00, 0x72, 0xB2, 0xFF}
	vermilion = color.NRGBA{0xD5, 0x5E, 0x00, 0xFF}
	green     = color.NRGBA{0x00, 0x9E, 0x73, 0xFF}
	purple    = color.NRGBA{0xCC, 0x79, 0xA7, 0xFF}
	orange    = color.NRGBA{0xE6, 0x9F, 0x00, 0xFF}
	skyBlue   = color.NRGBA{0x56, 0xB4, 0xE9, 0xFF}
	ink       = color.NRGBA{0x22, 0x22, 0x22, 0xFF}
	grey      = color.NRGBA{0x77, 0x77, 0x77, 0xFF}
	paleGrey  = color.NRGBA{0xD9, 0xD9, 0xD9, 0xFF}
	tint      = color.NRGBA{0xFB, 0xF0, 0xDC, 0xFF} // behind a stretch of an axis
	paper     = color.NRGBA{0xFF, 0xFF, 0xFF, 0xFF}
)

// lineStyles tell the curves of one panel apart, by dashes too, for print in grey.
// A ninth curve looks like the first.
var lineStyles = []draw.LineStyle{
	{Color: blue, Width: 1.6},
	{Color: vermilion, Width: 1.6, Dashes: []vg.Length{7, 3}},
	{Color: green, Width: 1.6, Dashes: []vg.Length{2, 2}},
	{Color: purple, Width: 1.6, Dashes: []vg.Length{7, 2, 2, 2}},
	{Color: orange, Width: 1.6, Dashes: []vg.Length{12, 3}},
	{Color: skyBlue, Width: 1.6, Dashes: []vg.Length{4, 2}},
	{Color: ink, Width: 1.6, Dashes: []vg.Length{1, 3}},
	{Color: grey, Width: 1.6},
}

func lineStyle(i int) draw.LineStyle { return lineStyles[i%len(lineStyles)] }

// Sizes of a page, in points. It is as wide as the text of a printed page, so that
// its letters need no shrinking.
const (
	pageWidth   = 510
	panelHeight = 190
	pageMargin  = 12
	panelGap    = 10
	nameStrip   = 11
	titleSize   = 13
	labelSize   = 10
	smallSize   = 9
)

// letters is the style of text of a size, its anchor at the left of the base line.
func letters(size vg.Length, c color.Color) draw.TextStyle {
	return draw.TextStyle{
		Color: c, Font: font.From(font.Font{Typeface: "Liberation", Variant: "Sans"}, size),
		Handler: plot.DefaultTextHandler,
	}
}

// page is one picture: a title, a line below it, a legend and panels one under the
// other whose vertical edges are in line.
type page struct {
	title, subtitle string
	legend          []legendEntry
	panels          []*panel
}

// legendEntry names a line, points if glyph is set, or an area.
type legendEntry struct {
	text  string
	line  draw.LineStyle
	glyph *draw.GlyphStyle
	area  color.Color
}

// axis is the range and the look of one axis of a panel.
type axis struct {
	label     string // with the unit
	low, high float64
	log       bool
}

// panel is a plot with a label of its vertical axis drawn by the page: the plot
// library makes room for one on a logarithmic axis in the wrong place.
type panel struct {
	*plot.Plot
	label string
	names bool // marks have names, for which there must be room above
}

// newPanel returns an empty panel. A range that is not finite, or empty, is widened:
// what a picture shows may be anything that a command can compute.
func newPanel(x, y axis) *panel {
	p := &panel{Plot: plot.New(), label: y.label}
	y.label = ""
	p.BackgroundColor = nil
	for _, side := range []struct {
		a    *plot.Axis
		want axis
	}{{&p.X, x}, {&p.Y, y}} {
		a, want := side.a, side.want.sound()
		a.Min, a.Max = want.low, want.high
		a.Padding = 0
		a.Width, a.Color = 0.8, ink
		a.Label.Text, a.Label.Padding = want.label, 4
		a.Label.TextStyle.Font = letters(labelSize, ink).Font
		a.Label.TextStyle.Color = ink
		a.Tick.Label.Font = letters(smallSize, ink).Font
		a.Tick.Label.Color = ink
		a.Tick.Width, a.Tick.Color, a.Tick.Length = 0.8, ink, 5
		if want.log {
			a.Scale, a.Tick.Marker = plot.LogScale{}, plot.TickerFunc(decadeTicks)
		} else {
			a.Tick.Marker = plot.TickerFunc(evenTicks)
		}
	}
	p.Add(rules{})
	return p
}

// sound returns the axis with a range that can be drawn.
func (a axis) sound() axis {
	if math.IsNaN(a.low) || math.IsInf(a.low, 0) || math.IsNaN(a.high) || math.IsInf(a.high, 0) || a.low > a.high {
		a.low, a.high = 0, 1
		if a.log {
			a.low = 0.1
		}
	}
	if a.log {
		// Normal numbers: a logarithm of a subnormal one has lost digits.
		a.low = min(max(a.low, 1e-300), 1e300)
		if a.high = max(a.high, a.low); a.high/a.low < 2 {
			a.low, a.high = a.low/2, a.high*2
		}
		return a
	}
	a.low, a.high = max(a.low, -1e300), min(a.high, 1e300)
	if size := max(math.Abs(a.low), math.Abs(a.high)); a.high-a.low <= 1e-9*size || size < 1e-290 {
		// Less than an axis can name.
		middle, half := a.low+(a.high-a.low)/2, 0.05*size
		if size < 1e-290 {
			half = 1
		}
		a.low, a.high = middle-half, middle+half
	}
	return a
}

// draw paints the page on a canvas as large as size says.
func (p *page) draw(c draw.Canvas) {
	c.SetColor(paper)
	c.Fill(c.Rectangle.Path())
	left, right, y := vg.Length(pageMargin), c.Max.X-pageMargin, c.Max.Y-pageMargin
	title, small := letters(titleSize, ink), letters(labelSize, grey)
	y -= titleSize
	c.FillText(title, vg.Point{X: left, Y: y}, p.title)
	if p.subtitle != "" {
		y -= labelSize + 5
		c.FillText(small, vg.Point{X: left, Y: y}, p.subtitle)
	}
	y -= 6
	for _, row := range p.legendRows(right - left) {
		y -= labelSize + 4
		drawLegend(c, row, left, y)
	}
	y -= 10
	p.drawPanels(draw.Crop(c, left, -pageMargin, 6, y-c.Max.Y))
}

// drawPanels puts the panels one under the other, all with data areas of one size and
// in line.
func (p *page) drawPanels(c draw.Canvas) {
	n := vg.Length(len(p.panels))
	all := c
	c.Min.X += labelSize + 6
	var left, right, used vg.Length
	// Room around the data: for the axis and its label, and for half a tick's label.
	around := make([]vg.Rectangle, len(p.panels))
	for i, panel := range p.panels {
		inner := panel.DataCanvas(c)
		around[i] = vg.Rectangle{
			Min: vg.Point{X: inner.Min.X - c.Min.X, Y: inner.Min.Y - c.Min.Y},
			Max: vg.Point{X: c.Max.X - inner.Max.X, Y: c.Max.Y - inner.Max.Y},
		}
		if panel.names {
			around[i].Max.Y += nameStrip
		}
		left, right = max(left, around[i].Min.X), max(right, around[i].Max.X)
		used += around[i].Min.Y + around[i].Max.Y
	}
	height := (c.Max.Y - c.Min.Y - used - panelGap*(n-1)) / n
	top := c.Max.Y
	for i, panel := range p.panels {
		bottom := top - around[i].Max.Y - height - around[i].Min.Y
		at := c
		at.Min = vg.Point{X: c.Min.X + left - around[i].Min.X, Y: bottom}
		at.Max = vg.Point{X: c.Max.X - right + around[i].Max.X, Y: top}
		if panel.names {
			at.Max.Y -= nameStrip
		}
		panel.Draw(at)
		label := letters(labelSize, ink)
		label.Rotation, label.XAlign, label.YAlign = math.Pi/2, draw.XCenter, draw.YTop
		c.FillText(label, vg.Point{X: all.Min.X, Y: top - around[i].Max.Y - height/2}, panel.label)
		top = bottom - panelGap
	}
}

// size is the size of the page in points.
func (p *page) size() (width, height vg.Length) {
	rows := len(p.legendRows(pageWidth - 2*pageMargin))
	height = 2*pageMargin + titleSize + 16 + vg.Length(rows)*(labelSize+4) + vg.Length(len(p.panels))*panelHeight
	if p.subtitle != "" {
		height += labelSize + 5
	}
	return pageWidth, height
}

// Widths in a legend.
const (
	sampleWidth = 26
	sampleGap   = 5
	entryGap    = 14
)

// legendRows breaks the legend into rows of at most the width given.
func (p *page) legendRows(width vg.Length) [][]legendEntry {
	var rows [][]legendEntry
	used := vg.Length(0)
	for _, e := range p.legend {
		w := sampleWidth + sampleGap + letters(labelSize, ink).Width(e.text) + entryGap
		if len(rows) == 0 || used+w > width {
			rows, used = append(rows, nil), 0
		}
		rows[len(rows)-1] = append(rows[len(rows)-1], e)
		used += w
	}
	return rows
}

// drawLegend draws one row of a legend on the base line y.
func drawLegend(c draw.Canvas, row []legendEntry, x, y vg.Length) {
	style, middle := letters(labelSize, ink), y+0.35*labelSize
	for _, e := range row {
		switch {
		case e.area != nil:
			c.FillPolygon(e.area, []vg.Point{{X: x, Y: middle - 4}, {X: x + sampleWidth, Y: middle - 4}, {X: x + sampleWidth, Y: middle + 4}, {X: x, Y: middle + 4}})
		case e.glyph != nil:
			if e.line.Width > 0 {
				c.StrokeLine2(e.line, x, middle, x+sampleWidth, middle)
			}
			c.DrawGlyphNoClip(*e.glyph, vg.Point{X: x + sampleWidth/2, Y: middle})
		default:
			c.StrokeLine2(e.line, x, middle, x+sampleWidth, middle)
		}
		x += sampleWidth + sampleGap
		c.FillText(style, vg.Point{X: x, Y: y}, e.text)
		x += style.Width(e.text) + entryGap
	}
}
