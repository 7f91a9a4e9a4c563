package main

import (
	"fmt"

	"github.com/urfave/cli/v2"

	"knell/internal/event"
)

func checkCommand() *cli.Command {
	return &cli.Command{
		Name:      "check",
		Usage:     "check an event file, and the files it points to, without running it",
		ArgsUsage: "EVENT.toml",
		Flags:     append(inputFlags(), jsonFlag()),
		Action: func(c *cli.Context) error {
			if done, err := listsDemos(c); done {
				return err
			}
			config, err := readConfig(c, true)
			if err != nil {
				return err
			}
			prepared, err := event.Load(config)
			if err != nil {
				return err
			}
			summary := prepared.Check()
			if c.Bool("json") {
				return printJSON(c, summary)
			}
			fmt.Fprintf(c.App.Writer, "%s: sound\n", config.File)
			for _, line := range summary.Lines() {
				fmt.Fprintln(c.App.Writer, "  "+line)
			}
			return nil
		},
	}
}
