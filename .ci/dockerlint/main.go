// Command dockerlint checks the Dockerfile as far as that goes without a
// container engine: it parses it as a build would and looks for the mistakes
// that a build would only find late.
package main

import (
	"fmt"
	"os"
	"path/filepath"
	"strings"

	"github.com/moby/buildkit/frontend/dockerfile/instructions"
	"github.com/moby/buildkit/frontend/dockerfile/linter"
	"github.com/moby/buildkit/frontend/dockerfile/parser"
)

func main() {
	if len(os.Args) != 2 {
		fmt.Fprintln(os.Stderr, "usage: dockerlint DOCKERFILE")
		os.Exit(2)
	}
	problems, err := lint(os.Args[1])
	if err != nil {
		fmt.Fprintln(os.Stderr, err)
		os.Exit(2)
	}
	for _, p := range problems {
		fmt.Println(p)
	}
	if len(problems) > 0 {
		os.Exit(1)
	}
	fmt.Println("Dockerfile: no problem found")
}

// lint parses the file and returns every problem found in it.
func lint(path string) ([]string, error) {
	f, err := os.Open(path)
	if err != nil {
		return nil, err
	}
	defer f.Close()
	res, err := parser.Parse(f)
	if err != nil {
		return nil, fmt.Errorf("%s: %w", path, err)
	}
	var problems []string
	warn := func(rule, description, _, msg string, _ []parser.Range) {
		problems = append(problems, fmt.Sprintf("%s: %s (%s)", rule, msg, description))
	}
	stages, _, err := instructions.Parse(res.AST, linter.New(&linter.Config{Warn: warn}))
	if err != nil {
		return nil, fmt.Errorf("%s: %w", path, err)
	}
	return append(problems, checkStages(stages, filepath.Dir(path))...), nil
}

// checkStages looks for what the parser does not mind.
func checkStages(stages []instructions.Stage, dir string) []string {
	var problems []string
	say := func(format string, a ...any) { problems = append(problems, fmt.Sprintf(format, a...)) }
	names := map[string]bool{}
	for _, s := range stages {
		if !names[s.BaseName] && !strings.Contains(s.BaseName, ":") {
			say("stage %s: base image %s carries no tag", s.Name, s.BaseName)
		}
		for _, c := range s.Commands {
			cp, ok := c.(*instructions.CopyCommand)
			switch {
			case !ok:
			case cp.From != "" && !names[cp.From]:
				say("stage %s: COPY --from=%s names no earlier stage", s.Name, cp.From)
			case cp.From == "":
				for _, src := range cp.SourcePaths {
					if _, err := os.Stat(filepath.Join(dir, src)); err != nil {
						say("stage %s: COPY source %s does not exist", s.Name, src)
					}
				}
			}
		}
		names[s.Name] = true
	}
	return append(problems, checkLast(stages[len(stages)-1])...)
}

// checkLast asks of the final stage what a service needs: a user that is not
// root, a health check, and an entry point that gets signals itself.
func checkLast(s instructions.Stage) []string {
	var user, health, entry bool
	for _, c := range s.Commands {
		switch c := c.(type) {
		case *instructions.UserCommand:
			user = c.User != "root" && c.User != "0"
		case *instructions.HealthCheckCommand:
			health = true
		case *instructions.EntrypointCommand:
			entry = !c.PrependShell
		}
	}
	var problems []string
	for what, ok := range map[string]bool{"a USER that is not root": user, "a HEALTHCHECK": health, "an ENTRYPOINT in exec form": entry} {
		if !ok {
			problems = append(problems, "last stage: lacks "+what)
		}
	}
	return problems
}
