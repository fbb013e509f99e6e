package scheduler

import (
	"strings"
)

// The two file formats are described once, as tables of fields
// (tables_campaign.go, tables_plan.go). From the same tables the reader takes
// what it accepts, Validate the ranges, the writer its order and what it may
// leave out, and the JSON Schemas their rules, so that the four cannot differ.

// kind is how one sort of value is read, checked, written and described. The
// value itself is passed as a pointer to the Go field.
type kind interface {
	// reset stores what an absent field means.
	reset(to any)
	// read consumes one value of the file, stores it and checks it.
	read(r *fileReader, to any)
	// check reports a value that the rules of the field do not allow.
	check(c *checker, from any)
	// isDefault reports whether the value is what an absent field means.
	isDefault(from any) bool
	// write appends the value as JSON.
	write(w *writer, from any)
	// schema describes the value as JSON Schema.
	schema() map[string]any
}

// field is one key of an object in a file.
type field struct {
	key  string
	need bool // must be present
	kind kind
	at   func(obj any) any // the Go field, from a pointer to its struct
	doc  string            // for the JSON Schema: meaning and unit

	// only names the values of the table's selector, separated by blanks,
	// that the field belongs to; empty: all. need then holds for those alone.
	only string
	// derived is the default where it depends on other fields; nil: a constant.
	derived func(obj any) float64
}

// belongs reports whether the field belongs to objects of the selector value.
func (f *field) belongs(selected string) bool {
	if f.only == "" {
		return true
	}
	for _, v := range strings.Fields(f.only) {
		if v == selected {
			return true
		}
	}
	return false
}

// isDefault reports whether the object's field may be left out of a file.
func (f *field) isDefault(obj any) bool {
	if f.need {
		return false
	}
	if f.derived != nil {
		return *f.at(obj).(*float64) == f.derived(obj)
	}
	return f.kind.isDefault(f.at(obj))
}

// table is all keys of one sort of object, in the order they are written.
type table struct {
	what   string // "a source", for messages
	fields []field
	// selector is the key whose value decides which fields belong to the
	// object ("mount", "model"), choices its allowed values.
	selector string
	choices  []string
	// lines writes every key on a line of its own.
	lines bool
}

// req is a field that must be present; get finds it in its struct, doc says its
// meaning and unit.
func req[T, F any](key string, k kind, get func(*T) *F, doc string) field {
	return field{key: key, need: true, kind: k, at: func(obj any) any { return get(obj.(*T)) }, doc: doc}
}

// opt is a field that may be absent.
func opt[T, F any](key string, k kind, get func(*T) *F, doc string) field {
	f := req(key, k, get, doc)
	f.need = false
	return f
}

// onlyFor makes the field belong to some values of the table's selector.
func (f field) onlyFor(choices string) field { f.only = choices; return f }

// orElse makes the default of an absent number depend on other fields.
func (f field) orElse(derived func(obj any) float64) field { f.derived = derived; return f }

// find is the index of the field with the key, or -1; hint is where it is
// expected, since files mostly keep one order.
func (t *table) find(key []byte, hint int) int {
	for n := range t.fields {
		i := hint + n
		if i >= len(t.fields) {
			i -= len(t.fields)
		}
		if t.fields[i].key == string(key) {
			return i
		}
	}
	return -1
}

// selected is the object's value of the selector, and whether it is one of the
// choices; rules that hang on it are only checked then.
func (t *table) selected(obj any) (string, bool) {
	if t.selector == "" {
		return "", true
	}
	for i := range t.fields {
		if t.fields[i].key == t.selector {
			v := *t.fields[i].at(obj).(*string)
			return v, contains(t.choices, v)
		}
	}
	return "", false
}

