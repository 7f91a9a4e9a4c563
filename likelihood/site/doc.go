// Package site knows where a detector on the ground stands and how it answers
// a wave from a given direction.
//
// The road of the data:
//
//  1. Lookup takes a two-character code from the catalogue (catalogue.go), or
//     New takes the surveyed numbers of any other place (geometry.go). Both give
//     a Site: earth-fixed position and arm directions.
//  2. SiderealTime turns GPS time into the Earth's rotation (sidereal.go).
//  3. Site.Response and Site.Delay turn a sky direction and a time into the two
//     antenna factors and the arrival time (response.go).
//
// Earth-fixed axes: x to latitude 0 and longitude 0, y to longitude 90 degrees
// east, z to the north pole, on the WGS-84 ellipsoid. Angles are in radians,
// lengths in metres, times in GPS seconds.
//
// Left out, with its size: UT1 is taken as UTC (below 0.9 s, so below 6.6e-5 rad
// of rotation), and the mean equinox of date is taken as the origin of right
// ascension of the given coordinates, so precession since 2000 is not applied
// (about 2.4e-4 rad a year; common practice in the trade, no source, and what a
// published sky position means when it was found the same way). Nutation and
// polar motion (below 1e-4 rad) are left out too.
package site
