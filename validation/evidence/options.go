package main

import (
	"flag"
	"fmt"
	"io"
	"runtime"
	"strconv"

	"knell/validation/trials"
)

// options are the command line's, checked.
type options struct {
	chosen  []trials.Choice // in the order of the table
	seeds   int             // runs per problem
	seed    uint64          // keys all of them
	live    int             // live points of each run
	grow    float64         // error to reach, over that of a plain run; 0 for plain runs
	workers int
	json    bool
}

const usage = `evidence runs the sampler on problems of known evidence, over many seeds.

  --problems LIST  names, separated by commas (default: all)
  --dims LIST      dimensions, separated by commas (default: each problem's usual ones)
  --seeds N        runs per problem (default 100)
  --seed N         key of all random numbers (default 1)
  --live N         live points of a run (default 500)
  --grow X         let runs grow until their error is X times a plain run's (default: plain runs)
  --workers N      runs at a time (default: one per core)
  --json           one JSON document at the end instead of a table row by row

problems and their usual dimensions:
`

// leastGrow bounds what --grow can ask for: the work rises as 1/X².
const leastGrow = 0.05

// parse reads the command line. Every error says the option, what was found and
// what would be accepted.
func parse(args []string, help io.Writer) (options, error) {
	set := flag.NewFlagSet("evidence", flag.ContinueOnError)
	set.SetOutput(io.Discard)
	set.Usage = func() {
		fmt.Fprint(help, usage)
		trials.ListFamilies(help)
	}
	// All texts, so that the messages are ours.
	names := set.String("problems", "", "")
	dims := set.String("dims", "", "")
	seeds := set.String("seeds", "100", "")
	seed := set.String("seed", "1", "")
	live := set.String("live", "500", "")
	grow := set.String("grow", "", "")
	workers := set.String("workers", strconv.Itoa(runtime.GOMAXPROCS(0)), "")
	var o options
	set.BoolVar(&o.json, "json", false, "")
	if err := set.Parse(args); err != nil {
		if err == flag.ErrHelp {
			return o, err
		}
		return o, fmt.Errorf("%w; options are --problems, --dims, --seeds, --seed, --live, --grow, --workers and --json", err)
	}
	if set.NArg() > 0 {
		return o, fmt.Errorf("argument %q, want options alone", set.Arg(0))
	}
	var err error
	if o.seeds, err = trials.Whole("--seeds", *seeds, 2, 100_000); err != nil {
		return o, err
	}
	if o.live, err = trials.Whole("--live", *live, trials.LeastLive, trials.MostLive); err != nil {
		return o, err
	}
	if o.workers, err = trials.Whole("--workers", *workers, 1, 4096); err != nil {
		return o, err
	}
	if *grow != "" {
		if o.grow, err = trials.Real("--grow", *grow, leastGrow, 1); err != nil {
			return o, err
		}
	}
	if o.seed, err = trials.Seed(*seed); err != nil {
		return o, err
	}
	if o.chosen, err = trials.Choose(*names, *dims); err != nil {
		return o, err
	}
	return o, trials.CheckLive(o.live, o.chosen)
}
