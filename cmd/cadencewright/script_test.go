package main

import (
	"errors"
	"fmt"
	"os"
	"os/exec"
	"path/filepath"
	"strconv"
	"strings"
	"time"

	"github.com/rogpeppe/go-internal/testscript"
)

// scriptCommands are the words that the scripts have beside testscript's own.
var scriptCommands = map[string]func(ts *testscript.TestScript, neg bool, args []string){
	"exits":   exits,
	"bigfile": bigFile,
	"nofiles": noFiles,
	"waitfor": waitFor,
}

// waitFor waits until a file of the given pattern is there: a program in the
// background has come so far.
func waitFor(ts *testscript.TestScript, neg bool, args []string) {
	if neg || len(args) != 1 {
		ts.Fatalf("usage: waitfor PATTERN")
	}
	for range 3000 {
		found, err := filepath.Glob(ts.MkAbs(args[0]))
		ts.Check(err)
		if len(found) > 0 {
			return
		}
		time.Sleep(10 * time.Millisecond)
	}
	ts.Fatalf("no file %s in half a minute", args[0])
}

// exits runs a program and checks its exit code: "exits 2 cadencewright x".
func exits(ts *testscript.TestScript, neg bool, args []string) {
	if neg || len(args) < 2 {
		ts.Fatalf("usage: exits CODE program [args...]")
	}
	want, err := strconv.Atoi(args[0])
	ts.Check(err)
	err = ts.Exec(args[1], args[2:]...)
	got := 0
	var exit *exec.ExitError
	if errors.As(err, &exit) {
		got = exit.ExitCode()
	} else if err != nil {
		ts.Fatalf("%v", err)
	}
	if got != want {
		ts.Fatalf("exit code %d, want %d", got, want)
	}
}

// bigFile makes a file with a hole of the given size in MiB.
func bigFile(ts *testscript.TestScript, neg bool, args []string) {
	if neg || len(args) != 2 {
		ts.Fatalf("usage: bigfile NAME MIB")
	}
	mib, err := strconv.ParseInt(args[1], 10, 64)
	ts.Check(err)
	name := ts.MkAbs(args[0])
	ts.Check(os.WriteFile(name, nil, 0o600))
	ts.Check(os.Truncate(name, mib<<20))
}

// noFiles checks that a folder holds no file with the given ending.
func noFiles(ts *testscript.TestScript, neg bool, args []string) {
	if neg || len(args) != 2 {
		ts.Fatalf("usage: nofiles FOLDER ENDING")
	}
	entries, err := os.ReadDir(ts.MkAbs(args[0]))
	ts.Check(err)
	for _, e := range entries {
		if strings.HasSuffix(e.Name(), args[1]) {
			ts.Fatalf("%s was left behind", e.Name())
		}
	}
}

// scriptCondition is [devfull]: there is a device that is always full.
func scriptCondition(name string) (bool, error) {
	if name != "devfull" {
		return false, fmt.Errorf("no condition %q", name)
	}
	_, err := os.Stat("/dev/full")
	return err == nil, nil
}
