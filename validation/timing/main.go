// Command timing simulates the sampler's schedule and prints the parallel efficiency
// to expect: the time that workers are busy over workers × time elapsed.
//
//	go run ./validation/timing [--live 500,2000] [--workers 16,64,256,1024]
//	    [--calls 1,3,20] [--nats 10] [--share 32] [--in-flight 4] [--own 0]
//	    [--seed 1] [--json]
//
// The road: options.go reads the command line. calltimes.go draws how long calls take,
// slot.go how many a slot needs, schedule.go plays the schedule with both, threshold.go
// another, of which the efficiency is known in closed form. recommend.go searches for
// the live points that keep workers busy; table.go and document.go print.
//
// A unit of time is the mean time of a call where calls are equal.
//
// The exit status is 0, 1 if the output could not be written, 2 for options that cannot
// be used and 130 after an interrupt, which prints nothing. Equal options give equal
// output. The default tables take half a minute.
package main

import (
	"context"
	"fmt"
	"io"

	"knell/internal/report"
	"knell/validation/trials"
)

func main() { trials.Main(run) }

// run is the whole command, returning its exit status.
func run(ctx context.Context, args []string, stdout, stderr io.Writer) int {
	o, err := parse(args, stderr)
	if err != nil {
		return trials.Unusable("timing", err, stderr)
	}
	status := report.NewStatusLine(stderr)
	d, err := measure(ctx, o, &status)
	status.Clear()
	if err != nil {
		return trials.Interrupted
	}
	write := writeTable
	if o.json {
		write = writeDocument
	}
	if err := write(stdout, d); err != nil {
		fmt.Fprintf(stderr, "timing: %v\n", err)
		return trials.Failed
	}
	return trials.Passed
}
