// Command evidence holds the sampler's log-evidences against problems whose truth
// is known, each over many seeds:
//
//	go run ./validation/evidence [--problems gaussian,shells] [--dims 5,8]
//	    [--seeds 30] [--seed 1] [--live 500] [--workers N] [--json]
//
// The road: options.go reads the command line, cases.go makes the problems,
// runner.go runs the sampler for every problem and seed, row.go turns the runs of
// a problem into its row and judges it, table.go and document.go print. progress.go
// tells on stderr how far it is.
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
	"errors"
	"flag"
	"fmt"
	"io"
	"os"
	"os/signal"
	"syscall"
)

// Exit statuses.
const (
	passed      = 0
	failed      = 1
	badUsage    = 2
	interrupted = 130
)

func main() {
	ctx, stop := signal.NotifyContext(context.Background(), os.Interrupt, syscall.SIGTERM)
	status := run(ctx, os.Args[1:], os.Stdout, os.Stderr)
	stop()
	os.Exit(status)
}

// run is the whole command, returning its exit status.
func run(ctx context.Context, args []string, stdout, stderr io.Writer) int {
	o, err := parse(args, stderr)
	switch {
	case errors.Is(err, flag.ErrHelp):
		return passed
	case err != nil:
		fmt.Fprintf(stderr, "evidence: %v\n", err)
		return badUsage
	}
	cases, err := o.cases(ctx)
	if err != nil {
		if ctx.Err() != nil {
			return interrupted
		}
		fmt.Fprintf(stderr, "evidence: %v\n", err)
		return failed
	}
	m := newMeter(stderr, cases, o)
	rows := measure(ctx, cases, o, m)
	m.done()
	write := writeTable
	if o.json {
		write = writeDocument
	}
	if err := write(stdout, o, rows, ctx.Err() != nil); err != nil {
		fmt.Fprintf(stderr, "evidence: %v\n", err)
		return failed
	}
	if ctx.Err() != nil {
		return interrupted
	}
	for _, r := range rows {
		if len(r.Faults) > 0 {
			return failed
		}
	}
	return passed
}
