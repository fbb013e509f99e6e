package main

import (
	"context"
	"errors"
	"flag"
	"fmt"
	"io"
	"runtime"
	"strings"

	"cadencewright/scheduler"
	"cadencewright/scheduler/verify"
)

// checkCommand is the judge of plans, whoever made them. It depends on the
// campaign and the plan alone and reads no database.
var checkCommand = command{
	name:  "check",
	args:  "CAMPAIGN.json PLAN.json",
	short: "re-check a plan against every rule, its score and its bound",
	long: `Re-checks a plan from first principles: every rule of the planning model, what
each unit earns, the score, the predicted uncertainties, and the upper bound that
the plan's certificate proves. It shares no code with the planner. Prints every
rule that is broken, then the score and the bound as computed anew. The exit code
is 0 where no rule is broken, 1 where one is, and 2 where the files cannot be
used or do not belong together. Limits are allowed 0.01 degrees, slews and
phase windows 1 s, numbers one part in a thousand.`,
	examples: []string{
		"cadencewright check campaign.json plan.json",
		"cadencewright check campaign.json plan.json --json",
		"cadencewright plan campaign.json | cadencewright check campaign.json -",
	},
	setup: func(flags *flag.FlagSet) action {
		// There is no flag for tolerances: a plan that passes only a looser check
		// than the planning model's is not good.
		asJSON := flags.Bool("json", false, "write the whole report as JSON")
		skip := flags.Bool("no-bound", false, "leave the bound alone, which takes most of the time")
		return func(ctx context.Context, std stdio, args []string) error {
			if err := exactly(args, "CAMPAIGN.json", "PLAN.json"); err != nil {
				return err
			}
			return check(ctx, std, args[0], args[1], *asJSON, *skip)
		}
	},
}

// check reads both files, checks the plan and writes the report.
func check(ctx context.Context, std stdio, campaignPath, planPath string, asJSON, skipBound bool) error {
	// Standard input can be read once.
	if campaignPath == "-" && planPath == "-" {
		return usagef("only one of the two files can come from standard input")
	}
	c, err := readCampaign(std, campaignPath)
	if err != nil {
		return err
	}
	p, err := readPlan(std, planPath)
	if err != nil {
		return err
	}
	// All cores: the report does not depend on how many.
	report, err := verify.Check(c, p, verify.Options{SkipBound: skipBound, Workers: runtime.GOMAXPROCS(0),
		Stop: func() bool { return ctx.Err() != nil }})
	if errors.Is(err, verify.ErrStopped) {
		return errors.New("stopped before the end; nothing is known about the plan")
	}
	if err != nil {
		return err
	}
	// The report is written whole, good or bad; the exit code says which.
	if asJSON {
		err = writeJSON(std.out, reportJSON(report, skipBound))
	} else {
		_, err = io.WriteString(std.out, reportText(report, skipBound))
	}
	if err == nil && !report.OK() {
		return errAnswerNo
	}
	return err
}

// readPlan reads and checks the form of a plan file.
func readPlan(std stdio, path string) (*scheduler.Plan, error) {
	data, err := readInput(std, path)
	if err != nil {
		return nil, err
	}
	p, err := scheduler.ReadPlan(data)
	if err != nil {
		return nil, unusable("plan", path, err)
	}
	return p, nil
}

// mostLines is how many broken rules are listed for people.
const mostLines = 500

// reportText is the report for people.
func reportText(r *verify.Report, skipBound bool) string {
	var b strings.Builder
	list := func(found []verify.Violation, before string) {
		for i, v := range found {
			if i == mostLines {
				fmt.Fprintf(&b, "%sand %d more; --json lists them all\n", before, len(found)-i)
				break
			}
			fmt.Fprintf(&b, "%s%s\n", before, v)
		}
	}
	// Notes break no rule and do not change the exit code.
	list(r.Violations, "")
	list(r.Notes, "note: ")
	// The last line is for programs too: words and numbers in a fixed order.
	// A unit of orbital phase that was earned at least once counts as earned.
	earned, total := 0, len(r.Units)
	for _, times := range r.Units {
		if times > 0 {
			earned++
		}
	}
	fmt.Fprintf(&b, "score %.6f possible %.6f", r.Score, r.Possible)
	if !skipBound {
		fmt.Fprintf(&b, " bound %.6f gap %.2f %%", r.Bound, 100*r.Gap())
	}
	fmt.Fprintf(&b, " units earned %d of %d violations %d\n", earned, total, len(r.Violations))
	return b.String()
}

// violationJSON is one broken rule as it is written; what it has nothing to
// say about is left out.
type violationJSON struct {
	// Rule is the name of a kind in package verify; it stays as it is, for
	// programs. Scan counts from 0 in the plan's list. Value and Allowed are in
	// Measure: deg, s, us, h, d, min or score.
	Rule    string   `json:"rule"`
	Text    string   `json:"text"`
	Scan    *int     `json:"scan,omitempty"`
	Block   string   `json:"block,omitempty"`
	Unit    string   `json:"unit,omitempty"`
	Value   *float64 `json:"value,omitempty"`
	Allowed *float64 `json:"allowed,omitempty"`
	Measure string   `json:"measure,omitempty"`
}

// reportJSON is the whole report as plain values.
func reportJSON(r *verify.Report, skipBound bool) any {
	list := func(found []verify.Violation) []violationJSON {
		out := make([]violationJSON, 0, len(found))
		for _, v := range found {
			j := violationJSON{Rule: string(v.Kind), Text: v.Text, Block: v.Block, Unit: v.Unit, Measure: v.Measure}
			// Pointers, so that scan 0 and a value of 0 are written and what a rule
			// is not about is left out.
			if v.Scan >= 0 {
				j.Scan = &v.Scan
			}
			if v.Measure != "" {
				j.Value, j.Allowed = &v.Value, &v.Allowed
			}
			out = append(out, j)
		}
		return out
	}
	// A bound that was not worked out is left out: 0 would be a claim.
	report := map[string]any{"ok": r.OK(), "score": r.Score, "possible": r.Possible, "units": r.Units,
		"violations": list(r.Violations), "notes": list(r.Notes)}
	if !skipBound {
		report["bound"], report["gap"] = r.Bound, r.Gap()
	}
	return report
}
