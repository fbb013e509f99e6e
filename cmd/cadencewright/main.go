// Command cadencewright makes weekly observing plans for a pulsar timing
// array. Its commands work on campaign and plan files alone, or serve a whole
// array over HTTP; "cadencewright help" lists them.
//
// A command is a file with one variable of type command and a line in
// commands.go. Its setup declares flags into a struct of what was asked and
// returns what to do; that checks the flags first, then reads files, then works,
// and writes its answer at the end: a mistake on the command line costs no work,
// and a failure leaves no half of an answer. Nothing is kept in variables of the
// package, so that tests run commands side by side.
//
// Commands get their streams and a context; those of the service read the
// environment too, and nothing else of the process is theirs.
// Angles are degrees, times UTC, and longitudes east-positive on the command line
// as in files; help names the unit and the range of every flag.
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

// main is the process around run: signals, arguments, streams and the exit code.
func main() {
	ctx, stop := signal.NotifyContext(context.Background(), os.Interrupt, syscall.SIGTERM)
	// The first Ctrl-C asks the command to finish, the second ends it.
	context.AfterFunc(ctx, stop)
	os.Exit(run(ctx, os.Args[1:], os.Stdin, os.Stdout, os.Stderr))
}
