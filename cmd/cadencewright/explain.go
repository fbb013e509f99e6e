package main

import (
	"context"
	"flag"
	"fmt"
	"io"
	"strings"
	"time"

	"cadencewright/scheduler"
	"cadencewright/scheduler/explain"
	"cadencewright/scheduler/feasible"
)

var explainCommand = command{
	name:  "explain",
	args:  "CAMPAIGN.json PLAN.json",
	short: "say why units of a plan are unmet, and what would meet them",
	long: `Says for every unit that a plan leaves unmet why that is so, with figures, and
lists changes that would each meet it, the smallest first: a scan to add or to
drop, another receiver or scan length, a lower limit, a longer or a further block.
Every change has been tried before it is named: the plan that it makes breaks no
rule, and earns from the unit.`,
	examples: []string{
		"cadencewright explain campaign.json plan.json",
		"cadencewright explain campaign.json plan.json --unit cad-12#1",
		"cadencewright explain campaign.json plan.json --json",
	},
	setup: func(flags *flag.FlagSet) action {
		unit := flags.String("unit", "", "only the unit of this `NAME`, as the plan lists it")
		asJSON := flags.Bool("json", false, "write the answer as JSON")
		return func(ctx context.Context, std stdio, args []string) error {
			p, problem, err := readBoth(ctx, std, args)
			if err != nil {
				return err
			}
			list, err := explained(ctx, problem, p, *unit)
			if err != nil {
				return err
			}
			if *asJSON {
				return writeJSON(std.out, explanationsJSON(list))
			}
			_, err = io.WriteString(std.out, explanationsText(list, *unit))
			return err
		}
	},
}

// readBoth reads a campaign and a plan of it, and the sky over the plan's
// horizon.
func readBoth(ctx context.Context, std stdio, args []string) (*scheduler.Plan, *feasible.Problem, error) {
	if err := exactly(args, "CAMPAIGN.json", "PLAN.json"); err != nil {
		return nil, nil, err
	}
	// It can be read once.
	if args[0] == "-" && args[1] == "-" {
		return nil, nil, usagef("only one of the two files can come from standard input")
	}
	c, err := readCampaign(std, args[0])
	if err != nil {
		return nil, nil, err
	}
	p, err := readPlan(std, args[1])
	if err != nil {
		return nil, nil, err
	}
	if p.Campaign != c.Name {
		return nil, nil, inputError{fmt.Errorf("the plan is for campaign %q, not for %q", p.Campaign, c.Name)}
	}
	problem, err := feasible.BuildUntil(c, scheduler.Horizon{From: p.From, To: p.To}, func() bool { return ctx.Err() != nil })
	return p, problem, err
}

// explanation is an unmet unit with what there is to say about it.
type explanation struct {
	unmet scheduler.Unmet // with causes alone
	could []explain.Suggestion
}

// explained are the unmet units of a plan, or the one asked for.
func explained(ctx context.Context, problem *feasible.Problem, p *scheduler.Plan, unit string) ([]explanation, error) {
	// A unit that does not exist is a mistake; one that is earned is not.
	if unit != "" && problem.Units.ByName(unit) < 0 {
		names := make([]string, len(problem.Units.Units))
		for i := range names {
			names[i] = problem.Units.Units[i].Name
		}
		return nil, notThere("unit", unit, names)
	}
	var list []explanation
	for _, u := range explain.Unmet(problem, p) {
		if unit != "" && u.Unit != unit {
			continue
		}
		if ctx.Err() != nil {
			return nil, ctx.Err()
		}
		// A plan holds only a few suggestions for each unit; here are all.
		could, err := explain.Suggest(problem, p, u.Unit)
		if err != nil {
			return nil, err
		}
		causes := make([]scheduler.Reason, 0, len(u.Reasons))
		for _, r := range u.Reasons {
			if r.Code != explain.Suggested {
				causes = append(causes, r)
			}
		}
		u.Reasons = causes
		list = append(list, explanation{u, could})
	}
	return list, nil
}

