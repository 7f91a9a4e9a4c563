// Package models computes the two polarisations of a remnant's signal in the
// frequency domain, one type per hypothesis.
//
// The road of one call:
//
//  1. New builds a Model for a Grid of frequencies and a fixed viewing angle.
//     Mode frequencies and angular factors are tabulated over spin there, so
//     that a call never solves a continued fraction.
//  2. Fill takes the parameters (SI and solar masses, in the order of
//     Parameters) and writes h+ and hx at the grid's frequencies.
//  3. Derive turns the same parameters into what an analyst quotes: frequency
//     and damping time of each mode, echo delay, growth time.
//
// The road of a cavity (cavity.go), for each (l, m) among its modes:
//
//  1. The group's barrier is set to the spin (cavity_group.go).
//  2. Its reflection, times the surface's reflectivity (reflectivity.go, one file
//     per law) and the phase of the way to the surface and back, is the round
//     trip q; the sum of as many powers of it as arrive within the data multiplies
//     the modes (cavity_sum.go).
//  3. What sets the cavity ringing changes that sum or adds a pulse of its own
//     (excitation.go and its files).
//
// Besides, cavity_bend.go has straight coordinates for a sampler, and
// cavity_stability.go says where echoes grow.
//
// Conventions: fields go as exp(-i omega t), the Fourier transform is
// h(f) = integral of h(t) exp(-2 pi i f t) dt in strain per hertz, and t = 0 is
// the analysis start. h+ - i hx is a sum over modes of
// C S(inclination) exp(-i omega t); the (l, -m) partner of a mode has the
// amplitude (-1)^l times the conjugate, as for the remnant of a binary whose
// spins do not precess. ringing.go turns that into the transform, and is the
// only place that does. S is the spheroidal function at each mode's a omega or, by
// a setting, the spherical one.
//
// A signal begins with a jump, or, for a likelihood that marginalises over what
// comes before the start, with a smooth rise that ends there (lead.go).
//
// A Model holds scratch space and belongs to one goroutine; Clone gives the
// next goroutine its own. Nothing here knows of data, priors or sampling.
package models
