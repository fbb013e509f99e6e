package scheduler

import (
	"sort"
	"time"

	"cadencewright/scheduler/internal/strictjson"
)

// planFile is the whole plan file. What a plan may lack without being
// unreadable is optional, so that a re-check can report it.
var planFile = table{what: "a plan file", lines: true, fields: []field{
	{key: "format", need: must, kind: literal(PlanFormat), doc: "format of this file"},
	{key: "campaign", need: must, kind: text{}, at: at(func(p *Plan) *string { return &p.Campaign }), doc: "name of the campaign that the plan is for"},
	{key: "from", need: must, kind: instant{}, at: at(func(p *Plan) *time.Time { return &p.From }), doc: "first instant of the horizon"},
	{key: "to", need: must, kind: instant{}, at: at(func(p *Plan) *time.Time { return &p.To }), doc: "first instant after the horizon"},
	{key: "score", need: must, kind: anyNumber, at: at(func(p *Plan) *float64 { return &p.Score }), doc: "all that is earned"},
	{key: "possible", need: must, kind: anyNumber, at: at(func(p *Plan) *float64 { return &p.Possible }), doc: "sum of the weights of all units"},
	{key: "bound", need: must, kind: anyNumber, at: at(func(p *Plan) *float64 { return &p.Bound }), doc: "no plan can score more"},
	{key: "scans", need: must, kind: list[Scan]{&scanTable, 0, MaxPlanScans}, at: at(func(p *Plan) *[]Scan { return &p.Scans }), doc: "the scans"},
	{key: "unmet", kind: list[Unmet]{&unmetTable, 0, MaxPlanUnits}, at: at(func(p *Plan) *[]Unmet { return &p.Unmet }), doc: "units that earned fewer times than they could"},
	{key: "certificate", kind: nested{&certificateTable}, at: at(func(p *Plan) *Certificate { return &p.Certificate }), doc: "what anyone needs to recompute the bound"},
}}

var scanTable = table{what: "a scan", fields: []field{
	{key: "block", need: must, kind: text{}, at: at(func(s *Scan) *string { return &s.Block }), doc: "id of the block"},
	{key: "telescope", need: must, kind: text{}, at: at(func(s *Scan) *string { return &s.Telescope }), doc: "code of the telescope"},
	{key: "source", need: must, kind: text{}, at: at(func(s *Scan) *string { return &s.Source }), doc: "name of the source"},
	{key: "receiver", need: must, kind: text{}, at: at(func(s *Scan) *string { return &s.Receiver }), doc: "code of the receiver"},
	{key: "start", need: must, kind: instant{}, at: at(func(s *Scan) *time.Time { return &s.Start }), doc: "start of the scan, on the grid"},
	{key: "minutes", need: must, kind: integer{lo: 1, hi: int(MaxBlock.Minutes()), unit: "minutes"}, at: at(func(s *Scan) *int { return &s.Minutes }), doc: "length, minutes"},
	{key: "motor_az_deg", kind: optionalNumber{}, at: at(func(s *Scan) **float64 { return &s.MotorAzDeg }), doc: "altaz only: azimuth of the motor at the start, turns included, degrees"},
	{key: "pinned", kind: truth{}, at: at(func(s *Scan) *bool { return &s.Pinned }), doc: "stands in the plan because it is pinned"},
	{key: "toa_us", kind: figure{}, at: at(func(s *Scan) *float64 { return &s.TOAUs }), doc: "predicted TOA uncertainty, us; absent: not detectable"},
	{key: "earns", kind: list[Earning]{&earningTable, 0, MaxScanEarns}, at: at(func(s *Scan) *[]Earning { return &s.Earns }), doc: "what the scan earns"},
}}

var earningTable = table{what: "an earning", fields: []field{
	{key: "goal", need: must, kind: text{}, at: at(func(e *Earning) *string { return &e.Goal }), doc: "id of the goal"},
	{key: "unit", need: must, kind: text{}, at: at(func(e *Earning) *string { return &e.Unit }), doc: "name of the unit: goal#k or goal@window"},
	{key: "value", need: must, kind: anyNumber, at: at(func(e *Earning) *float64 { return &e.Value }), doc: "what the scan gets from the unit"},
}}

var unmetTable = table{what: "an unmet unit", fields: []field{
	{key: "goal", need: must, kind: text{}, at: at(func(u *Unmet) *string { return &u.Goal }), doc: "id of the goal"},
	{key: "unit", need: must, kind: text{}, at: at(func(u *Unmet) *string { return &u.Unit }), doc: "name of the unit"},
	{key: "weight", need: must, kind: anyNumber, at: at(func(u *Unmet) *float64 { return &u.Weight }), doc: "what the unit is worth"},
	{key: "reasons", kind: reasons{}, at: at(func(u *Unmet) *[]Reason { return &u.Reasons }), doc: "why it is unmet"},
}}

var reasonTable = table{what: "a reason", fields: []field{
	{key: "code", kind: text{}, at: at(func(r *Reason) *string { return (*string)(&r.Code) }), doc: "name of the cause"},
	{key: "text", need: must, kind: text{empty: true, most: MaxReasonChars, lines: true}, at: at(func(r *Reason) *string { return &r.Text }), doc: "the cause in plain words"},
	{key: "count", kind: integer{lo: 0, hi: 1 << 31}, at: at(func(r *Reason) *int { return &r.Count }), doc: "candidate scans or blocks it applies to"},
}}

var certificateTable = table{what: "a certificate", fields: []field{
	{key: "prices", need: must, kind: prices{}, at: at(func(c *Certificate) *map[string]float64 { return &c.Prices }), doc: "price of a unit by its name; 0 where left out"},
	{key: "bound", need: must, kind: anyNumber, at: at(func(c *Certificate) *float64 { return &c.Bound }), doc: "bound that follows from the prices"},
}}

// figure is a positive number; absent, null and 0 all say that there is none.
type figure struct{ number }

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
