// Command cadencewright makes weekly observing plans for a pulsar timing
// array. Its commands work on campaign and plan files alone, or serve a whole
// array over HTTP; "cadencewright help" lists them.
//
// Exit codes: 0 all well; 1 the command did its work but the answer is no (a
// plan with violations), or something outside failed (a full disk, a lost
// database); 2 wrong usage or input that cannot be used.
package main

import (
	"context"
	"os"
	"os/signal"
	"syscall"
	_ "time/tzdata" // telescopes' zones, on machines that have none
)

func main() {
	ctx, stop := signal.NotifyContext(context.Background(), os.Interrupt, syscall.SIGTERM)
	// The first Ctrl-C asks the command to finish, the second ends it.
	context.AfterFunc(ctx, stop)
	os.Exit(run(ctx, os.Args[1:], os.Stdin, os.Stdout, os.Stderr))
}
