package main

import (
	"testing"

	"github.com/rogpeppe/go-internal/testscript"

	"cadencewright/testdata"
)

// TestMain lets the scripts below testdata/script run this test binary as
// "cadencewright".
func TestMain(m *testing.M) {
	testscript.Main(m, map[string]func(){"cadencewright": main})
}

// TestScripts runs every command as its user would. Each script is a txtar
// archive: commands first, then the files they work on.
func TestScripts(t *testing.T) {
	testscript.Run(t, testscript.Params{
		Dir:                 "testdata/script",
		RequireExplicitExec: true,
		RequireUniqueNames:  true,
		Cmds:                scriptCommands,
		Condition:           scriptCondition,
		Setup: func(e *testscript.Env) error {
			e.Setenv("CAMPAIGNS", testdata.Path("campaigns"))
			return nil
		},
	})
}
