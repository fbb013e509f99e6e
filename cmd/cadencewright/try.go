package main

import (
	"context"
	"errors"
	"flag"
	"fmt"
	"io"
	"strconv"
	"strings"
	"time"

	"cadencewright/scheduler"
	"cadencewright/scheduler/edit"
	"cadencewright/scheduler/explain"
	"cadencewright/scheduler/feasible"
)

var tryCommand = command{
	name:  "try",
	args:  "CAMPAIGN.json PLAN.json",
	short: "try changes of a plan by hand: the new score, rules that break",
	long: `Says what changes of a plan by hand would do: the new score, what each unit then
earns, every rule that is broken, and where in its block the last scan added or
moved could start. All changes given are made together; nothing is planned anew.
Scans are named by their numbers, as check names them: their place in the plan's
list, from 0. With --out the changed plan is written, if it breaks no rule. The exit code
is 0 where no rule is broken, 1 where one is.`,
	examples: []string{
		"cadencewright try campaign.json plan.json --move 12,2027-01-20T06:30Z",
		"cadencewright try campaign.json plan.json --drop 3 --add 'B014,SIM J0412+1833,L1,2027-01-20T05:10Z,40'",
		"cadencewright try campaign.json plan.json --resize 12,60 --receiver 7,S1 --out changed.json",
	},
	setup: func(flags *flag.FlagSet) action {
		q := &tryQuestion{}
		q.declare(flags)
		return q.run
	},
}

// tryQuestion is what was asked.
type tryQuestion struct {
	changes []edit.Change
	pins    bool // some change is of a pin
	out     string
	asJSON  bool
}

// declare adds the flags; those for changes may be given several times.
func (q *tryQuestion) declare(flags *flag.FlagSet) {
	each := func(name, usage string, fields int, make func(f []string) (edit.Change, error)) {
		flags.Func(name, usage, func(text string) error {
			f := strings.Split(text, ",")
			if len(f) != fields {
				return fmt.Errorf("has %d parts separated by commas; %d are wanted", len(f), fields)
			}
			for i := range f {
				f[i] = strings.TrimSpace(f[i])
			}
			c, err := make(f)
			q.changes = append(q.changes, c)
			q.pins = q.pins || c.Op == edit.OpPin || c.Op == edit.OpUnpin
			return err
		})
	}
	each("add", "a new scan: `BLOCK,SOURCE,RECEIVER,START,MINUTES`", 5, func(f []string) (edit.Change, error) {
		start, err := parseInstant("add", f[3], time.Time{})
		if err != nil {
			return edit.Change{}, err
		}
		minutes, err := wholeNumber(f[4])
		return edit.Add(f[0], f[1], f[2], start, minutes), err
	})
	each("move", "another start in its block: `SCAN,START`", 2, func(f []string) (edit.Change, error) {
		start, err := parseInstant("move", f[1], time.Time{})
		if err != nil {
			return edit.Change{}, err
		}
		scan, err := wholeNumber(f[0])
		return edit.Move(scan, start), err
	})
	each("resize", "another length: `SCAN,MINUTES`", 2, func(f []string) (edit.Change, error) {
		minutes, err := wholeNumber(f[1])
		if err != nil {
			return edit.Change{}, err
		}
		scan, err := wholeNumber(f[0])
		return edit.Resize(scan, minutes), err
	})
	each("receiver", "another receiver: `SCAN,CODE`", 2, func(f []string) (edit.Change, error) {
		scan, err := wholeNumber(f[0])
		return edit.Tune(scan, f[1]), err
	})
	one := func(name, usage string, make func(scan int) edit.Change) {
		each(name, usage, 1, func(f []string) (edit.Change, error) {
			scan, err := wholeNumber(f[0])
			return make(scan), err
		})
	}
	one("drop", "take `SCAN` out of the plan", edit.Drop)
	one("pin", "make `SCAN` a pin: it must stand as it is", edit.Pin)
	one("unpin", "let a pinned `SCAN` be moved again", edit.Unpin)
	flags.StringVar(&q.out, "out", "", "`FILE` to write the changed plan to; - is standard output, with nothing else on it")
	flags.BoolVar(&q.asJSON, "json", false, "write the answer as JSON")
}

// wholeNumber reads a number of minutes or of a scan.
func wholeNumber(text string) (int, error) {
	n, err := strconv.Atoi(text)
	if err != nil || n < 0 {
		return 0, fmt.Errorf("%q is no whole number, 0 or more", text)
	}
	return n, nil
}

