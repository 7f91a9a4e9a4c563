// Package validation checks the whole against answers that come from elsewhere:
// brute force, published numbers, real strain and signals that are known.
//
// The road of a check of the evidence:
//
//  1. NewCavityProblem (problem.go) joins model, priors and likelihood to a
//     small problem of four free parameters with data of its own.
//  2. LogQuadrature (quadrature.go) integrates the likelihood over the unit cube
//     on a tensor grid.
//  3. PullsOf (pulls.go) runs the sampler for several seeds on the same target
//     and gives each run's difference from the truth over its quoted error;
//     UnitNormal says whether they can be a unit normal's.
//
// Three commands stand below it:
//
//   - evidence holds the sampler's log-evidences against problems of known truth
//     (package problems), each over many seeds.
//   - growth compares runs that grow towards a target with static ones.
//   - timing simulates the sampler's schedule, for the efficiency to expect of
//     many workers.
//
// What they share, the choice of problems and the running of many seeds, is in
// package trials.
//
// The rest is in tests alone: the remnant's published numbers as the models give
// them (remnant_test.go), the gate on a signal that began before the analysis
// (gate_test.go), and real strain from a folder that the environment names
// (strain_test.go).
package validation
