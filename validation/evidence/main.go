// Command evidence holds the sampler's log-evidences against problems whose truth
// is known, each over many seeds:
//
//	go run ./validation/evidence [--problems gaussian,shells] [--dims 5,8]
//	    [--seeds 30] [--seed 1] [--live 500] [--grow X] [--workers N] [--json]
//
// With --grow the runs go on until their error is X times that of a plain run with
// as many live points, which a run before them finds out.
//
// The road: options.go reads the command line, package trials makes the problems and
// hands out the runs, runner.go makes one, row.go turns the runs of a problem into its
// row and judges it, table.go prints each row as soon as it is complete, document.go
// all of them at the end.
//
// The exit status is 0 if every problem passed, 1 if one failed or the runs could
// not be made, 2 for options that cannot be used and 130 after an interrupt,
// when the rows that are there have been printed.
//
// Equal options give equal tables, whatever the number of workers, but for the
// seconds.
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
		return trials.Unusable("evidence", err, stderr)
	}
	cases, err := trials.All(ctx, o.chosen)
	if err != nil {
		if ctx.Err() != nil {
			return trials.Interrupted
		}
		fmt.Fprintf(stderr, "evidence: %v\n", err)
		return trials.Failed
	}
	var (
		rows []row
		t    *table
		m    = trials.NewMeter(stderr, cases, o.seeds, o.workers)
	)
	if !o.json {
		t = newTable(stdout, o, cases)
	}
	measure(ctx, cases, o, m, func(r row) {
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
		fmt.Fprintf(stderr, "evidence: %v\n", err)
		return trials.Failed
	}
	if ctx.Err() != nil {
		return trials.Interrupted
	}
	for _, r := range rows {
		if len(r.Faults) > 0 {
			return trials.Failed
		}
	}
	return trials.Passed
}
