// Package sampler computes evidences of log-likelihoods on the unit cube by
// static nested sampling (Bayesian Anal. 1, 833 (2006)), with weighted points
// of the posterior and a verdict on how far the numbers can be trusted.
//
// The road of one run:
//
//  1. Run checks the Settings and makes one Target per worker.
//  2. begin draws the first live points from the prior. Where the likelihood is
//     zero it draws on; how often it was zero is the first shrinkage.
//  3. batch takes the n/16 lowest live points (and all that tie with the last of
//     them) away, each counted with its own live number n, n-1, ..., and
//     prepare chooses how to draw their replacements: from the whole cube, from a
//     union of ellipsoids (bound.go, cluster.go, ellipsoid.go, frame.go) or by
//     slices (slice.go, memory.go), whichever is expected to take fewest calls.
//  4. The workers of pool.go draw the replacements (draw.go). Each has a random
//     stream of its own, keyed by run, batch and slot, and sees only the state
//     at the start of the batch: the bits do not depend on the workers.
//  5. rank.go notes where the new points enter among the old: were the draws
//     fair, these ranks are uniform.
//  6. When little evidence remains, the live points are removed in turn, and
//     evidence.go simulates the shrinkage of the volume: log-evidence, its
//     error, the information and the weights are averages over 500 histories.
//  7. While the error is above the wanted one, Run adds a run and merge.go joins
//     them. The Outcome (outcome.go) is judged last.
//
// What is done with a finished Outcome:
//
//   - strands.go splits it into the threads of single live points, and
//     bootstrap.go draws those anew for an error of its own.
//   - modes.go finds the modes that parted and the evidence of each.
//   - posterior.go has moments, quantiles and intervals with errors, reweight.go
//     the same under another prior.
//   - bridge.go and importance.go find the same evidence from a density fitted to
//     the posterior (mixture.go), density_ratio.go the Savage-Dickey ratio of a
//     nested pair.
//
// What no run can see: a mode that holds no live point when the ellipsoids
// first part from it, is lost, and the insertion ranks do not tell. A mode needs
// a share of several over LivePoints of the prior volume above the threshold at
// which it parts from the rest. Independent runs that disagree beyond their
// errors are the sign; more live points are the cure.
//
// Nothing here knows what the likelihood is of, and nothing is written.
package sampler
