package trials

import (
	"context"
	"errors"
	"flag"
	"fmt"
	"io"
	"os"
	"os/signal"
	"syscall"
)

// Exit statuses of the commands.
const (
	Passed      = 0
	Failed      = 1
	BadUsage    = 2
	Interrupted = 130
)

// Main runs a command with the process's arguments and streams, and ends the process
// with its status. The context ends with an interrupt or a request to terminate.
func Main(run func(ctx context.Context, args []string, stdout, stderr io.Writer) int) {
	ctx, stop := signal.NotifyContext(context.Background(), os.Interrupt, syscall.SIGTERM)
	status := run(ctx, os.Args[1:], os.Stdout, os.Stderr)
	stop()
	os.Exit(status)
}

// Unusable is the exit status of a command whose options parse refuses with an error,
// which it prints unless it is a request for help.
func Unusable(command string, err error, stderr io.Writer) int {
	if errors.Is(err, flag.ErrHelp) {
		return Passed
	}
	fmt.Fprintf(stderr, "%s: %v\n", command, err)
	return BadUsage
}
