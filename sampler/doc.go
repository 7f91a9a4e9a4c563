// Package sampler computes evidences of log-likelihoods on the unit cube by
// nested sampling (Bayesian Anal. 1, 833 (2006)), with weighted points of the
// posterior and a verdict on how far the numbers can be trusted.
//
// The road of one run:
//
//  1. Run checks the Settings, makes one Target per worker, and goes back to the
//     state that the Keeper has, if any (keeper.go, keeping.go, snapshot.go).
//  2. begin draws the first live points from the prior (prior.go). Where the
//     likelihood is zero it draws on; how often it was zero is the first shrinkage.
//  3. next takes the n/32 lowest live points (and all that tie with the last of
//     them) away and sends a flight of replacements (runner.go, batch.go,
//     flight.go). prepare chooses how to draw them: from the whole cube, from a union
//     of ellipsoids or by slices (slice.go, memory.go), whichever is expected to
//     take fewest calls. The ellipsoids (bound.go, ellipsoid.go) are fitted to
//     clusters of the live points (cluster.go, trial.go), with shapes that points
//     removed lately help to know (shape.go), and sizes by cross-validation
//     (crossval.go, grow.go), where periodic dimensions are cut open (frame.go) and
//     reflective ones unfolded (lift.go).
//  4. The crew draws the slots of up to four flights, oldest first (crew.go,
//     draw.go). Each slot has a random stream of its own, keyed by part, batch and
//     slot, and sees only the state when its flight was sent; flights are taken in
//     by their order. So the bits do not depend on the workers, and a slow call
//     holds up nobody until four flights wait for it.
//  5. land takes a flight in; rank.go notes where its points enter among those
//     known: were the draws fair, these ranks are uniform. A
//     point that lands below the threshold reached meanwhile is dead at once.
//  6. When little evidence remains, the live points are removed in turn, and the
//     live number at every dead point follows from where the points were born
//     (strands.go). evidence.go simulates the shrinkage of the volume: log-evidence,
//     its error, the information and the weights are averages over 160 histories.
//  7. While a target is missed, growth.go plans by which live numbers it would be
//     reached at least cost, and additions follow the levels of the likelihood
//     found so far with strands of their own (path.go, ranges.go). merge.go joins
//     them: the same code joins whole runs. The Outcome (outcome.go) is judged last.
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