// run tries the changes, answers, and writes the changed plan if that was asked.
func (q *tryQuestion) run(ctx context.Context, std stdio, args []string) error {
	switch {
	case len(q.changes) == 0:
		return usagef("no change is given: --add, --move, --resize, --receiver, --drop, --pin or --unpin")
	case q.pins && q.out != "":
		// The plan alone would not fit its campaign.
		return usagef("--out does not go with --pin and --unpin: pins stand in the campaign's file")
	}
	p, problem, err := readBoth(ctx, std, args)
	if err != nil {
		return err
	}
	session, err := edit.New(problem, p)
	if err != nil {
		return inputError{err}
	}
	o, err := session.Try(q.changes...)
	if err != nil {
		return inputError{err}
	}
	if q.out != "-" {
		if err := q.answer(std.out, o); err != nil {
			return err
		}
	}
	if !o.Legal() {
		if q.out != "" {
			return errors.New("the changed plan breaks rules; nothing was written")
		}
		return errAnswerNo
	}
	if q.out == "" {
		return nil
	}
	return q.write(std, problem, session)
}

func (q *tryQuestion) answer(w io.Writer, o *edit.Outcome) error {
	if q.asJSON {
		return writeJSON(w, outcomeJSON(o))
	}
	_, err := io.WriteString(w, outcomeText(o))
	return err
}

// write makes the changed plan, re-checks it and writes it.
func (q *tryQuestion) write(std stdio, problem *feasible.Problem, session *edit.Session) error {
	plan, _, err := session.Apply(q.changes...)
	if err != nil {
		return err
	}
	// What is unmet is so for other reasons now.
	plan.Unmet = explain.Unmet(problem, plan)
	if err := soundPlan(problem.Campaign, plan); err != nil {
		return err
	}
	data, err := scheduler.WritePlan(plan)
	if err != nil {
		return err
	}
	out, err := openOutput(std, q.out)
	if err != nil {
		return err
	}
	defer out.discard()
	return out.commit(data)
}

// outcomeText is the answer for people.
func outcomeText(o *edit.Outcome) string {
	var b strings.Builder
	for _, v := range o.Violations {
		if v.New {
			fmt.Fprintf(&b, "breaks a rule: %s\n", v.Text)
		} else {
			fmt.Fprintf(&b, "broken before: %s\n", v.Text)
		}
	}
	for _, u := range o.Units {
		fmt.Fprintf(&b, "%s earns %.3f, before %.3f\n", u.Unit, u.After, u.Before)
	}
	for _, r := range o.Slide {
		fmt.Fprintf(&b, "could start between its neighbours %s\n", rangeText(r))
	}
	for _, r := range o.Starts {
		fmt.Fprintf(&b, "could start in its block %s\n", rangeText(r))
	}
	if len(o.Scans) > 0 && len(o.Starts) == 0 {
		b.WriteString("could start nowhere in its block\n")
	}
	// The last line is for programs too: words and numbers in a fixed order.
	fmt.Fprintf(&b, "score %.6f before %.6f difference %+.6f violations %d\n", o.Score, o.Before, o.Score-o.Before, len(o.Violations))
	return b.String()
}

// rangeText is a range of starts in words.
func rangeText(r edit.Range) string {
	if r.First.Equal(r.Last) {
		return "at " + r.First.Format(minuteLayout) + " UTC"
	}
	return "from " + r.First.Format(minuteLayout) + " to " + r.Last.Format(minuteLayout) + " UTC"
}

// outcomeJSON is the answer as plain values.
func outcomeJSON(o *edit.Outcome) any {
	type unit struct {
		Goal   string  `json:"goal"`
		Unit   string  `json:"unit"`
		Before float64 `json:"before"`
		After  float64 `json:"after"`
	}
	type rule struct {
		Rule    string   `json:"rule"`
		New     bool     `json:"new"`
		Text    string   `json:"text"`
		Value   *float64 `json:"value,omitempty"`
		Allowed *float64 `json:"allowed,omitempty"`
		Measure string   `json:"measure,omitempty"`
	}
	ranges := func(list []edit.Range) [][2]time.Time {
		out := make([][2]time.Time, 0, len(list))
		for _, r := range list {
			out = append(out, [2]time.Time{r.First, r.Last})
		}
		return out
	}
	us, rules := make([]unit, 0, len(o.Units)), make([]rule, 0, len(o.Violations))
	for _, u := range o.Units {
		us = append(us, unit{u.Goal, u.Unit, u.Before, u.After})
	}
	for i := range o.Violations {
		v := &o.Violations[i]
		r := rule{Rule: string(v.Rule), New: v.New, Text: v.Text, Measure: v.Measure}
		// Without a unit there are no figures.
		if v.Measure != "" {
			r.Value, r.Allowed = &v.Value, &v.Allowed
		}
		rules = append(rules, r)
	}
	return map[string]any{"ok": o.Legal(), "before": o.Before, "score": o.Score, "units": us, "violations": rules, "scans": scansJSON(o.Scans),
		"slide": ranges(o.Slide), "starts": ranges(o.Starts)}
}
