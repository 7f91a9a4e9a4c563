// Command knell weighs, for one merger at a time, whether the strain after it
// prefers a remnant with a horizon or one with a partially reflecting surface.
package main

import (
	"context"
	"os"
	"os/signal"
	"syscall"
)

func main() {
	ctx, stop := signal.NotifyContext(context.Background(), os.Interrupt, syscall.SIGTERM)
	status := run(ctx, os.Args, os.Stdout, os.Stderr)
	stop()
	os.Exit(status)
}
