package scheduler

import (
	"sort"
	"time"

	"cadencewright/scheduler/internal/strictjson"
)

// planFile is the whole plan file. What a plan may lack without being
// unreadable is optional, so that a re-check can report it.
var planFile = table{what: "a plan file", lines: true, fields: []field{
	{key: "format", need: true, kind: literal(PlanFormat), doc: "format of this file"},
	req("campaign", text{}, func(p *Plan) *string { return &p.Campaign }, "name of the campaign that the plan is for"),
	req("from", instant{}, func(p *Plan) *time.Time { return &p.From }, "first instant of the horizon"),
	req("to", instant{}, func(p *Plan) *time.Time { return &p.To }, "first instant after the horizon"),
	req("score", anyNumber, func(p *Plan) *float64 { return &p.Score }, "all that is earned"),
	req("possible", anyNumber, func(p *Plan) *float64 { return &p.Possible }, "sum of the weights of all units"),
	req("bound", anyNumber, func(p *Plan) *float64 { return &p.Bound }, "no plan can score more"),
	req("scans", list[Scan]{&scanTable, 0, MaxPlanScans}, func(p *Plan) *[]Scan { return &p.Scans }, "the scans"),
	opt("unmet", list[Unmet]{&unmetTable, 0, MaxPlanUnits}, func(p *Plan) *[]Unmet { return &p.Unmet },
		"units that earned fewer times than they could"),
	opt("certificate", nested{&certificateTable}, func(p *Plan) *Certificate { return &p.Certificate },
		"what anyone needs to recompute the bound"),
}}

// scanTable: references are not followed here; a plan is read without its
// campaign.
var scanTable = table{what: "a scan", fields: []field{
	req("block", text{}, func(s *Scan) *string { return &s.Block }, "id of the block"),
	req("telescope", text{}, func(s *Scan) *string { return &s.Telescope }, "code of the telescope"),
	req("source", text{}, func(s *Scan) *string { return &s.Source }, "name of the source"),
	req("receiver", text{}, func(s *Scan) *string { return &s.Receiver }, "code of the receiver"),
	req("start", instant{}, func(s *Scan) *time.Time { return &s.Start }, "start of the scan, on the grid"),
	req("minutes", integer{lo: 1, hi: int(MaxBlock.Minutes()), unit: "minutes"}, func(s *Scan) *int { return &s.Minutes },
		"length, minutes"),
	opt("motor_az_deg", optionalNumber{}, func(s *Scan) **float64 { return &s.MotorAzDeg },
		"altaz only: azimuth of the motor at the start, turns included, degrees"),
	opt("pinned", truth{}, func(s *Scan) *bool { return &s.Pinned }, "stands in the plan because it is pinned"),
	opt("toa_us", figure{}, func(s *Scan) *float64 { return &s.TOAUs }, "predicted TOA uncertainty, us; absent: not detectable"),
	opt("earns", list[Earning]{&earningTable, 0, MaxScanEarns}, func(s *Scan) *[]Earning { return &s.Earns }, "what the scan earns"),
}}

// earningTable: for units that several scans earn together, each lists its
// share.
var earningTable = table{what: "an earning", fields: []field{
	req("goal", text{}, func(e *Earning) *string { return &e.Goal }, "id of the goal"),
	req("unit", text{}, func(e *Earning) *string { return &e.Unit }, "name of the unit: goal#k or goal@window"),
	req("value", anyNumber, func(e *Earning) *float64 { return &e.Value }, "what the scan gets from the unit"),
}}

// unmetTable: reasons are for people, and other programs may leave them out.
var unmetTable = table{what: "an unmet unit", fields: []field{
	req("goal", text{}, func(u *Unmet) *string { return &u.Goal }, "id of the goal"),
	req("unit", text{}, func(u *Unmet) *string { return &u.Unit }, "name of the unit"),
	req("weight", anyNumber, func(u *Unmet) *float64 { return &u.Weight }, "what the unit is worth"),
	opt("reasons", reasons{}, func(u *Unmet) *[]Reason { return &u.Reasons }, "why it is unmet"),
}}

// reasonTable: text may hold line breaks; count is left out where nothing can
// be counted.
var reasonTable = table{what: "a reason", fields: []field{
	opt("code", text{}, func(r *Reason) *string { return (*string)(&r.Code) }, "name of the cause"),
	req("text", text{empty: true, most: MaxReasonChars, lines: true}, func(r *Reason) *string { return &r.Text },
		"the cause in plain words"),
	opt("count", integer{lo: 0, hi: 1 << 31}, func(r *Reason) *int { return &r.Count }, "candidate scans or blocks it applies to"),
}}

