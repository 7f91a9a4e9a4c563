package main

import (
	"fmt"
	"os"

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
			"the table goes to standard output, progress to standard error.",
		Flags: append(inputFlags(),
			&cli.StringFlag{Name: "out", Usage: "the result `DIRECTORY`; default: a new one under weighed/"},
			&cli.BoolFlag{Name: "replace", Usage: "let --out hold an earlier result, which is overwritten"},
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
	options := event.Options{Version: c.App.Version, Workers: c.Int("workers")}
	done := func() {}
	if !c.Bool("quiet") {
		meter := report.NewMeter(c.App.ErrWriter)
		done = meter.Done
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
	result, posteriors, failure := prepared.Weigh(c.Context, options)
	// Before the table, which may go to the same terminal.
	done()
	if failure != nil && len(result.Hypotheses) == 0 {
		if c.String("out") == "" {
			// Made for nothing; if it is no longer empty it stays.
			_ = os.Remove(directory)
		}
		return failure
	}
	for i := range result.Hypotheses {
		result.Hypotheses[i].Posterior = report.PosteriorFile(result.Hypotheses[i].Name, ".csv")
	}
	if err := report.WriteDirectory(directory, result, posteriors, config.AsRun()); err != nil {
		return err
	}
	if c.Bool("json") {
		err = result.WriteJSON(c.App.Writer)
		if err == nil && !c.Bool("quiet") {
			_, err = fmt.Fprintf(c.App.ErrWriter, "written to %s\n", directory)
		}
	} else {
		err = report.Table(c.App.Writer, result)
		if err == nil {
			_, err = fmt.Fprintf(c.App.Writer, "\nwritten to %s\n", directory)
		}
	}
	if err != nil {
		return err
	}
	if failure != nil {
		return failure
	}
	if result.Partial && c.Context.Err() != nil {
		return errInterrupted
	}
	return nil
}
