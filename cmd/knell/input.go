package main

import (
	"fmt"
	"strings"

	"github.com/urfave/cli/v2"

	"knell/configs"
	"knell/internal/event"
)

// inputFlags choose and change the event file; weigh and check share them.
func inputFlags() []cli.Flag {
	return []cli.Flag{
		&cli.StringFlag{Name: "demo", Usage: "the embedded demo event `NAME`; \"list\" lists them"},
		&cli.StringSliceFlag{Name: "strain", Usage: "read a site's strain from another file, `CODE=FILE`; may be given several times"},
		&cli.Int64Flag{Name: "seed", Usage: "use another seed than the event file's"},
	}
}

// listsDemos prints the demo events if that was asked for.
func listsDemos(c *cli.Context) (bool, error) {
	if c.String("demo") != "list" {
		return false, nil
	}
	type demo struct {
		Name  string `json:"name"`
		Title string `json:"title"`
	}
	var document struct {
		Demos []demo `json:"demos"`
	}
	for _, name := range configs.DemoNames() {
		file, text, err := configs.Demo(name)
		if err != nil {
			return true, err
		}
		config, err := event.Decode(file, text)
		if err != nil {
			return true, err
		}
		document.Demos = append(document.Demos, demo{name, config.Title})
	}
	if c.Bool("json") {
		return true, printJSON(c, document)
	}
	for _, d := range document.Demos {
		fmt.Fprintf(c.App.Writer, "%-10s %s\n", d.Name, d.Title)
	}
	return true, nil
}

// readConfig reads the event file the command line names; with none, the demo.
func readConfig(c *cli.Context, needFile bool) (*event.Config, error) {
	config, err := chooseConfig(c, needFile)
	if err != nil {
		return nil, err
	}
	for _, text := range c.StringSlice("strain") {
		code, file, found := strings.Cut(text, "=")
		if !found || code == "" || file == "" {
			return nil, &usageError{fmt.Sprintf("--strain %s, want CODE=FILE", text)}
		}
		if err := config.ReplaceStrain(code, file); err != nil {
			return nil, &usageError{"--strain " + text + ": " + err.Error()}
		}
	}
	if c.IsSet("seed") {
		if c.Int64("seed") < 0 {
			return nil, &usageError{"--seed must be 0 or more"}
		}
		config.SetSeed(uint64(c.Int64("seed")))
	}
	return config, nil
}

func chooseConfig(c *cli.Context, needFile bool) (*event.Config, error) {
	switch {
	case c.NArg() > 1:
		return nil, &usageError{fmt.Sprintf("one event file at a time, found %s", strings.Join(c.Args().Slice(), " "))}
	case c.NArg() == 1 && c.IsSet("demo"):
		return nil, &usageError{"either an event file or --demo, not both"}
	case c.NArg() == 1:
		return event.ReadConfig(c.Args().First())
	case needFile && !c.IsSet("demo"):
		return nil, &usageError{"want an event file, or --demo NAME"}
	}
	name := configs.DefaultDemo
	if c.IsSet("demo") {
		name = c.String("demo")
	}
	file, text, err := configs.Demo(name)
	if err != nil {
		return nil, &usageError{err.Error()}
	}
	return event.Decode(file, text)
}
