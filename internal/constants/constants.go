// Package constants holds the physical constants of the whole project, each
// with its source. No other file states one.
package constants

const (
	// SpeedOfLight is c in m/s, exact by definition of the metre (SI brochure,
	// 9th edition, 2019).
	SpeedOfLight = 299792458.0

	// SolarMassParameter is the nominal G M_sun in m^3/s^2 (IAU 2015
	// resolution B3, arXiv:1510.07674).
	SolarMassParameter = 1.3271244e20

	// SolarMassSeconds is G M_sun / c^3 in seconds.
	SolarMassSeconds = SolarMassParameter / (SpeedOfLight * SpeedOfLight * SpeedOfLight)

	// SolarMassMetres is G M_sun / c^2 in metres.
	SolarMassMetres = SolarMassParameter / (SpeedOfLight * SpeedOfLight)

	// PlanckLength is sqrt(hbar G / c^3) in metres (CODATA 2018).
	PlanckLength = 1.616255e-35

	// PlanckConstant is h in J s, exact by definition of the kilogram (SI
	// brochure, 9th edition, 2019).
	PlanckConstant = 6.62607015e-34

	// BoltzmannConstant is k_B in J/K, exact by definition of the kelvin (SI
	// brochure, 9th edition, 2019).
	BoltzmannConstant = 1.380649e-23

	// EarthSemiMajor and EarthSemiMinor are the axes of the WGS-84 ellipsoid in
	// metres (NIMA TR8350.2, 3rd edition, 2000).
	EarthSemiMajor = 6378137.0
	EarthSemiMinor = 6356752.314245
)
