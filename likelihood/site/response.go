package site

import (
	"math"

	"knell/internal/constants"
)

// Response returns the site's two antenna factors, F+ and Fx, for a source at a
// right ascension and declination (rad) at a GPS time (s):
//
//	h = F+ h+ + Fx hx,   F+ = D : (m m - n n),   Fx = D : (m n + n m),
//	D = (X X - Y Y) / 2
//
// The wave's axes are m = west cos psi + north sin psi and n = -west sin psi +
// north cos psi, with west and north at the source on the sky, so that m x n points
// from the source to the Earth. The arms are taken as short against the wavelength.
//
// Source: arXiv:gr-qc/9804014 and arXiv:gr-qc/0008066.
func (s Site) Response(rightAscension, declination, polarization, gps float64) (plus, cross float64) {
	sinLon, cosLon := math.Sincos(rightAscension - SiderealTime(gps))
	sinDec, cosDec := math.Sincos(declination)
	sinPsi, cosPsi := math.Sincos(polarization)
	west := [3]float64{sinLon, -cosLon, 0}
	north := [3]float64{-sinDec * cosLon, -sinDec * sinLon, cosDec}
	var m, n [3]float64
	for i := range m {
		m[i] = cosPsi*west[i] + sinPsi*north[i]
		n[i] = -sinPsi*west[i] + cosPsi*north[i]
	}
	xm, xn := dot(s.X, m), dot(s.X, n)
	ym, yn := dot(s.Y, m), dot(s.Y, n)
	plus = (xm*xm - ym*ym - xn*xn + yn*yn) / 2
	cross = xm*xn - ym*yn
	return plus, cross
}

// Delay returns the arrival time at the site minus that at the geocentre, in
// seconds, for a wavefront from a right ascension and declination (rad) at a GPS
// time (s). It is negative where the site faces the source.
func (s Site) Delay(rightAscension, declination, gps float64) float64 {
	sinLon, cosLon := math.Sincos(rightAscension - SiderealTime(gps))
	sinDec, cosDec := math.Sincos(declination)
	towards := [3]float64{cosDec * cosLon, cosDec * sinLon, sinDec}
	return -dot(s.Position, towards) / constants.SpeedOfLight
}
