// Package likelihood compares a model's polarisations with the strain of
// several sites under stationary Gaussian noise, with a gate.
//
// The road of the data:
//
//  1. A Site brings N samples of strain, the noise's one-sided spectral density
//     at the N/2+1 frequencies of their transform, its antenna response and
//     where the analysis start falls.
//  2. New factorises the gate once per site and computes the data's half of the
//     inner products.
//  3. Worker hands each goroutine its scratch space; its LogRatio takes the
//     polarisations of one point and returns ln L over that of noise alone.
//
// # The gate
//
// A signal model that begins at t0 is not the whole signal. Let G be the samples
// before t0 and V those after, C the circulant covariance of the noise with
// eigenvalues S_k f_s / 2, and P its inverse. With r the residual, data minus
// model,
//
//	r_V' (C_VV)^-1 r_V = r' P r - (P r)_G' (P_GG)^-1 (P r)_G        (1)
//
// whatever values r has on G: the right side is the minimum of r' P r over them.
// So the model need not be cut in the time domain; its spectrum is used as it
// is, and whatever the data hold in G has no say. With ln det C_VV = ln det C +
// ln det P_GG this is the exact density of the samples outside the gate.
// (Marginal of a Gaussian from its precision matrix; Schur complement.)
//
// # The band
//
// Frequencies outside the analysed band get a large finite noise (Loud): zero
// precision there would make P_GG singular, and a step at the band's edge would
// correlate samples over all of the segment.
package likelihood
