// Package strain turns files of detector strain into what a likelihood needs:
// conditioned samples and a noise spectral density. It also makes synthetic
// noise. It knows nothing of signals.
//
// The road of the data of one site:
//
//  1. ReadFile reads HDF5 (openfile.go) or text (text.go) into a Series: samples
//     with their GPS time, and the gaps that NaNs and quality flags make.
//  2. Stretch cuts out the gap-free piece around the event; Check says whether
//     a range of times may be used.
//  3. Condition removes what lies below the analysis band and lowers the sample
//     rate, without shifting anything in time.
//  4. WelchStretches estimates the one-sided density S(f) in 1/Hz from the
//     stretches before and after the event; Spectrum.Resample brings it to the
//     analysis grid, and Smooth to the resolution that a gate can carry.
//     Or the density comes from a published curve (curves.go) or from a table
//     in a file (curvefile.go), by SampleCurve.
//  5. Whiten makes a series of unit variance, for pictures and checks.
//
// Units: strain has none, frequencies are in Hz, times in s, densities in 1/Hz
// and one-sided: the variance of a series is the integral of S(f) from 0 to the
// Nyquist frequency.
//
// Nothing is repaired in silence: gaps, zeros in a spectrum and frequencies
// that a curve does not cover are errors where they would be used.
package strain
