package main

import (
	"flag"
	"fmt"
	"io"
	"strings"
)

// overview is the list of commands. All help is made from the table of commands
// and their flags, so that it cannot name a flag that is not there or leave one
// out.
func overview() string {
	var b strings.Builder
	b.WriteString("cadencewright makes weekly observing plans for a pulsar timing array.\n\n" +
		"usage: cadencewright COMMAND [flags] [arguments]\n\ncommands:\n")
	for i := range commands {
		fmt.Fprintf(&b, "  %-10s %s\n", commands[i].name, commands[i].short)
	}
	b.WriteString("\n\"cadencewright help COMMAND\" describes a command, with examples.\n" +
		"Exit codes: 0 all well, 1 the answer is no or something failed, 2 wrong usage or unusable input.\n")
	return b.String()
}

// help answers "cadencewright help [COMMAND]".
func help(std stdio, args []string) int {
	if len(args) == 0 {
		return print(std, overview())
	}
	c := find(args[0])
	if c == nil {
		fmt.Fprintf(std.err, "cadencewright help: %s\n", unknown(args[0]))
		return exitUsage
	}
	return print(std, c.help())
}

// usage is the command's usage line.
func (c *command) usage() string {
	line := "cadencewright " + c.name + " [flags]"
	if c.args != "" {
		line += " " + c.args
	}
	return line
}

// help is the command's full description.
func (c *command) help() string {
	var b strings.Builder
	fmt.Fprintf(&b, "usage: %s\n\n%s\n", c.usage(), strings.TrimSpace(c.long))
	flags := flag.NewFlagSet(c.name, flag.ContinueOnError)
	flags.SetOutput(io.Discard)
	// Declaring the flags anew costs nothing and runs nothing of the command.
	c.setup(flags)
	first := true
	flags.VisitAll(func(f *flag.Flag) {
		if first {
			b.WriteString("\nflags (before or after the arguments):\n")
			first = false
		}
		b.WriteString(flagHelp(f))
	})
	if len(c.examples) > 0 {
		b.WriteString("\nexamples:\n")
		for _, e := range c.examples {
			b.WriteString("  " + e + "\n")
		}
	}
	return b.String()
}

// flagHelp describes one flag on a line or two.
func flagHelp(f *flag.Flag) string {
	// The word in backquotes in a flag's description is its value's name.
	value, usage := flag.UnquoteUsage(f)
	line := "  --" + f.Name
	if value != "" {
		line += " " + value
	}
	if f.DefValue != "" && f.DefValue != "false" && f.DefValue != "0" {
		usage += " (default " + f.DefValue + ")"
	}
	return fmt.Sprintf("%s\n      %s\n", line, strings.ReplaceAll(usage, "\n", "\n      "))
}

// find is the command with the given name, or nil.
func find(name string) *command {
	for i := range commands {
		if commands[i].name == name {
			return &commands[i]
		}
	}
	return nil
}

// unknown says that there is no such command and what may have been meant.
func unknown(name string) string {
	best, bestDistance := "", 3 // more than two slips are another word
	for i := range commands {
		if d := editDistance(name, commands[i].name); d < bestDistance {
			best, bestDistance = commands[i].name, d
		}
	}
	if best != "" {
		return fmt.Sprintf("there is no command %q; did you mean %q?", name, best)
	}
	return fmt.Sprintf("there is no command %q; \"cadencewright help\" lists them", name)
}

// editDistance is the number of single-character insertions, deletions and
// replacements that turn a into b.
func editDistance(a, b string) int {
	// Levenshtein's distance, one row of the table at a time; row[j] is the
	// distance of a's first i characters from b's first j.
	row := make([]int, len(b)+1)
	for j := range row {
		row[j] = j
	}
	for i := 1; i <= len(a); i++ {
		diagonal := row[0]
		row[0] = i
		for j := 1; j <= len(b); j++ {
			cost := 1
			if a[i-1] == b[j-1] {
				cost = 0
			}
			diagonal, row[j] = row[j], min(row[j]+1, row[j-1]+1, diagonal+cost)
		}
	}
	return row[len(b)]
}
