// Package kerr knows the remnant: the geometry of a Kerr black hole, its
// quasi-normal modes, their angular functions, and the barrier that waves from
// just outside the horizon meet. It knows nothing of waveforms or detectors.
//
// Units are G = c = M = 1 with fields going as exp(-iωt + imφ), so a decaying
// mode has Im ω < 0; frequencies are Mω, lengths and times in M, spins a/M from
// 0 to MaxSpin. Multiply a time by constants.SolarMassSeconds times the mass to
// leave the package. All fields have spin weight -2.
//
// The road of a mode:
//
//  1. radial.go and angular.go hold the two continued fractions whose common
//     zero is a mode; mode.go solves them together at spin 0 from a table of
//     starting points and follows the root up in spin, and mode_polish.go does
//     the last step in 32 digits (QuasiNormalMode, 1e-14 in 1 to 20 ms).
//  2. modetable_file.go tabulates every mode and its separation constant over
//     all spins by Chebyshev series on panels that shrink where overtones nearly
//     meet (WriteModeTable, run by go generate through internal/tabulatemodes in
//     half a minute); modetable.go embeds the file and evaluates it
//     (TabulatedMode, 5e-13 in less than 0.1 µs).
//  3. spheroidal.go expands the angular function in functions of the sphere at
//     the mode's aω (Spheroidal); its eigenvalue is a second road to the
//     separation constant. spheroidal_slope.go adds derivatives.
//  4. track.go joins both for one polar angle over all spins (NewModeTrack, a
//     millisecond; NewSphericalModeTrack leaves the sphere's functions), so that
//     a sampler pays less than 0.1 µs per mode and spin (ModeTrack.At).
//
// The road of the barrier:
//
//  1. upgoing.go integrates the radial equation from far away to the horizon for
//     one frequency; response.go turns the amplitudes into reflection and
//     transmission, flux normalised, with the phase of a parity
//     (BarrierResponse; its comment has errors and cost).
//  2. internal/tabulate, run by go generate, fits charts of R and T to that for
//     l = 2 to 4 (internal/chart): local polynomials in spin and frequency whose
//     frequencies move with the features of the response. It takes 4 minutes on
//     two cores, fills barrier/ with 5.3 MB and measures each file at 4,000 random
//     points: it is off by 1.7e-10 of R and 3.4e-10 of T at most.
//  3. table.go embeds the files and decodes one when it is first asked for (8 ms);
//     table_even.go gives R the phase of the other parity (20 ms more).
//  4. barrier.go serves a sampler: SetSpin once per spin, then Reflection and
//     Transmission for any number of frequencies. section.go sums the terms in
//     spin of those pieces that frequencies fall into, section_walk.go evaluates
//     what is left, polynomials in frequency. R at a new spin and 8,000 even
//     frequencies from 0.001 to 2 takes 31 µs (BenchmarkNewSpin8000), T 33 µs
//     (BenchmarkTransmission).
//
// stability*.go and gain.go: the superradiant band in a table of its own, which
// knows |R|² - 1 even where it is 1e-10, the largest reflectivity that is stable,
// and a cavity's fastest growing mode.
//
// geometry*.go has horizons, light rings, temperature, proper distances, the
// tortoise coordinate with its inverse, and the echo delay. infinity.go turns a
// Response around, for waves that come from far away.
//
// Which mode is which: overtone n is the n-th by decay rate at spin 0, and keeps
// its number along the spin. A few pairs of overtones nearly meet on the way
// (l=3, m=1, n=5 and 6 at spin 0.9722, for one) and turn sharply there.
package kerr
