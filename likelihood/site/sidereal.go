package site

import "math"

// leapSeconds are the GPS seconds at which GPS time minus UTC grew by one second,
// since the GPS epoch 1980-01-06. Source: IERS Bulletin C series, the last entry
// from number 52 (from memory; the test beside this file rebuilds the seconds from
// the calendar dates).
var leapSeconds = [...]float64{
	46828801,   // 1981-07-01
	78364802,   // 1982-07-01
	109900803,  // 1983-07-01
	173059204,  // 1985-07-01
	252028805,  // 1988-01-01
	315187206,  // 1990-01-01
	346723207,  // 1991-01-01
	393984008,  // 1992-07-01
	425520009,  // 1993-07-01
	457056010,  // 1994-07-01
	504489611,  // 1996-01-01
	551750412,  // 1997-07-01
	599184013,  // 1999-01-01
	820108814,  // 2006-01-01
	914803215,  // 2009-01-01
	1025136016, // 2012-07-01
	1119744017, // 2015-07-01
	1167264018, // 2017-01-01
}

// UTCOffset returns GPS time minus UTC in seconds at a GPS time. Before 1980 and
// after the table's last entry the nearest entry holds.
func UTCOffset(gps float64) float64 {
	n := 0
	for n < len(leapSeconds) && gps >= leapSeconds[n] {
		n++
	}
	return float64(n)
}

const (
	secondsPerDay  = 86400.0
	daysPerCentury = 36525.0
	// epochDays is the GPS epoch in days after J2000.0 (JD 2444244.5 - 2451545.0).
	epochDays = -7300.5
	// terrestrialMinusGPS is TT - GPS time in seconds: 19 + 32.184.
	terrestrialMinusGPS = 51.184
	arcsecond           = math.Pi / (180 * 3600)
)

// SiderealTime returns the mean sidereal time at longitude 0 in [0, 2 pi) rad at a
// GPS time: the Earth rotation angle plus the accumulated precession, with UT1 taken
// as UTC.
//
// Source: IERS Conventions (2010), technical note 36, equations 5.14, 5.15 and 5.32,
// with the corrected signs of the fourth and fifth power. A GPS time of 1.4e9 s is
// stored to 2.4e-7 s, which is 1.7e-11 rad.
func SiderealTime(gps float64) float64 {
	days := (gps-UTCOffset(gps))/secondsPerDay + epochDays
	t := ((gps+terrestrialMinusGPS)/secondsPerDay + epochDays) / daysPerCentury
	_, fraction := math.Modf(days)
	// The whole days' full turns drop out here, before they cost digits.
	turns := fraction + 0.7790572732640 + 0.00273781191135448*days
	precession := 0.014506 + t*(4612.156534+t*(1.3915817+t*(-0.00000044+t*(-0.000029956+t*-0.0000000368))))
	angle := math.Mod(2*math.Pi*turns+precession*arcsecond, 2*math.Pi)
	if angle < 0 {
		angle += 2 * math.Pi
	}
	return angle
}
