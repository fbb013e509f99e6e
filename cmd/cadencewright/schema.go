package main

import (
	"context"
	"flag"

	"cadencewright/scheduler"
)

// schemaCommand prints what the readers of files check by, made from the same
// tables: an editor that knows JSON Schema can then complete and check a campaign
// while it is written.
var schemaCommand = command{
	name:  "schema",
	args:  "campaign|plan",
	short: "print the JSON Schema of campaign or plan files",
	long: `Prints the JSON Schema (2020-12) of campaign files or of plan files. The schema
describes every field with its unit and range. Rules between fields, such as
blocks of a telescope that must not overlap, are checked when a file is read.`,
	examples: []string{
		"cadencewright schema campaign",
		"cadencewright schema plan > plan.schema.json",
	},
	setup: func(*flag.FlagSet) action {
		return func(_ context.Context, std stdio, args []string) error {
			if err := exactly(args, "campaign or plan"); err != nil {
				return err
			}
			var schema []byte
			switch args[0] {
			case "campaign":
				schema = scheduler.CampaignSchema()
			case "plan":
				schema = scheduler.PlanSchema()
			default:
				return usagef("there is no schema of %q; ask for campaign or plan", args[0])
			}
			_, err := std.out.Write(schema)
			return err
		}
	},
}
