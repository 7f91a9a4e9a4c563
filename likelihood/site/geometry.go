package site

import (
	"fmt"
	"math"

	"knell/internal/constants"
)

// Site is one detector with two straight arms.
type Site struct {
	// Code is the two-character code of the site, such as H1.
	Code string
	// Position is the corner where the arms meet, earth-fixed, in metres.
	Position [3]float64
	// X and Y are the earth-fixed unit vectors along the arms.
	X, Y [3]float64
}

// FieldError says which number of a site's description is wrong.
type FieldError struct {
	Field string // the name of New's argument
	Got   string
	Want  string
}

func (e *FieldError) Error() string {
	return fmt.Sprintf("site: %s = %s, want %s", e.Field, e.Got, e.Want)
}

// maxTilt bounds the tilt of an arm, in radians. Surveyed tilts are below 1e-3;
// the bound only catches degrees given as radians.
const maxTilt = 0.1

// minArmSine is the smallest sine of the angle between the arms: below it the
// site hardly answers at all, which is a slip in the azimuths.
const minArmSine = 1e-3

// New returns the site at a geodetic latitude (rad, north positive), longitude
// (rad, east positive) and height above the WGS-84 ellipsoid (m). The arms'
// azimuths are in radians clockwise from true north as seen from above (east is
// pi/2), their tilts in radians above the local horizontal.
//
// A number outside its range, and arms that are parallel, give a *FieldError.
//
// Source of the relations: arXiv:gr-qc/0008066.
func New(code string, latitude, longitude, height, xAzimuth, yAzimuth, xTilt, yTilt float64) (Site, error) {
	if code == "" {
		return Site{}, &FieldError{"code", `""`, "a code of two characters, such as H1"}
	}
	for _, f := range []struct {
		name, unit string
		value      float64
		limit      float64
	}{
		{"latitude", "rad", latitude, math.Pi / 2},
		{"longitude", "rad", longitude, 2 * math.Pi},
		{"height", "m", height, 1e5},
		{"xAzimuth", "rad", xAzimuth, 2 * math.Pi},
		{"yAzimuth", "rad", yAzimuth, 2 * math.Pi},
		{"xTilt", "rad", xTilt, maxTilt},
		{"yTilt", "rad", yTilt, maxTilt},
	} {
		if !(math.Abs(f.value) <= f.limit) { // written so that NaN fails
			return Site{}, &FieldError{f.name, fmt.Sprintf("%g %s", f.value, f.unit),
				fmt.Sprintf("between %g and %g %s", -f.limit, f.limit, f.unit)}
		}
	}
	frame := newFrame(latitude, longitude)
	s := Site{
		Code:     code,
		Position: geocentric(latitude, longitude, height),
		X:        frame.direction(xAzimuth, xTilt),
		Y:        frame.direction(yAzimuth, yTilt),
	}
	if c := dot(s.X, s.Y); 1-c*c < minArmSine*minArmSine {
		return Site{}, &FieldError{"yAzimuth", fmt.Sprintf("%g rad", yAzimuth),
			fmt.Sprintf("not along the X arm at %g rad", xAzimuth)}
	}
	return s, nil
}

// geocentric turns geodetic coordinates on the WGS-84 ellipsoid into earth-fixed
// metres. Source: NIMA TR8350.2 (2000), section 4.
func geocentric(latitude, longitude, height float64) [3]float64 {
	const a2 = constants.EarthSemiMajor * constants.EarthSemiMajor
	const b2 = constants.EarthSemiMinor * constants.EarthSemiMinor
	sinLat, cosLat := math.Sincos(latitude)
	sinLon, cosLon := math.Sincos(longitude)
	// normal is the length of the ellipsoid's normal from the surface to the
	// polar axis.
	normal := a2 / math.Sqrt(a2*cosLat*cosLat+b2*sinLat*sinLat)
	return [3]float64{
		(normal + height) * cosLat * cosLon,
		(normal + height) * cosLat * sinLon,
		(b2/a2*normal + height) * sinLat,
	}
}

// frame holds the local directions at a place, earth-fixed unit vectors.
type frame struct{ east, north, up [3]float64 }

func newFrame(latitude, longitude float64) frame {
	sinLat, cosLat := math.Sincos(latitude)
	sinLon, cosLon := math.Sincos(longitude)
	return frame{
		east:  [3]float64{-sinLon, cosLon, 0},
		north: [3]float64{-sinLat * cosLon, -sinLat * sinLon, cosLat},
		up:    [3]float64{cosLat * cosLon, cosLat * sinLon, sinLat},
	}
}

// direction returns the unit vector at an azimuth (clockwise from north) and a
// tilt above the horizontal, both in radians.
func (f frame) direction(azimuth, tilt float64) [3]float64 {
	sinAz, cosAz := math.Sincos(azimuth)
	sinTilt, cosTilt := math.Sincos(tilt)
	var v [3]float64
	for i := range v {
		v[i] = cosTilt*(sinAz*f.east[i]+cosAz*f.north[i]) + sinTilt*f.up[i]
	}
	return v
}

func dot(a, b [3]float64) float64 { return a[0]*b[0] + a[1]*b[1] + a[2]*b[2] }
