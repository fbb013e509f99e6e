package scheduler

import (
	"math"
	"strconv"

	"cadencewright/scheduler/internal/strictjson"
)

// number is a finite float64 within a range.
type number struct {
	lo, hi   float64
	above    bool // lo itself is not allowed
	below    bool // hi itself is not allowed
	unit     string
	standard float64 // what an absent value means
	hint     string  // added to the range where the mistake is a known one
}

// above is a number greater than lo, up to hi.
func above(lo, hi float64, unit string) number {
	return number{lo: lo, hi: hi, above: true, unit: unit}
}

// within is a number from lo to hi, both included.
func within(lo, hi float64, unit string) number { return number{lo: lo, hi: hi, unit: unit} }

// or sets what an absent value means.
func (k number) or(standard float64) number { k.standard = standard; return k }

// hinting adds advice to the message of a value out of range.
func (k number) hinting(hint string) number { k.hint = hint; return k }

// ok reports whether the value is allowed; NaN never is.
func (k number) ok(v float64) bool {
	return v >= k.lo && v <= k.hi && !(k.above && v == k.lo) && !(k.below && v == k.hi)
}

// allowed says the range in words.
func (k number) allowed() string {
	var s string
	switch {
	case math.IsInf(k.lo, -1) && math.IsInf(k.hi, 1):
		return "a finite number"
	case k.above:
		s = "greater than " + short(k.lo) + " and at most " + short(k.hi)
	case k.below:
		s = "from " + short(k.lo) + " to less than " + short(k.hi)
	default:
		s = "from " + short(k.lo) + " to " + short(k.hi)
	}
	if k.unit != "" {
		s += " " + k.unit
	}
	if k.hint != "" {
		s += " (" + k.hint + ")"
	}
	return s
}

func (k number) reset(to any) { *to.(*float64) = k.standard }

// read keeps the value even where it is out of range: the problem is reported,
// and rules between values know not to look at it.
func (k number) read(r *fileReader, to any) {
	if v, ok := r.number(); ok {
		*to.(*float64) = v
		k.check(&r.checker, to)
	}
}

func (k number) check(c *checker, from any) {
	switch v := *from.(*float64); {
	case math.IsNaN(v) || math.IsInf(v, 0):
		c.bad("%s must be a finite number, not %v", c.name(), v)
	case !k.ok(v):
		c.bad("%s is %s; it must be %s", c.name(), short(v), k.allowed())
	}
}

func (k number) isDefault(from any) bool { return *from.(*float64) == k.standard }

func (k number) write(w *writer, from any) { w.number(*from.(*float64)) }

// schema says the same range. A default of 0 is not written: it mostly stands
// for "none" and is not a value of the range.
func (k number) schema() map[string]any {
	s := map[string]any{"type": "number"}
	if !math.IsInf(k.lo, -1) {
		s[map[bool]string{true: "exclusiveMinimum", false: "minimum"}[k.above]] = k.lo
	}
	if !math.IsInf(k.hi, 1) {
		s[map[bool]string{true: "exclusiveMaximum", false: "maximum"}[k.below]] = k.hi
	}
	if k.standard != 0 {
		s["default"] = k.standard
	}
	return s
}

// integer is a whole number within a range, or one of a few. A file may write
// it as 30 or 30.0.
type integer struct {
	lo, hi   int
	unit     string
	standard int
	one      []int // if not empty, the only values allowed
}

func (k integer) reset(to any) { *to.(*int) = k.standard }

// read takes any spelling of a whole number and refuses a fraction before the
// range is looked at.
func (k integer) read(r *fileReader, to any) {
	v, ok := r.number()
	if !ok {
		return
	}
	if v != math.Trunc(v) || math.Abs(v) > 1<<31 {
		r.bad("%s is %s; it must be a whole number %s", r.name(), short(v), k.allowed())
		return
	}
	*to.(*int) = int(v)
	k.check(&r.checker, to)
}

