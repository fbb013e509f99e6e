package main

import (
	"bytes"
	"context"
	"errors"
	"flag"
	"io"
	"slices"
	"strings"
	"testing"

	"cadencewright/scheduler"
)

func TestParseMixed(t *testing.T) {
	tests := []struct {
		args       string
		positional []string
		week       string
		quiet      bool
		bad        bool
	}{
		{args: "", positional: nil},
		{args: "a b", positional: []string{"a", "b"}},
		{args: "--week W a --quiet b", positional: []string{"a", "b"}, week: "W", quiet: true},
		{args: "a --week=W", positional: []string{"a"}, week: "W"},
		{args: "a -week W -", positional: []string{"a", "-"}, week: "W"},
		{args: "--quiet -- --week a", positional: []string{"--week", "a"}, quiet: true},
		{args: "a -- b --quiet", positional: []string{"a", "b", "--quiet"}},
		{args: "a --nonsense", bad: true},
		{args: "a --week", bad: true},
	}
	for _, tt := range tests {
		t.Run(tt.args, func(t *testing.T) {
			flags := flag.NewFlagSet("x", flag.ContinueOnError)
			flags.SetOutput(io.Discard)
			week := flags.String("week", "", "")
			quiet := flags.Bool("quiet", false, "")
			got, err := parseMixed(flags, strings.Fields(tt.args))
			if (err != nil) != tt.bad {
				t.Fatalf("error %v", err)
			}
			if tt.bad {
				return
			}
			if !slices.Equal(got, tt.positional) || *week != tt.week || *quiet != tt.quiet {
				t.Errorf("got %q, week %q, quiet %v", got, *week, *quiet)
			}
		})
	}
}

func TestExitCodes(t *testing.T) {
	tests := []struct {
		name string
		err  error
		code int
		says string
	}{
		{"fine", nil, exitOK, ""},
		{"the answer is no", errAnswerNo, exitFailed, ""},
		{"wrong usage", usagef("--week is %q", "x"), exitUsage, "usage: cadencewright try"},
		{"bad input", inputError{errors.New("no such file")}, exitUsage, "no such file"},
		{"invalid values", scheduler.Errorf(scheduler.ErrInvalid, "week 99"), exitUsage, "week 99"},
		{"anything else", errors.New("disk full"), exitFailed, "cadencewright try: disk full"},
	}
	for _, tt := range tests {
		t.Run(tt.name, func(t *testing.T) {
			c := command{name: "try", setup: func(*flag.FlagSet) action {
				return func(context.Context, stdio, []string) error { return tt.err }
			}}
			var out, errs bytes.Buffer
			if got := c.run(context.Background(), stdio{out: &out, err: &errs}, nil); got != tt.code {
				t.Errorf("exit code %d, want %d", got, tt.code)
			}
			if !strings.Contains(errs.String(), tt.says) || (tt.says == "" && errs.Len() > 0) {
				t.Errorf("standard error: %q, want %q", errs.String(), tt.says)
			}
		})
	}
}

func TestEveryCommandHasHelp(t *testing.T) {
	seen := map[string]bool{}
	for i := range commands {
		c := &commands[i]
		if c.name == "" || seen[c.name] || find(c.name) != c {
			t.Errorf("command %q: no name, or one that is taken", c.name)
		}
		seen[c.name] = true
		if c.short == "" || len(c.short) > 70 || c.long == "" || len(c.examples) == 0 {
			t.Errorf("command %q: needs a short line (%d characters), a description and examples", c.name, len(c.short))
		}
		for _, e := range c.examples {
			if !strings.Contains(e, "cadencewright "+c.name) {
				t.Errorf("command %q: example %q shows another command", c.name, e)
			}
		}
		flags := flag.NewFlagSet(c.name, flag.ContinueOnError)
		c.setup(flags)
		text := c.help()
		flags.VisitAll(func(f *flag.Flag) {
			if f.Usage == "" || !strings.Contains(text, "--"+f.Name) {
				t.Errorf("command %q: flag %q is not described", c.name, f.Name)
			}
		})
	}
}

func TestEditDistance(t *testing.T) {
	for _, tt := range []struct {
		a, b string
		want int
	}{{"", "", 0}, {"plan", "plan", 0}, {"", "plan", 4}, {"plna", "plan", 2}, {"orbits", "orbit", 1}, {"sky", "key", 2}} {
		if got := editDistance(tt.a, tt.b); got != tt.want {
			t.Errorf("%q to %q: got %d, want %d", tt.a, tt.b, got, tt.want)
		}
		if got := editDistance(tt.b, tt.a); got != tt.want {
			t.Errorf("%q to %q: got %d, want %d", tt.b, tt.a, got, tt.want)
		}
	}
}
