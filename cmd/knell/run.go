package main

import (
	"context"
	"errors"
	"fmt"
	"io"
	"strings"

	"github.com/urfave/cli/v2"

	"knell/internal/event"
)

// version is the release this source is of; the build's revision is added where
// Go recorded one.
const version = "0.1.0"

// Exit statuses.
const (
	statusDone        = 0
	statusFailed      = 1
	statusUsage       = 2
	statusInterrupted = 130
)

// usageError is a command line that cannot be carried out.
type usageError struct{ message string }

func (e *usageError) Error() string { return e.message }

// errInterrupted says that a partial result was written.
var errInterrupted = errors.New("interrupted; the result is partial")

// run carries out one command line and returns the exit status. Results go to
// stdout; progress and errors go to stderr.
func run(ctx context.Context, args []string, stdout, stderr io.Writer) int {
	app := &cli.App{
		Name:            "knell",
		Usage:           "weigh a horizon against a reflecting surface in the strain after a merger",
		Version:         buildVersion(),
		HideHelpCommand: true,
		// A comma may stand in a file name.
		DisableSliceFlagSeparator: true,
		Writer:                    stdout,
		ErrWriter:                 stderr,
		Commands:                  []*cli.Command{weighCommand(), checkCommand(), modesCommand(), barrierCommand(), echoCommand()},
		// Errors come back to this function; nothing below it exits.
		ExitErrHandler: func(*cli.Context, error) {},
		OnUsageError: func(c *cli.Context, err error, _ bool) error {
			return &usageError{optionMessage(c, err)}
		},
		Action: func(c *cli.Context) error {
			if c.Args().Present() {
				names := make([]string, len(c.App.Commands))
				for i, command := range c.App.Commands {
					names[i] = command.Name
				}
				return &usageError{fmt.Sprintf("no command %q, want one of %s; see knell --help", c.Args().First(), strings.Join(names, ", "))}
			}
			return cli.ShowAppHelp(c)
		},
	}
	for _, command := range app.Commands {
		command.OnUsageError = app.OnUsageError
		// "knell weigh help" is a file called help, as it is everywhere else.
		command.HideHelpCommand = true
	}
	return status(app.RunContext(ctx, optionsFirst(args, app.Commands)), stderr)
}

// status prints err, if any, and maps it to the exit status.
func status(err error, stderr io.Writer) int {
	if err == nil {
		return statusDone
	}
	fmt.Fprintf(stderr, "knell: %s\n", strings.Join(strings.Fields(err.Error()), " "))
	var usage *usageError
	var input *event.InputError
	switch {
	case errors.Is(err, errInterrupted):
		return statusInterrupted
	case errors.As(err, &usage), errors.As(err, &input):
		return statusUsage
	}
	return statusFailed
}
