package site

import (
	"math"
	"testing"
	"time"
)

// gpsOf returns the GPS seconds of a UTC moment, the leap seconds counted from
// calendar dates.
func gpsOf(moment time.Time) float64 {
	leap := 0
	for _, d := range leapDates {
		if !moment.Before(d) {
			leap++
		}
	}
	epoch := time.Date(1980, 1, 6, 0, 0, 0, 0, time.UTC)
	return moment.Sub(epoch).Seconds() + float64(leap)
}

// leapDates are the days that began after a leap second (IERS Bulletin C, from
// memory).
var leapDates = func() []time.Time {
	var dates []time.Time
	for _, d := range []string{
		"1981-07-01", "1982-07-01", "1983-07-01", "1985-07-01", "1988-01-01", "1990-01-01",
		"1991-01-01", "1992-07-01", "1993-07-01", "1994-07-01", "1996-01-01", "1997-07-01",
		"1999-01-01", "2006-01-01", "2009-01-01", "2012-07-01", "2015-07-01", "2017-01-01",
	} {
		moment, err := time.Parse(time.DateOnly, d)
		if err != nil {
			panic(err)
		}
		dates = append(dates, moment)
	}
	return dates
}()

func TestLeapSeconds(t *testing.T) {
	if len(leapDates) != len(leapSeconds) {
		t.Fatalf("%d leap seconds, want %d", len(leapSeconds), len(leapDates))
	}
	for i, d := range leapDates {
		if got, want := leapSeconds[i], gpsOf(d); got != want {
			t.Errorf("%s: GPS %.0f, want %.0f", d.Format(time.DateOnly), got, want)
		}
		if got := UTCOffset(leapSeconds[i]) - UTCOffset(leapSeconds[i]-1.5); got != 1 {
			t.Errorf("%s: the offset grows by %g, want 1", d.Format(time.DateOnly), got)
		}
	}
	// GPS - UTC has been 18 s since 2017-01-01 (IERS Bulletin C 52).
	if got := UTCOffset(gpsOf(time.Date(2024, 5, 17, 0, 0, 0, 0, time.UTC))); got != 18 {
		t.Errorf("offset in 2024 = %g, want 18", got)
	}
}

// meanSidereal1982 is the older formula (IAU 1982): seconds at 0h UT from the
// century, plus the day's own UT at the sidereal rate.
func meanSidereal1982(moment time.Time) float64 {
	midnight := time.Date(moment.Year(), moment.Month(), moment.Day(), 0, 0, 0, 0, time.UTC)
	noon2000 := time.Date(2000, 1, 1, 12, 0, 0, 0, time.UTC)
	century := midnight.Sub(noon2000).Hours() / 24 / 36525
	seconds := 24110.54841 + 8640184.812866*century + 0.093104*century*century - 6.2e-6*century*century*century
	// The rate of UT in sidereal seconds follows from the formula's derivative.
	seconds += moment.Sub(midnight).Seconds() * 1.002737909350795
	return math.Mod(seconds/86400*2*math.Pi, 2*math.Pi)
}

func TestSiderealTime(t *testing.T) {
	// The two formulas differ by the corrected rate of precession, 0.3" a century
	// times the cosine of the obliquity, plus 0.0145": 3.4e-7 rad at 20 years.
	for _, tc := range []struct {
		moment time.Time
		tol    float64
	}{
		{time.Date(2000, 1, 1, 12, 0, 0, 0, time.UTC), 1e-7},
		{time.Date(1987, 4, 10, 19, 21, 0, 0, time.UTC), 4e-7},
		{time.Date(2004, 2, 29, 3, 4, 5, 0, time.UTC), 2e-7},
		{time.Date(2016, 12, 31, 23, 59, 59, 0, time.UTC), 4e-7},
		{time.Date(2024, 5, 17, 6, 7, 8, 0, time.UTC), 5e-7},
	} {
		got, want := SiderealTime(gpsOf(tc.moment)), meanSidereal1982(tc.moment)
		d := math.Remainder(got-want, 2*math.Pi)
		t.Logf("%s: %.9f rad, minus the 1982 formula %.2g rad", tc.moment.Format(time.RFC3339), got, d)
		if math.Abs(d) > tc.tol {
			t.Errorf("%s: %.9f, want %.9f within %g", tc.moment.Format(time.RFC3339), got, want, tc.tol)
		}
	}
	// 280.46061837 deg at noon on 2000-01-01 UT1: the constants of the IAU 1982
	// formula brought to that moment; 4.1e-6 deg is the frames' 0.0145".
	if got := SiderealTime(630763213) * 180 / math.Pi; math.Abs(got-280.46061837) > 5e-6 {
		t.Errorf("at 2000-01-01 12:00 = %.8f deg, want 280.46061837", got)
	}
	for _, gps := range []float64{-1e9, 0, 1, 1e9, 1.4e9, 3e9} {
		if got := SiderealTime(gps); got < 0 || got >= 2*math.Pi {
			t.Errorf("SiderealTime(%g) = %g outside [0, 2 pi)", gps, got)
		}
	}
}
