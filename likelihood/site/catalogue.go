package site

import (
	"fmt"
	"math"
	"strings"
)

// surveyed is one site as surveys print it: degrees, minutes and seconds, and
// azimuths in degrees clockwise from north.
type surveyed struct {
	code                string
	latitude, longitude [3]float64 // deg, arcmin, arcsec; the sign is in the side
	latitudeSide        float64    // +1 north, -1 south
	longitudeSide       float64    // +1 east, -1 west
	height              float64    // m above the ellipsoid
	xAzimuth, yAzimuth  float64    // deg
	xTilt, yTilt        float64    // rad
}

// catalogue holds the sites known by code. Source: technical note T980044 and
// arXiv:gr-qc/0008066, table 1 (from memory; the test beside this file compares
// the vectors that follow from these numbers with the printed vectors).
//
// Two printed azimuths such as "north 35.9994 west" become 360 - 35.9994.
var catalogue = [...]surveyed{
	{
		code:     "H1",
		latitude: [3]float64{46, 27, 18.528}, latitudeSide: 1,
		longitude: [3]float64{119, 24, 27.5657}, longitudeSide: -1,
		height:   142.554,
		xAzimuth: 360 - 35.9994, yAzimuth: 270 - 35.9994,
		xTilt: -6.195e-4, yTilt: 1.25e-5,
	},
	{
		code:     "L1",
		latitude: [3]float64{30, 33, 46.4196}, latitudeSide: 1,
		longitude: [3]float64{90, 46, 27.2654}, longitudeSide: -1,
		height:   -6.574,
		xAzimuth: 270 - 17.7165, yAzimuth: 180 - 17.7165,
		xTilt: -3.121e-4, yTilt: -6.107e-4,
	},
	{
		code:     "V1",
		latitude: [3]float64{43, 37, 53.0921}, latitudeSide: 1,
		longitude: [3]float64{10, 30, 16.1878}, longitudeSide: 1,
		height:   51.884,
		xAzimuth: 19.4326, yAzimuth: 270 + 19.4326,
	},
}

// Codes returns the codes that Lookup knows, in the catalogue's order.
func Codes() []string {
	codes := make([]string, len(catalogue))
	for i, s := range catalogue {
		codes[i] = s.code
	}
	return codes
}

// Lookup returns the site of a two-character code. An unknown code gives a
// *FieldError that lists the known ones.
func Lookup(code string) (Site, error) {
	for _, s := range catalogue {
		if s.code != code {
			continue
		}
		return New(s.code,
			s.latitudeSide*degrees(s.latitude), s.longitudeSide*degrees(s.longitude), s.height,
			s.xAzimuth*math.Pi/180, s.yAzimuth*math.Pi/180, s.xTilt, s.yTilt)
	}
	return Site{}, &FieldError{"code", fmt.Sprintf("%q", code),
		"one of " + strings.Join(Codes(), ", ") + ", or the geometry of the site"}
}

// degrees turns degrees, arcminutes and arcseconds into radians.
func degrees(d [3]float64) float64 {
	return (d[0] + d[1]/60 + d[2]/3600) * math.Pi / 180
}