// explanationsText is the answer for people.
func explanationsText(list []explanation, unit string) string {
	if len(list) == 0 {
		if unit != "" {
			return unit + " is earned as often as it can be\n"
		}
		return "every unit is earned as often as it can be\n"
	}
	var b strings.Builder
	for i, e := range list {
		if i > 0 {
			b.WriteString("\n")
		}
		fmt.Fprintf(&b, "%s, weight %.2f\n", e.unmet.Unit, e.unmet.Weight)
		for _, r := range e.unmet.Reasons {
			fmt.Fprintf(&b, "  %s\n", r.Text)
		}
		for _, s := range e.could {
			fmt.Fprintf(&b, "  -> %s\n", s.Text)
		}
	}
	return b.String()
}

// explanationJSON and the types below are the answer for programs; what a
// suggestion has nothing to say about is left out.
type explanationJSON struct {
	Goal        string           `json:"goal"`
	Unit        string           `json:"unit"`
	Weight      float64          `json:"weight"`
	Reasons     []reasonJSON     `json:"reasons"`
	Suggestions []suggestionJSON `json:"suggestions"`
}

type reasonJSON struct {
	Code  string `json:"code"`
	Text  string `json:"text"`
	Count int    `json:"count,omitempty"`
}

type suggestionJSON struct {
	Kind         string     `json:"kind"`
	Text         string     `json:"text"`
	Gain         float64    `json:"gain"`
	Add          []scanJSON `json:"add"`
	Drop         []scanJSON `json:"drop,omitempty"`
	Move         []moveJSON `json:"move,omitempty"`
	Source       string     `json:"source,omitempty"`
	ScanMinutes  int        `json:"scan_minutes,omitempty"`
	Telescope    string     `json:"telescope,omitempty"`
	ElevationDeg *float64   `json:"elevation_min_deg,omitempty"`
	Block        string     `json:"block,omitempty"`
	Receivers    []string   `json:"receivers,omitempty"`
	Start        *time.Time `json:"start,omitempty"`
	End          *time.Time `json:"end,omitempty"`
	MoreMinutes  float64    `json:"more_min,omitempty"`
	LSTHours     []float64  `json:"lst_h,omitempty"`
}

// moveJSON is a scan of the plan with the start that it would have.
type moveJSON struct {
	Scan  scanJSON  `json:"scan"`
	Start time.Time `json:"start"`
}

// scanJSON is a scan by what it is, without what it earns.
type scanJSON struct {
	Block     string    `json:"block"`
	Telescope string    `json:"telescope"`
	Source    string    `json:"source"`
	Receiver  string    `json:"receiver"`
	Start     time.Time `json:"start"`
	Minutes   int       `json:"minutes"`
}

func scansJSON(list []scheduler.Scan) []scanJSON {
	out := make([]scanJSON, 0, len(list))
	for _, s := range list {
		out = append(out, scanJSON{s.Block, s.Telescope, s.Source, s.Receiver, s.Start, s.Minutes})
	}
	return out
}

// explanationsJSON is the answer as plain values.
func explanationsJSON(list []explanation) []explanationJSON {
	out := make([]explanationJSON, 0, len(list))
	for _, e := range list {
		j := explanationJSON{e.unmet.Goal, e.unmet.Unit, e.unmet.Weight, []reasonJSON{}, []suggestionJSON{}}
		for _, r := range e.unmet.Reasons {
			j.Reasons = append(j.Reasons, reasonJSON{string(r.Code), r.Text, r.Count})
		}
		for i := range e.could {
			j.Suggestions = append(j.Suggestions, suggestedJSON(&e.could[i]))
		}
		out = append(out, j)
	}
	return out
}

func suggestedJSON(s *explain.Suggestion) suggestionJSON {
	j := suggestionJSON{Kind: string(s.Kind), Text: s.Text, Gain: s.Gain, Add: scansJSON(s.Add), Drop: scansJSON(s.Drop), Source: s.Source,
		ScanMinutes: s.ScanMinutes, Telescope: s.Telescope, Block: s.Block, Receivers: s.Receivers, MoreMinutes: s.MoreMinutes}
	for _, m := range s.Move {
		j.Move = append(j.Move, moveJSON{scansJSON([]scheduler.Scan{m.Scan})[0], m.Start})
	}
	// A limit of 0 degrees is a figure; the zero of other kinds is none.
	if s.Kind == explain.LowerLimit {
		j.ElevationDeg = &s.ElevationDeg
	}
	if !s.Start.IsZero() {
		j.Start, j.End = &s.Start, &s.End
	}
	if s.Kind == explain.NewBlock {
		j.LSTHours = s.LSTHours[:]
	}
	return j
}
