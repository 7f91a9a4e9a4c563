package trials

import (
	"context"
	"io"
	"os"
	"os/signal"
	"syscall"
)

// Main runs a command with the process's arguments and streams, and ends the process
// with its status. The context ends with an interrupt or a request to terminate.
func Main(run func(ctx context.Context, args []string, stdout, stderr io.Writer) int) {
	ctx, stop := signal.NotifyContext(context.Background(), os.Interrupt, syscall.SIGTERM)
	status := run(ctx, os.Args[1:], os.Stdout, os.Stderr)
	stop()
	os.Exit(status)
}
