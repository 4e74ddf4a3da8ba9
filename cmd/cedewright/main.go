// Command cedewright decides an insurer's reinsurance programme. See the README.
package main

import (
	"context"
	"os"
	"os/signal"
	"syscall"

	"cedewright/cmd/internal/cli"
)

func main() {
	ctx, stop := signal.NotifyContext(context.Background(), os.Interrupt, syscall.SIGTERM)
	context.AfterFunc(ctx, stop) // a second signal ends the program at once
	code := cli.Run(ctx, os.Args[1:], os.Stdout, os.Stderr)
	stop()
	os.Exit(code)
}
