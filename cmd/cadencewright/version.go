package main

import (
	"context"
	"flag"
	"fmt"
	"runtime"
	"runtime/debug"
)

// versionCommand prints one line, the same that the service tells in its
// API's description: what to name in a report of a fault.
var versionCommand = command{
	name:  "version",
	short: "print the version of the program",
	long: `Prints the version, the revision it was built from where the build knows it,
the version of Go and the platform.`,
	examples: []string{"cadencewright version"},
	setup: func(*flag.FlagSet) action {
		return func(_ context.Context, std stdio, args []string) error {
			if err := exactly(args); err != nil {
				return err
			}
			_, err := fmt.Fprintln(std.out, versionLine())
			return err
		}
	},
}

// versionLine describes this build.
func versionLine() string {
	version, revision, changed := "unknown version", "", ""
	// What the Go linker knows; a build from a checkout has no version but a
	// revision.
	if info, ok := debug.ReadBuildInfo(); ok {
		if v := info.Main.Version; v != "" && v != "(devel)" {
			version = v
		} else {
			version = "development build"
		}
		for _, s := range info.Settings {
			switch {
			case s.Key == "vcs.revision" && len(s.Value) >= 12:
				revision = ", revision " + s.Value[:12]
			case s.Key == "vcs.modified" && s.Value == "true":
				changed = " with changes"
			}
		}
	}
	return fmt.Sprintf("cadencewright %s%s%s, %s %s/%s",
		version, revision, changed, runtime.Version(), runtime.GOOS, runtime.GOARCH)
}
