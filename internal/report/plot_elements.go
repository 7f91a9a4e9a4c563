package report

import (
	"image/color"
	"math"

	"gonum.org/v1/plot"
	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
)

// The things drawn in a panel. Points that the panel cannot show (not finite, or not
// above zero on a logarithmic axis) are left out, and a curve has a gap there.
var (
	_ plot.Plotter = rules{}
	_ plot.Plotter = curve{}
	_ plot.Plotter = dots{}
	_ plot.Plotter = band{}
	_ plot.Plotter = mark{}
)

// place maps a point to the canvas.
func place(c *draw.Canvas, p *plot.Plot, x, y float64) (at vg.Point, ok bool) {
	for _, side := range []struct {
		a *plot.Axis
		v float64
	}{{&p.X, x}, {&p.Y, y}} {
		if math.IsNaN(side.v) || math.IsInf(side.v, 0) {
			return at, false
		}
		if _, log := side.a.Scale.(plot.LogScale); log && side.v <= 0 {
			return at, false
		}
	}
	// Far outside, a canvas's numbers lose their meaning: the curve leaves the panel
	// just as well a few panels away.
	u, v := min(max(p.X.Norm(x), -9), 9), min(max(p.Y.Norm(y), -9), 9)
	return vg.Point{X: c.X(u), Y: c.Y(v)}, true
}

// rules are the thin lines at the labelled ticks, and the frame.
type rules struct{}

func (rules) Plot(c draw.Canvas, p *plot.Plot) {
	style := draw.LineStyle{Color: paleGrey, Width: 0.6}
	for _, t := range p.X.Tick.Marker.Ticks(p.X.Min, p.X.Max) {
		if x := c.X(p.X.Norm(t.Value)); !t.IsMinor() && c.ContainsX(x) {
			c.StrokeLine2(style, x, c.Min.Y, x, c.Max.Y)
		}
	}
	for _, t := range p.Y.Tick.Marker.Ticks(p.Y.Min, p.Y.Max) {
		if y := c.Y(p.Y.Norm(t.Value)); !t.IsMinor() && c.ContainsY(y) {
			c.StrokeLine2(style, c.Min.X, y, c.Max.X, y)
		}
	}
}

// curve is a line through points in the order given.
type curve struct {
	x, y  []float64
	style draw.LineStyle
}

func (l curve) Plot(c draw.Canvas, p *plot.Plot) {
	var run []vg.Point
	flush := func() {
		c.StrokeLines(l.style, c.ClipLinesXY(run)...)
		run = nil
	}
	for i := range l.x {
		if at, ok := place(&c, p, l.x[i], l.y[i]); ok {
			run = append(run, at)
		} else {
			flush()
		}
	}
	flush()
}

// dots are points.
type dots struct {
	x, y  []float64
	style draw.GlyphStyle
}

func (d dots) Plot(c draw.Canvas, p *plot.Plot) {
	for i := range d.x {
		if at, ok := place(&c, p, d.x[i], d.y[i]); ok && c.Contains(at) {
			c.DrawGlyphNoClip(d.style, at)
		}
	}
}

// band shades a stretch of an axis: of the vertical one if across is set.
type band struct {
	low, high float64
	across    bool
	color     color.Color
}

func (b band) Plot(c draw.Canvas, p *plot.Plot) {
	a := p.X
	if b.across {
		a = p.Y
	}
	low, high := max(b.low, a.Min), min(b.high, a.Max)
	if !(low < high) {
		return
	}
	x0, x1, y0, y1 := c.Min.X, c.Max.X, c.Min.Y, c.Max.Y
	if b.across {
		y0, y1 = c.Y(a.Norm(low)), c.Y(a.Norm(high))
	} else {
		x0, x1 = c.X(a.Norm(low)), c.X(a.Norm(high))
	}
	c.FillPolygon(b.color, []vg.Point{{X: x0, Y: y0}, {X: x1, Y: y0}, {X: x1, Y: y1}, {X: x0, Y: y1}})
}

// mark is a line across the panel at one x with its name above the frame, in the strip
// that page keeps free for it: beginning at the line, or ending there if left is set,
// so that the names of two near lines stand apart.
type mark struct {
	at    float64
	text  string
	left  bool
	style draw.LineStyle
}

func (m mark) Plot(c draw.Canvas, p *plot.Plot) {
	if !(m.at >= p.X.Min && m.at <= p.X.Max) {
		return
	}
	x := c.X(p.X.Norm(m.at))
	c.StrokeLine2(m.style, x, c.Min.Y, x, c.Max.Y)
	if m.text == "" {
		return
	}
	style := letters(smallSize, m.style.Color)
	width := style.Width(m.text)
	begin := x - 2
	if m.left {
		begin = x - width + 2
	}
	// Inside the frame's width as far as the name fits.
	begin = max(min(begin, c.Max.X-width), c.Min.X)
	c.FillText(style, vg.Point{X: begin, Y: c.Max.Y + 3}, m.text)
}

// extent returns the smallest and largest of the values that pass.
func extent(values []float64, pass func(float64) bool) (low, high float64) {
	low, high = math.Inf(1), math.Inf(-1)
	for _, v := range values {
		if !math.IsNaN(v) && !math.IsInf(v, 0) && pass(v) {
			low, high = min(low, v), max(high, v)
		}
	}
	return low, high
}
