package main

import (
	"errors"
	"fmt"
	"os"
	"time"

	"github.com/urfave/cli/v2"

	"knell/internal/event"
	"knell/internal/report"
)

func weighCommand() *cli.Command {
	return &cli.Command{
		Name:      "weigh",
		Usage:     "compute the evidence of each hypothesis about one event and their ratios",
		ArgsUsage: "[EVENT.toml]",
		Description: "Without a file the embedded demo event is weighed. Results go into a directory;\n" +
			"the table goes to standard output, progress to standard error. A weighing that was\n" +
			"stopped goes on with the same event and options and --out its directory.",
		Flags: append(inputFlags(),
			&cli.StringFlag{Name: "out", Usage: "the result `DIRECTORY`; default: a new one under weighed/"},
			&cli.BoolFlag{Name: "replace", Usage: "let --out hold an earlier result or an unfinished weighing, which is begun anew"},
			&cli.IntFlag{Name: "workers", Usage: "likelihoods computed at once, default one per core; the result does not depend on it"},
			&cli.BoolFlag{Name: "quiet", Usage: "no progress"},
			jsonFlag()),
		Action: weigh,
	}
}

func weigh(c *cli.Context) error {
	if done, err := listsDemos(c); done {
		return err
	}
	if c.Int("workers") < 0 {
		return &usageError{"--workers must be 0 (one per core) or more"}
	}
	config, err := readConfig(c, false)
	if err != nil {
		return err
	}
	prepared, err := event.Load(config)
	if err != nil {
		return err
	}
	// Claimed before the work, so that an unwritable place costs no run.
	directory, err := claimDirectory(c.String("out"), config.Slug(), c.Bool("replace"))
	if err != nil {
		return err
	}
	kept, err := claimStates(directory, c.Bool("replace"))
	if err != nil {
		return err
	}
	result, posteriors, failure := sample(c, prepared, directory, kept)
	if refused := refusal(failure); refused != nil || failure != nil && len(result.Hypotheses) == 0 {
		if c.String("out") == "" {
			// Made for nothing; if it is no longer empty it stays.
			failure = errors.Join(failure, kept.discard(), kept.release())
			_ = os.Remove(directory)
			return failure
		}
		if refused != nil {
			failure = refused
		}
		return errors.Join(failure, kept.release())
	}
	for i := range result.Hypotheses {
		result.Hypotheses[i].Posterior = report.PosteriorFile(result.Hypotheses[i].Name, ".csv")
	}
	if err := report.WriteDirectory(directory, result, posteriors, config.AsRun()); err != nil {
		// What was computed is shown even so, and the states stay to go on with.
		return errors.Join(err, kept.release(), show(c, result, ""))
	}
	interrupted := result.Partial && c.Context.Err() != nil
	if failure == nil && !interrupted {
		// Nothing is left to go on with.
		if err := kept.discard(); err != nil {
			fmt.Fprintf(c.App.ErrWriter, "knell: the result is complete, but its kept states could not be removed: %v\n", err)
		}
	}
	if err := kept.release(); err != nil {
		fmt.Fprintf(c.App.ErrWriter, "knell: %v\n", err)
	}
	if err := errors.Join(show(c, result, directory), failure); err != nil {
		return err
	}
	if interrupted {
		fmt.Fprintf(c.App.ErrWriter, "go on with: %s\n", goOn(c, directory))
		return errInterrupted
	}
	return nil
}

// keepEvery is the key under which a context may carry the least time between two kept
// states, a time.Duration.
type keepEvery struct{}

// sample carries out the weighing, with its progress on standard error.
func sample(c *cli.Context, prepared *event.Prepared, directory string, kept *states) (*report.Weighing, []report.Posterior, error) {
	every, _ := c.Context.Value(keepEvery{}).(time.Duration)
	options := event.Options{
		Version: c.App.Version, Workers: c.Int("workers"),
		Keeper: kept.keeper, KeepEvery: every,
	}
	note := func(text string) { fmt.Fprintln(c.App.ErrWriter, text) }
	if !c.Bool("quiet") {
		note(fmt.Sprintf("writes to %s; once stopped, it goes on with --out %s", directory, quote(directory)))
		options.Resumed = func(hypothesis string, calls int64) {
			note(fmt.Sprintf("goes on from %s likelihood calls of %s", thousands(calls), hypothesis))
		}
		meter := report.NewMeter(c.App.ErrWriter)
		// Before the table, which may go to the same terminal.
		defer meter.Done()
		note = meter.Note
		options.Progress = func(p event.Progress) {
			label := p.Hypothesis
			if p.Count > 1 {
				label = fmt.Sprintf("%s (%d of %d)", p.Hypothesis, p.Index+1, p.Count)
			}
			meter.Update(report.Progress{
				Label: label, LogEvidence: p.LogEvidence, Error: p.LogEvidenceError,
				Calls: p.Calls, Fraction: p.Fraction,
			})
		}
	}
	warned := false
	options.NotKept = func(hypothesis string, err error) {
		if !warned {
			note(fmt.Sprintf("knell: warning: the state of %s cannot be kept, and the run goes on without: %v", hypothesis, err))
		}
		warned = true
	}
	return prepared.Weigh(c.Context, options)
}

// show prints the result as the command line asks.
func show(c *cli.Context, result *report.Weighing, directory string) error {
	if c.Bool("json") {
		if err := result.WriteJSON(c.App.Writer); err != nil || c.Bool("quiet") || directory == "" {
			return err
		}
		_, err := fmt.Fprintf(c.App.ErrWriter, "written to %s\n", directory)
		return err
	}
	if err := report.Table(c.App.Writer, result); err != nil || directory == "" {
		return err
	}
	_, err := fmt.Fprintf(c.App.Writer, "\nwritten to %s\n", directory)
	return err
}
