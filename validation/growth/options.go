package main

import (
	"flag"
	"fmt"
	"io"
	"runtime"
	"slices"
	"strconv"
	"strings"

	"knell/validation/trials"
)

// options are the command line's, checked.
type options struct {
	posterior bool // the two uses
	evidence  bool
	chosen    []trials.Choice // for the evidence
	seeds     int             // runs of each kind per row
	seed      uint64          // keys all of them
	live      int             // live points of a run before it grows
	samples   float64         // effective, for the posterior
	share     float64         // of the error before growth, for the evidence
	workers   int
	json      bool
}

const usage = `growth compares runs that grow towards a target with static ones.

  --use LIST       of posterior and evidence (default: both)
  --problems LIST  names for evidence use, separated by commas (default: all)
  --dims LIST      dimensions, separated by commas (default: each problem's usual ones)
  --seeds N        runs of each kind (default 20)
  --seed N         key of all random numbers (default 1)
  --live N         live points before growth (default 250)
  --samples X      effective samples for posterior use (default 20000)
  --share X        error for evidence use, over that before growth (default 0.5)
  --workers N      runs at a time (default: one per core)
  --json           one JSON document at the end instead of a table row by row

problems and their usual dimensions:
`

// parse reads the command line. Every error says the option, what was found and
// what would be accepted.
func parse(args []string, help io.Writer) (options, error) {
	set := flag.NewFlagSet("growth", flag.ContinueOnError)
	set.SetOutput(io.Discard)
	set.Usage = func() {
		fmt.Fprint(help, usage)
		trials.ListFamilies(help)
	}
	// All texts, so that the messages are ours.
	use := set.String("use", "posterior,evidence", "")
	names := set.String("problems", "", "")
	dims := set.String("dims", "", "")
	seeds := set.String("seeds", "20", "")
	seed := set.String("seed", "1", "")
	live := set.String("live", "250", "")
	samples := set.String("samples", "20000", "")
	share := set.String("share", "0.5", "")
	workers := set.String("workers", strconv.Itoa(runtime.GOMAXPROCS(0)), "")
	var o options
	set.BoolVar(&o.json, "json", false, "")
	if err := set.Parse(args); err != nil {
		if err == flag.ErrHelp {
			return o, err
		}
		return o, fmt.Errorf("%w; options are --use, --problems, --dims, --seeds, --seed, --live, --samples, --share, --workers and --json", err)
	}
	if set.NArg() > 0 {
		return o, fmt.Errorf("argument %q, want options alone", set.Arg(0))
	}
	uses := strings.Split(*use, ",")
	for _, u := range uses {
		if u != posteriorUse && u != evidenceUse {
			return o, fmt.Errorf("--use has %q, want of %s, %s", u, posteriorUse, evidenceUse)
		}
	}
	o.posterior, o.evidence = slices.Contains(uses, posteriorUse), slices.Contains(uses, evidenceUse)
	var err error
	if o.seeds, err = trials.Whole("--seeds", *seeds, 2, 100_000); err != nil {
		return o, err
	}
	if o.live, err = trials.Whole("--live", *live, trials.LeastLive, trials.MostLive); err != nil {
		return o, err
	}
	if o.samples, err = trials.Real("--samples", *samples, 100, 1e7); err != nil {
		return o, err
	}
	if o.share, err = trials.Real("--share", *share, 0.1, 0.9); err != nil {
		return o, err
	}
	if o.workers, err = trials.Whole("--workers", *workers, 1, 4096); err != nil {
		return o, err
	}
	if o.seed, err = trials.Seed(*seed); err != nil {
		return o, err
	}
	if o.chosen, err = trials.Choose(*names, *dims); err != nil {
		return o, err
	}
	all := o.chosen
	if !o.evidence {
		all = nil
	}
	if o.posterior {
		all = append(slices.Clone(all), posteriorChoice)
	}
	return o, trials.CheckLive(o.live, all)
}
