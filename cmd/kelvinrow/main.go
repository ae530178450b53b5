// Command kelvinrow screens many buildings for retrofit: spreadsheets in, a
// ranked workbook out.
package main

import (
	"context"
	"os"
	"os/signal"
	"syscall"

	"kelvinrow/cmd/internal/cli"
)

func main() {
	// A reader that goes away (kelvinrow demo | head) must not kill the command
	// before it has stopped the server: writes fail instead.
	signal.Ignore(syscall.SIGPIPE)
	ctx, stop := signal.NotifyContext(context.Background(), os.Interrupt, syscall.SIGTERM, syscall.SIGHUP)
	status := cli.Run(ctx, os.Args[1:], os.Stdout, os.Stderr)
	stop()
	os.Exit(status)
}
