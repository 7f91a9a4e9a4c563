package main

import (
	"flag"
	"fmt"
	"io"
	"strconv"

	"knell/validation/trials"
)

// options are the command line's, checked.
type options struct {
	live    []int
	workers []int
	calls   []int   // mean calls of a slot
	nats    float64 // compression of a run
	share   int     // a batch is 1/share of the live points
	flight  int     // batches in the air
	own     float64 // work of the main goroutine per batch, in call times
	seed    uint64
	json    bool
}

const usage = `timing simulates how busy the sampler keeps its workers.

  --live LIST      live points (default 500,2000)
  --workers LIST   numbers of workers (default 16,64,256,1024)
  --calls LIST     calls of a slot, which draws one new point (default 1,3,20)
  --nats X         compression of the prior volume over a run, in nats (default 10)
  --share N        a batch is 1/N of the live points (default: the sampler's, 32)
  --in-flight N    batches in the air at most (default: the sampler's, 4)
  --own X          the sampler's own work between batches, in call times (default 0)
  --seed N         key of all random numbers (default 1)
  --json           one JSON document instead of tables
`

// parse reads the command line. Every error says the option, what was found and
// what would be accepted.
func parse(args []string, help io.Writer) (options, error) {
	set := flag.NewFlagSet("timing", flag.ContinueOnError)
	set.SetOutput(io.Discard)
	set.Usage = func() { fmt.Fprint(help, usage) }
	// All texts, so that the messages are ours.
	live := set.String("live", "500,2000", "")
	workers := set.String("workers", "16,64,256,1024", "")
	calls := set.String("calls", "1,3,20", "")
	nats := set.String("nats", "10", "")
	share := set.String("share", strconv.Itoa(batchShare), "")
	flight := set.String("in-flight", strconv.Itoa(inFlight), "")
	own := set.String("own", "0", "")
	seed := set.String("seed", "1", "")
	var o options
	set.BoolVar(&o.json, "json", false, "")
	if err := set.Parse(args); err != nil {
		if err == flag.ErrHelp {
			return o, err
		}
		return o, fmt.Errorf("%w; options are --live, --workers, --calls, --nats, --share, --in-flight, --own, --seed and --json", err)
	}
	if set.NArg() > 0 {
		return o, fmt.Errorf("argument %q, want options alone", set.Arg(0))
	}
	var err error
	if o.live, err = trials.Wholes("--live", *live, trials.LeastLive, trials.MostLive); err != nil {
		return o, err
	}
	if o.workers, err = trials.Wholes("--workers", *workers, 1, 4096); err != nil {
		return o, err
	}
	if o.calls, err = trials.Wholes("--calls", *calls, 1, 10_000); err != nil {
		return o, err
	}
	if o.nats, err = trials.Real("--nats", *nats, 1, 1000); err != nil {
		return o, err
	}
	if o.share, err = trials.Whole("--share", *share, 2, 1024); err != nil {
		return o, err
	}
	if o.flight, err = trials.Whole("--in-flight", *flight, 1, o.share-1); err != nil {
		return o, err
	}
	if o.own, err = trials.Real("--own", *own, 0, 1e6); err != nil {
		return o, err
	}
	o.seed, err = trials.Seed(*seed)
	return o, err
}
