// Command fettle cleans recordings through one filter chain and says what the
// chain does to timing.
package main

import (
	"context"
	"os"
	"os/signal"
	"syscall"
)

func main() {
	ctx, stop := signal.NotifyContext(context.Background(), os.Interrupt, syscall.SIGTERM)
	// The first signal asks, the second one ends the program as usual.
	context.AfterFunc(ctx, stop)
	status := run(ctx, os.Args, os.Stdout, os.Stderr)
	stop()
	os.Exit(status)
}
