package event

import (
	"fmt"
	"math"
	"regexp"
	"strings"

	"knell/likelihood/site"
	"knell/likelihood/strain"
)

var siteCode = regexp.MustCompile(`^[A-Z][A-Z0-9]$`)

func (d *decoder) site(t *table, before []Site) Site {
	const wantCode = `two characters, e.g. "H1"`
	s := Site{Code: t.text("code", wantCode)}
	if d.err == nil && !siteCode.MatchString(s.Code) {
		t.fail("code", wantCode)
	}
	for _, b := range before {
		if b.Code == s.Code {
			t.fail("code", "each site once")
		}
	}
	if t.has("geometry") {
		g := t.sub("geometry", wantTable)
		s.Geometry = &Geometry{
			Latitude:  g.number("latitude", "an angle from -pi/2 to pi/2 rad", func(x float64) bool { return math.Abs(x) <= math.Pi/2 }),
			Longitude: g.number("longitude", "an angle in rad, east positive", nil),
			Height:    g.numberOr("height", 0, "metres", nil),
			XAzimuth:  g.number("x_azimuth", "an angle in rad, clockwise from north", nil),
			YAzimuth:  g.number("y_azimuth", "an angle in rad, clockwise from north", nil),
			XTilt:     g.numberOr("x_tilt", 0, wantAngle, nil),
			YTilt:     g.numberOr("y_tilt", 0, wantAngle, nil),
		}
		g.finish()
	} else if d.err == nil {
		if _, err := site.Lookup(s.Code); err != nil {
			t.fail("code", fmt.Sprintf("a site of the catalogue (%s), or a geometry = {...} beside it", strings.Join(site.Codes(), ", ")))
		}
	}
	switch {
	case t.has("strain") && t.has("synthetic"):
		t.fail("strain", "either strain or synthetic, not both")
	case t.has("synthetic"):
		y := t.sub("synthetic", wantTable)
		s.Synthetic = &Synthetic{
			Curve:  y.choiceOr("curve", "", strain.CurveNames()),
			Seed:   uint64(y.integerOr("seed", 1, "a whole number, 0 or more", func(n int64) bool { return n >= 0 })),
			Length: y.numberOr("length", DefaultLength, wantSeconds, positive),
			Quiet:  y.flagOr("quiet", false),
		}
		y.finish()
	default:
		s.Strain = t.text("strain", wantFilePath+", or synthetic = {...}")
	}
	s.Noise = d.noise(t, s)
	t.finish()
	return s
}

func (d *decoder) noise(t *table, s Site) Noise {
	n := Noise{From: "data", Average: "median", Segment: DefaultSegment, Smooth: -1}
	if !t.has("noise") {
		t.known = append(t.known, "noise")
		return n
	}
	t = t.sub("noise", wantTable)
	n.From = t.choiceOr("from", "data", []string{"data", "curve", "file"})
	switch n.From {
	case "data":
		n.Average = t.choiceOr("average", "median", []string{"median", "mean"})
		n.Segment = t.numberOr("segment", DefaultSegment, wantSeconds, positive)
	case "curve":
		fallback := ""
		if s.Synthetic != nil {
			fallback = s.Synthetic.Curve
		}
		n.Curve = t.choiceOr("curve", fallback, strain.CurveNames())
	case "file":
		n.File = t.text("file", wantFilePath)
	}
	n.Smooth = t.numberOr("smooth", -1, "seconds, 0 or more", notNegative)
	t.finish()
	return n
}
