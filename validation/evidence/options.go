package main

import (
	"flag"
	"fmt"
	"io"
	"math"
	"runtime"
	"slices"
	"strconv"
	"strings"

	"knell/validation/problems"
)

// options are the command line's, checked.
type options struct {
	chosen  []choice // problems and dimensions, in the order of the table
	seeds   int      // runs per problem
	seed    uint64   // keys all of them
	live    int      // live points of each run
	workers int
	json    bool
}

// choice is one row of the table that is asked for.
type choice struct {
	name string
	dim  int
}

// cavityName is the problem that is not in package problems, because it needs the
// project's models.
const cavityName = "cavity"

// Live points that a run can have: the sampler's least number, and a bound
// against slips.
const (
	leastLive = 32
	mostLive  = 1_000_000
)

const usage = `evidence runs the sampler on problems of known evidence, over many seeds.

  --problems LIST  names, separated by commas (default: all)
  --dims LIST      dimensions, separated by commas (default: each problem's usual ones)
  --seeds N        runs per problem (default 100)
  --seed N         key of all random numbers (default 1)
  --live N         live points of a run (default 500)
  --workers N      runs at a time (default: one per core)
  --json           one JSON document instead of a table

problems and their usual dimensions:
`

// parse reads the command line. Every error says the option, what was found and
// what would be accepted.
func parse(args []string, help io.Writer) (options, error) {
	set := flag.NewFlagSet("evidence", flag.ContinueOnError)
	set.SetOutput(io.Discard)
	set.Usage = func() {
		fmt.Fprint(help, usage)
		for _, f := range families() {
			fmt.Fprintf(help, "  %-16s %s\n", f.Name, dimList(f.Dims))
		}
	}
	// All texts, so that the messages are ours.
	names := set.String("problems", "", "")
	dims := set.String("dims", "", "")
	seeds := set.String("seeds", "100", "")
	seed := set.String("seed", "1", "")
	live := set.String("live", "500", "")
	workers := set.String("workers", strconv.Itoa(runtime.GOMAXPROCS(0)), "")
	var o options
	set.BoolVar(&o.json, "json", false, "")
	if err := set.Parse(args); err != nil {
		if err == flag.ErrHelp {
			return o, err
		}
		return o, fmt.Errorf("%w; options are --problems, --dims, --seeds, --seed, --live, --workers and --json", err)
	}
	if set.NArg() > 0 {
		return o, fmt.Errorf("argument %q, want options alone", set.Arg(0))
	}
	var err error
	if o.seeds, err = whole("--seeds", *seeds, 2, 100_000); err != nil {
		return o, err
	}
	if o.live, err = whole("--live", *live, leastLive, mostLive); err != nil {
		return o, err
	}
	if o.workers, err = whole("--workers", *workers, 1, 4096); err != nil {
		return o, err
	}
	if o.seed, err = strconv.ParseUint(*seed, 10, 64); err != nil {
		return o, fmt.Errorf("--seed = %q, want a whole number from 0 to %d", *seed, uint64(math.MaxUint64))
	}
	if o.chosen, err = choose(*names, *dims); err != nil {
		return o, err
	}
	for _, c := range o.chosen {
		if least := 4 * (c.dim + 1); o.live < least {
			return o, fmt.Errorf("--live = %d, want at least %d in the %d dimensions of %s", o.live, least, c.dim, c.name)
		}
	}
	return o, nil
}

// family is a problems.Family, or the cavity, as the command line sees it.
type family struct {
	Name        string
	Dims        []int
	Least, Most int
}

func families() []family {
	var fs []family
	for _, f := range problems.Families() {
		fs = append(fs, family{f.Name, f.Dims, f.Least, f.Most})
	}
	return append(fs, family{cavityName, []int{4}, 4, 4})
}

// choose lists the rows that are asked for. A problem that is named must take
// some of the dimensions; without names, those that do not are left out.
func choose(names, dims string) ([]choice, error) {
	var (
		wanted []string
		known  []string
		chosen []choice
	)
	all := families()
	for _, f := range all {
		known = append(known, f.Name)
	}
	if names != "" {
		wanted = strings.Split(names, ",")
	}
	for i, n := range wanted {
		if !slices.Contains(known, n) {
			return nil, fmt.Errorf("--problems has %q, want of %s", n, strings.Join(known, ", "))
		}
		if slices.Contains(wanted[:i], n) {
			return nil, fmt.Errorf("--problems has %q twice, want each name once", n)
		}
	}
	var ds []int
	if dims != "" {
		for _, text := range strings.Split(dims, ",") {
			d, err := whole("--dims", text, 1, mostDim(all))
			if err != nil {
				return nil, err
			}
			if slices.Contains(ds, d) {
				return nil, fmt.Errorf("--dims has %d twice, want each number once", d)
			}
			ds = append(ds, d)
		}
	}
	for _, f := range all {
		if wanted != nil && !slices.Contains(wanted, f.Name) {
			continue
		}
		taken := f.Dims
		if ds != nil {
			taken = nil
			for _, d := range ds {
				if d >= f.Least && d <= f.Most {
					taken = append(taken, d)
				}
			}
		}
		if len(taken) == 0 && wanted != nil {
			return nil, fmt.Errorf("--dims = %s, want at least one from %d to %d for %s", dims, f.Least, f.Most, f.Name)
		}
		for _, d := range taken {
			chosen = append(chosen, choice{f.Name, d})
		}
	}
	return chosen, nil
}

func mostDim(fs []family) int {
	m := 0
	for _, f := range fs {
		m = max(m, f.Most)
	}
	return m
}

// whole reads a whole number within limits.
func whole(option, text string, least, most int) (int, error) {
	n, err := strconv.Atoi(text)
	if err != nil || n < least || n > most {
		return 0, fmt.Errorf("%s = %q, want a whole number from %d to %d", option, text, least, most)
	}
	return n, nil
}

func dimList(dims []int) string {
	var texts []string
	for _, d := range dims {
		texts = append(texts, strconv.Itoa(d))
	}
	return strings.Join(texts, ", ")
}
