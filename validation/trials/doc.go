// Package trials is what the commands below validation share: which problems a
// command line asks for, and the running of many seeds of each.
//
// The road of a command:
//
//  1. Choose turns lists of names and dimensions into Choices (choice.go), Whole
//     reads its numbers (options.go).
//  2. New makes the Case of a choice (case.go): targets for the sampler and the
//     truth.
//  3. Run hands out the runs to workers (run.go), case after case, so that cases end
//     one after another; a Meter tells how far they are (meter.go).
//  4. A Table prints lines as they come (table.go).
package trials