// allowed says the range in words.
func (k integer) allowed() string {
	s := "from " + strconv.Itoa(k.lo) + " to " + strconv.Itoa(k.hi)
	if len(k.one) > 0 {
		s = ""
		for i, v := range k.one {
			switch {
			case i > 0 && i == len(k.one)-1:
				s += " or "
			case i > 0:
				s += ", "
			}
			s += strconv.Itoa(v)
		}
	}
	if k.unit != "" {
		s += " " + k.unit
	}
	return s
}

func (k integer) check(c *checker, from any) {
	v := *from.(*int)
	ok := v >= k.lo && v <= k.hi
	if len(k.one) > 0 {
		ok = false
		for _, x := range k.one {
			ok = ok || v == x
		}
	}
	if !ok {
		c.bad("%s is %d; it must be %s", c.name(), v, k.allowed())
	}
}

func (k integer) isDefault(from any) bool { return *from.(*int) == k.standard }

func (k integer) write(w *writer, from any) {
	w.b = strconv.AppendInt(w.b, int64(*from.(*int)), 10)
}

func (k integer) schema() map[string]any {
	s := map[string]any{"type": "integer"}
	if len(k.one) > 0 {
		s["enum"] = k.one
	} else {
		s["minimum"], s["maximum"] = k.lo, k.hi
	}
	if k.standard != 0 {
		s["default"] = k.standard
	}
	return s
}

// span is [lo, hi] with lo < hi, both within limits.
type span struct {
	lo, hi float64
	unit   string
}

func (k span) reset(to any) { *to.(*[2]float64) = [2]float64{} }

func (k span) read(r *fileReader, to any) {
	p := to.(*[2]float64)
	n, good := 0, true
	ok := r.list("a list of two numbers [lo, hi]", 2, func(i int) {
		v, ok := r.number()
		p[i] = v
		good = good && ok
		n++
	})
	switch {
	case !ok || !good:
	case n != 2:
		r.bad("%s must be two numbers [lo, hi], not %d", r.name(), n)
	default:
		k.check(&r.checker, to)
	}
}

// check reports each end at its own place; that they are in order is only looked
// at where both are good.
func (k span) check(c *checker, from any) {
	v := *from.(*[2]float64)
	limit := within(k.lo, k.hi, k.unit)
	good := true
	for i := range v {
		if !limit.ok(v[i]) {
			c.enterIndex(i)
			limit.check(c, &v[i])
			c.leave()
			good = false
		}
	}
	if good && !(v[0] < v[1]) {
		c.bad("%s is [%s, %s]; the first must be below the second", c.name(), short(v[0]), short(v[1]))
	}
}

func (k span) isDefault(from any) bool { return *from.(*[2]float64) == [2]float64{} }

func (k span) write(w *writer, from any) {
	v := *from.(*[2]float64)
	w.raw("[")
	w.number(v[0])
	w.raw(", ")
	w.number(v[1])
	w.raw("]")
}

func (k span) schema() map[string]any {
	return map[string]any{"type": "array", "minItems": 2, "maxItems": 2,
		"items": map[string]any{"type": "number", "minimum": k.lo, "maximum": k.hi}}
}

// optionalNumber is a float64 that may be absent or null: nil.
type optionalNumber struct{}

func (k optionalNumber) reset(to any) { *to.(**float64) = nil }

// read takes null as absent, as programs write what they do not know.
func (k optionalNumber) read(r *fileReader, to any) {
	if r.lex.Kind() == strictjson.Null {
		r.lex.Null()
		return
	}
	if v, ok := r.number(); ok {
		*to.(**float64) = &v
	}
}

func (k optionalNumber) check(c *checker, from any) {
	if p := *from.(**float64); p != nil && (math.IsNaN(*p) || math.IsInf(*p, 0)) {
		c.bad("%s must be a finite number, not %v", c.name(), *p)
	}
}

func (k optionalNumber) isDefault(from any) bool { return *from.(**float64) == nil }

func (k optionalNumber) write(w *writer, from any) { w.number(**from.(**float64)) }

func (k optionalNumber) schema() map[string]any {
	return map[string]any{"type": []string{"number", "null"}}
}