// certificateTable: prices of units that no plan can earn are refused by the
// re-check, not here.
var certificateTable = table{what: "a certificate", fields: []field{
	req("prices", prices{}, func(c *Certificate) *map[string]float64 { return &c.Prices }, "price of a unit by its name; 0 where left out"),
	req("bound", anyNumber, func(c *Certificate) *float64 { return &c.Bound }, "bound that follows from the prices"),
}}

// figure is a positive number; absent, null and 0 all say that there is none.
type figure struct{ number }

// read takes null as absent: other programs write it for a pulsar that cannot
// be detected.
func (k figure) read(r *fileReader, to any) {
	if r.lex.Kind() == strictjson.Null {
		r.lex.Null()
		return
	}
	if v, ok := r.number(); ok {
		*to.(*float64) = v
		k.check(&r.checker, to)
	}
}

func (k figure) check(c *checker, from any) {
	within(0, 1e300, "").check(c, from)
}

func (k figure) schema() map[string]any {
	return map[string]any{"type": []string{"number", "null"}, "minimum": 0}
}

// reasons is a list of reasons; one that is a plain string is its text.
type reasons struct{}

func (k reasons) reset(to any) { *to.(*[]Reason) = nil }

// read gives a plain string no code and no count.
func (k reasons) read(r *fileReader, to any) {
	p := to.(*[]Reason)
	r.list("a list", MaxReasons, func(int) {
		*p = append(*p, Reason{})
		last := &(*p)[len(*p)-1]
		if r.lex.Kind() == strictjson.String {
			text{empty: true, most: MaxReasonChars, lines: true}.read(r, &last.Text)
			return
		}
		reasonTable.read(r, last)
	})
}

func (k reasons) check(c *checker, from any) {
	list[Reason]{&reasonTable, 0, MaxReasons}.check(c, from)
}

func (k reasons) isDefault(from any) bool { return len(*from.(*[]Reason)) == 0 }

func (k reasons) write(w *writer, from any) {
	w.raw("[")
	items := *from.(*[]Reason)
	for i := range items {
		if i > 0 {
			w.raw(", ")
		}
		reasonTable.write(w, &items[i])
	}
	w.raw("]")
}

func (k reasons) schema() map[string]any {
	return map[string]any{"type": "array", "maxItems": MaxReasons,
		"items": map[string]any{"oneOf": []any{reasonTable.schema(), map[string]any{"type": "string"}}}}
}

// prices is an object from unit names to numbers.
type prices struct{}

func (k prices) reset(to any) { *to.(*map[string]float64) = map[string]float64{} }

// read keeps prices of 0, which mean the same as none: a plan is written back
// with what it was read with.
func (k prices) read(r *fileReader, to any) {
	if !r.expectObject() {
		return
	}
	m := map[string]float64{}
	*to.(*map[string]float64) = m
	r.lex.BeginObject()
	for first := true; ; first = false {
		key, ok := r.lex.NextKey(first)
		if !ok {
			break
		}
		name := string(key)
		r.enterKey(name)
		_, twice := m[name]
		if v, ok := r.number(); twice {
			r.bad("the key %s stands twice in one object", quote(name))
		} else if ok {
			m[name] = v
		}
		r.leave()
	}
	if len(m) > MaxPlanUnits {
		r.bad("%s holds %d names; at most %d are allowed", r.name(), len(m), MaxPlanUnits)
	}
}

func (k prices) check(c *checker, from any) {
	m := *from.(*map[string]float64)
	for _, name := range sortedKeys(m) {
		c.enterKey(name)
		v := m[name]
		anyNumber.check(c, &v)
		c.leave()
	}
}

func (k prices) isDefault(any) bool { return false }

// write sorts the names, so that the bytes do not depend on the map's order.
func (k prices) write(w *writer, from any) {
	m := *from.(*map[string]float64)
	w.raw("{")
	for i, name := range sortedKeys(m) {
		if i > 0 {
			w.raw(", ")
		}
		w.text(name)
		w.raw(": ")
		w.number(m[name])
	}
	w.raw("}")
}

func (k prices) schema() map[string]any {
	return map[string]any{"type": "object", "additionalProperties": map[string]any{"type": "number"}, "maxProperties": MaxPlanUnits}
}

// sortedKeys are the keys of m in ascending order.
func sortedKeys(m map[string]float64) []string {
	keys := make([]string, 0, len(m))
	for k := range m {
		keys = append(keys, k)
	}
	sort.Strings(keys)
	return keys
}
