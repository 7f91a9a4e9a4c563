// Command growth measures what it is worth to let runs grow towards a target, against
// static runs that have as many live points as the target needs from the start:
//
//	go run ./validation/growth [--use posterior,evidence] [--problems gaussian,shells]
//	    [--dims 5,8] [--seeds 20] [--seed 1] [--live 250] [--samples 20000]
//	    [--share 0.5] [--workers N] [--json]
//
// For posterior use, on the 8-dimensional Gaussian, runs of --live live points grow to
// --samples effective samples, and the calls per effective sample are compared. For
// evidence use, on every problem that is asked for, they grow until the error is
// --share times that of a run that does not grow, and calls × error² is compared. How
// many live points the static runs need, a run before them finds out.
//
// The grown runs are held against the truth as well: ln Z, for the posterior use a
// mean and a variance too, and their insertion ranks.
//
// The road: options.go reads the command line, job.go lists what is to be compared,
// package trials hands out the runs, runner.go makes one, row.go compares and judges,
// table.go prints each row as soon as it is complete, document.go all of them at the
// end.
//
// The exit status is 0 if every row passed, 1 if one failed or the runs could not be
// made, 2 for options that cannot be used and 130 after an interrupt, when the rows
// that are there have been printed. Equal options give equal tables, whatever the
// number of workers.
package main

import (
	"context"
	"fmt"
	"io"

	"knell/validation/trials"
)

func main() { trials.Main(run) }

// run is the whole command, returning its exit status.
func run(ctx context.Context, args []string, stdout, stderr io.Writer) int {
	o, err := parse(args, stderr)
	if err != nil {
		return trials.Unusable("growth", err, stderr)
	}
	jobs, err := o.jobs(ctx)
	if err != nil {
		if ctx.Err() != nil {
			return trials.Interrupted
		}
		fmt.Fprintf(stderr, "growth: %v\n", err)
		return trials.Failed
	}
	var (
		rows []row
		t    *table
		m    = trials.NewMeter(stderr, casesOf(jobs), 2*o.seeds, o.workers)
	)
	if !o.json {
		t = newTable(stdout, o, casesOf(jobs))
	}
	measure(ctx, jobs, o, m, func(r row) {
		rows = append(rows, r)
		if t != nil {
			m.Above(func() { t.add(r) })
		}
	})
	m.Done()
	if o.json {
		err = writeDocument(stdout, o, rows, ctx.Err() != nil)
	} else {
		err = t.end(ctx.Err() != nil)
	}
	if err != nil {
		fmt.Fprintf(stderr, "growth: %v\n", err)
		return trials.Failed
	}
	if ctx.Err() != nil {
		return trials.Interrupted
	}
	for _, r := range rows {
		if !r.Passed {
			return trials.Failed
		}
	}
	return trials.Passed
}