// read reads one object into the struct that obj points to.
func (t *table) read(r *fileReader, obj any) {
	if !r.expectObject() {
		return
	}
	for i := range t.fields {
		if f := &t.fields[i]; f.at != nil {
			f.kind.reset(f.at(obj))
		}
	}
	var seen uint64 // a bit for each field; tables have fewer than 64
	hint := 0       // where the next key is expected
	r.lex.BeginObject()
	for first := true; ; first = false {
		key, ok := r.lex.NextKey(first)
		if !ok {
			break
		}
		i := t.find(key, hint)
		switch {
		case i < 0:
			t.unknown(r, string(key))
		case seen&(1<<i) != 0:
			r.enterKey(t.fields[i].key)
			r.bad("the key %q stands twice in one object", t.fields[i].key)
			r.lex.Skip()
			r.leave()
		default:
			seen |= 1 << i
			hint = i + 1
			t.readField(r, &t.fields[i], obj)
		}
	}
	if r.lex.Err() == nil {
		t.complete(r, obj, seen)
	}
}

// readField reads the value of one known key.
func (t *table) readField(r *fileReader, f *field, obj any) {
	r.enterKey(f.key)
	var to any
	if f.at != nil {
		to = f.at(obj)
	}
	f.kind.read(r, to)
	r.leave()
}

// unknown reports a key that the table does not have.
func (t *table) unknown(r *fileReader, key string) {
	r.enterKey(key)
	names := make([]string, len(t.fields))
	for i := range t.fields {
		names[i] = t.fields[i].key
	}
	r.bad("unknown key %s in %s%s", quote(key), t.what, r.suggest(key, names))
	r.lex.Skip()
	r.leave()
}

// complete fills in what was left out of an object and reports what may not be
// left out, or not be there.
func (t *table) complete(r *fileReader, obj any, seen uint64) {
	selected, known := t.selected(obj)
	for i := range t.fields {
		f := &t.fields[i]
		present := seen&(1<<i) != 0
		if !known && f.only != "" {
			continue
		}
		switch belongs := f.belongs(selected); {
		case present && !belongs:
			r.enterKey(f.key)
			r.bad("%s", t.foreign(f, selected))
			r.leave()
		case !present && belongs && f.need:
			r.enterKey(f.key)
			r.bad("%s is missing%s", f.key, t.forSelected(f, selected))
			r.leave()
		case !present && f.derived != nil:
			*f.at(obj).(*float64) = f.derived(obj)
		}
	}
}

// foreign says that a field is for objects of another selector value.
//
// The message names the values that the field belongs to and the one that this
// object has.
func (t *table) foreign(f *field, selected string) string {
	return f.key + " belongs to " + t.selector + " " + strings.Join(strings.Fields(f.only), " and ") +
		"; this one is " + selected
}

// forSelected names the selector value that makes a field necessary.
func (t *table) forSelected(f *field, selected string) string {
	if f.only == "" {
		return ""
	}
	return "; " + t.selector + " " + selected + " needs it"
}

// check applies every field's rule to a struct.
func (t *table) check(c *checker, obj any) {
	selected, known := t.selected(obj)
	for i := range t.fields {
		f := &t.fields[i]
		if f.at == nil {
			continue
		}
		v := f.at(obj)
		if f.only != "" {
			if !known {
				continue
			}
			if !f.belongs(selected) {
				if !f.kind.isDefault(v) {
					c.enterKey(f.key)
					c.bad("%s", t.foreign(f, selected))
					c.leave()
				}
				continue
			}
		}
		if f.derived == nil && f.isDefault(obj) {
			continue
		}
		c.enterKey(f.key)
		f.kind.check(c, v)
		c.leave()
	}
}

// write appends a struct as JSON, defaults and foreign fields left out.
func (t *table) write(w *writer, obj any) {
	selected, _ := t.selected(obj)
	w.raw("{")
	if t.lines {
		w.depth++
		defer func() { w.depth-- }()
	}
	n := 0
	for i := range t.fields {
		f := &t.fields[i]
		var v any
		if f.at != nil {
			if !f.belongs(selected) || f.isDefault(obj) {
				continue
			}
			v = f.at(obj)
		}
		if n > 0 {
			w.raw(",")
		}
		if t.lines {
			w.line()
		} else if n > 0 {
			w.raw(" ")
		}
		w.text(f.key)
		w.raw(": ")
		f.kind.write(w, v)
		n++
	}
	if t.lines {
		w.raw("\n")
	}
	w.raw("}")
}
