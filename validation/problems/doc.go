// Package problems holds likelihoods on the unit cube whose evidence is known
// from elsewhere: by normalisation, in closed form or by quadrature.
//
// The road of one problem:
//
//  1. Families lists what there is: a name, the usual dimensions, the range of
//     dimensions that the definition allows.
//  2. New makes the Problem of a name and a dimension (family.go): its
//     log-likelihood, and the true log-evidence with its source. A truth that
//     needs quadrature is computed there (quadrature.go), to 1e-9 or better.
//  3. A Problem has the two methods of a sampler's target. It does not know the
//     sampler, so that the sampler's own tests can use it.
//
// Where the contours of equal likelihood are ellipsoids or cubes, the prior
// volume above a likelihood is known as well (Problem.LogVolume). Then every
// single shrinkage of a run can be tested, not only the sum of all (arXiv:1407.5459).
//
// One kind of likelihood stands in each file; the tests recompute every truth
// by a second route.
package problems
