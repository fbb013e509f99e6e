package main

import (
	"context"
	"errors"
	"flag"
	"fmt"
	"io"
	"strings"

	"cadencewright/scheduler"
)

// command is one verb of the program. Each has a file of its own; the table
// commands lists them all.
type command struct {
	name     string
	args     string // positional arguments as the usage line shows them
	short    string // one line for the list of commands
	long     string // what it does, for its own help
	examples []string
	// setup declares the command's flags and returns what to do once they
	// have been parsed.
	setup func(flags *flag.FlagSet) action
}

// action does the work of a command on its positional arguments.
type action func(ctx context.Context, std stdio, args []string) error

// stdio is what a command reads from and writes to.
type stdio struct {
	in       io.Reader
	out, err io.Writer
}

// The program's exit codes.
const (
	// Scripts depend on these numbers: they do not change.
	exitOK     = 0
	exitFailed = 1 // the answer is no, or something outside failed
	exitUsage  = 2 // wrong usage or unusable input
)

// usageError is a mistake on the command line, shown with a hint at the
// command's help.
type usageError struct{ message string }

func (e usageError) Error() string { return e.message }

// usagef makes a usageError.
func usagef(format string, args ...any) error {
	return usageError{message: fmt.Sprintf(format, args...)}
}

// inputError is input that cannot be used: a file that is not there, too
// large or wrong.
type inputError struct{ cause error }

func (e inputError) Error() string { return e.cause.Error() }
func (e inputError) Unwrap() error { return e.cause }

// errAnswerNo ends a command that has already said why with exit code 1.
var errAnswerNo = errors.New("the answer is no")

// run is the whole program apart from the process around it: it finds the
// command, parses its flags, runs it, reports its error and returns the exit
// code.
func run(ctx context.Context, args []string, stdin io.Reader, stdout, stderr io.Writer) int {
	std := stdio{in: stdin, out: stdout, err: stderr}
	// Nothing asked for is wrong usage, with the list of what there is.
	if len(args) == 0 {
		fmt.Fprint(stderr, overview())
		return exitUsage
	}
	name, rest := args[0], args[1:]
	switch name {
	case "help", "-h", "-help", "--help":
		return help(std, rest)
	// As people expect of any program.
	case "-version", "--version":
		name = "version"
	}
	c := find(name)
	if c == nil {
		fmt.Fprintf(stderr, "cadencewright: %s\n", unknown(name))
		return exitUsage
	}
	return c.run(ctx, std, rest)
}

// run parses the command's flags and runs it.
func (c *command) run(ctx context.Context, std stdio, args []string) int {
	flags := flag.NewFlagSet(c.name, flag.ContinueOnError) // a fresh one: commands keep no state
	flags.SetOutput(io.Discard)                            // errors and help are written below
	act := c.setup(flags)
	positional, err := parseMixed(flags, args)
	if errors.Is(err, flag.ErrHelp) {
		return print(std, c.help())
	}
	if err != nil {
		err = usageError{message: err.Error()}
	} else {
		err = act(ctx, std, positional)
	}
	return c.report(std, err)
}

// report writes a command's error, if any, and gives the exit code. Wrong
// usage is met with the usage line; wrong input and failures with their cause
// alone.
func (c *command) report(std stdio, err error) int {
	var usage usageError
	var input inputError
	switch {
	case err == nil:
		return exitOK
	// Said already, on standard output.
	case errors.Is(err, errAnswerNo):
		return exitFailed
	case errors.As(err, &usage):
		fmt.Fprintf(std.err, "cadencewright %s: %v\nusage: %s\n\"cadencewright help %s\" says more.\n",
			c.name, err, c.usage(), c.name)
		return exitUsage
	}
	fmt.Fprintf(std.err, "cadencewright %s: %v\n", c.name, err)
	if errors.As(err, &input) || errors.Is(err, scheduler.ErrInvalid) || errors.Is(err, scheduler.ErrTooLarge) {
		return exitUsage
	}
	return exitFailed
}

// parseMixed parses flags that may stand before, between and after the
// positional arguments, which it returns. After "--" all are positional.
func parseMixed(flags *flag.FlagSet, args []string) ([]string, error) {
	var positional []string
	for {
		// Once for each stretch of flags between positional arguments.
		if err := flags.Parse(args); err != nil {
			return nil, err
		}
		rest := flags.Args()
		if len(rest) == 0 {
			return positional, nil
		}
		// The flag package stops at the first positional argument and after
		// "--", which it swallows.
		if used := len(args) - len(rest); used > 0 && args[used-1] == "--" {
			return append(positional, rest...), nil
		}
		positional = append(positional, rest[0])
		args = rest[1:]
	}
}

// exactly checks the number of positional arguments against their names.
func exactly(args []string, names ...string) error {
	switch {
	case len(args) < len(names):
		return usagef("%s is missing", names[len(args)])
	case len(args) > len(names):
		return usagef("there is no place for the argument %q", args[len(names)])
	}
	return nil
}

// print writes text to standard output, where it may not fit.
func print(std stdio, text string) int {
	if _, err := io.WriteString(std.out, text); err != nil {
		fmt.Fprintf(std.err, "cadencewright: writing the answer: %v\n", err)
		return exitFailed
	}
	return exitOK
}

// oneOf checks a flag that takes one of a few words.
func oneOf(flagName, value string, allowed ...string) error {
	for _, a := range allowed {
		if value == a {
			return nil
		}
	}
	return usagef("--%s is %q; it can be %s", flagName, value, strings.Join(allowed, ", "))
}
