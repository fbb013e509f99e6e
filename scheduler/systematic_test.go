package scheduler

import (
	"bytes"
	"encoding/json"
	"fmt"
	"math"
	"reflect"
	"slices"
	"strings"
	"testing"

	"github.com/santhosh-tekuri/jsonschema/v6"
	"pgregory.net/rapid"
)

// format is one of the two file formats, with a document that has every field.
type format struct {
	name     string
	root     *table
	document []byte
	read     func([]byte) error
	schema   *jsonschema.Schema
}

// formats are the two, for tests that hold for both.
func formats(t testing.TB) []format {
	return []format{
		{"campaign", &campaignFile, readTestFile(t, "every-field.json"),
			func(b []byte) error { _, err := ReadCampaign(b); return err }, compiled(t, CampaignSchema())},
		{"plan", &planFile, []byte(planText),
			func(b []byte) error { _, err := ReadPlan(b); return err }, compiled(t, PlanSchema())},
	}
}

// visit is one key of a document, with the field that describes it.
type visit struct {
	pointer string
	field   *field
	value   any
	belongs bool // required of this object if it is required at all
}

// visits walks a document along its table.
func visits(t testing.TB, f format) []visit {
	t.Helper()
	var root any
	if err := json.Unmarshal(f.document, &root); err != nil {
		t.Fatal(err)
	}
	var all []visit
	walk(f.root, root, "", func(v visit) { all = append(all, v) })
	if len(all) < 40 {
		t.Fatalf("%s: only %d keys visited", f.name, len(all))
	}
	return all
}

// walk visits the keys of an object and of the objects below it.
func walk(of *table, node any, at string, f func(visit)) {
	object, ok := node.(map[string]any)
	if !ok {
		return
	}
	selected, _ := object[of.selector].(string)
	for i := range of.fields {
		field := &of.fields[i]
		value, present := object[field.key]
		if !present {
			continue
		}
		pointer := at + "/" + field.key
		f(visit{pointer, field, value, field.belongs(selected)})
		inner := innerTable(field.kind)
		if inner == nil {
			continue
		}
		if items, isList := value.([]any); isList {
			for j, item := range items {
				walk(inner, item, fmt.Sprintf("%s/%d", pointer, j), f)
			}
		} else {
			walk(inner, value, pointer, f)
		}
	}
}

// innerTable is the table of a kind that describes objects, or nil.
func innerTable(k kind) *table {
	if _, ok := k.(reasons); ok {
		return &reasonTable
	}
	v := reflect.ValueOf(k)
	if v.Kind() != reflect.Struct || !v.FieldByName("table").IsValid() {
		return nil
	}
	return (*table)(v.FieldByName("table").UnsafePointer()) // whatever the type of the kind
}

// messageAt is the message of the problem at a place, or "".
func messageAt(err error, pointer string) string {
	p, _ := err.(Problems) //nolint:errorlint // the readers return nothing else
	for _, x := range p {
		if x.Pointer == pointer {
			return x.Message
		}
	}
	return ""
}

// Together the two documents show every key of every table.
func TestDocumentsHaveEveryKey(t *testing.T) {
	seen := map[*field]bool{}
	for _, f := range formats(t) {
		for _, v := range visits(t, f) {
			seen[v.field] = true
		}
	}
	for table := range allTables() {
		for i := range table.fields {
			if !seen[&table.fields[i]] {
				t.Errorf("no document shows the key %s of %s", table.fields[i].key, table.what)
			}
		}
	}
}

// A key taken away is missing where it is required, and nothing is missing
// where it is not; the schema agrees.
func TestEveryKeyIsRequiredOrNot(t *testing.T) {
	for _, f := range formats(t) {
		for _, v := range visits(t, f) {
			without := edited(t, f.document, v.pointer, unset)
			missing := strings.HasSuffix(messageAt(f.read(without), v.pointer), v.field.key+" is missing")
			if !missing {
				missing = strings.Contains(messageAt(f.read(without), v.pointer), v.field.key+" is missing; ")
			}
			if missing != v.field.need {
				t.Errorf("%s without %s: missing is %v, required is %v", f.name, v.pointer, missing, v.field.need)
			}
			if refused := valid(t, f.schema, without) != nil; refused != v.field.need {
				t.Errorf("the schema refuses a %s without %s: %v, required is %v", f.name, v.pointer, refused,
					v.field.need)
			}
		}
	}
}

// A number is accepted at the ends of its range and refused just outside, by
// reader and schema alike.
func TestEveryNumberHasItsRange(t *testing.T) {
	tried := 0
	for _, f := range formats(t) {
		for _, v := range visits(t, f) {
			k, ok := v.field.kind.(number)
			if !ok || math.IsInf(k.lo, 0) {
				continue
			}
			for _, x := range []struct {
				value float64
				ok    bool
			}{
				{k.lo, !k.above}, {k.hi, !k.below}, {math.Nextafter(k.lo, math.Inf(-1)), false},
				{math.Nextafter(k.hi, math.Inf(1)), false},
				{math.Nextafter(k.lo, k.hi), true}, {math.Nextafter(k.hi, k.lo), true}, {-1e300, false}, {1e300, false},
			} {
				if x.value < 0 && x.value > -1e-300 {
					continue // the writer of the test's documents rounds it to -0
				}
				changed := edited(t, f.document, v.pointer, x.value)
				message := messageAt(f.read(changed), v.pointer)
				if refused := strings.Contains(message, "it must be "+k.allowed()); refused == x.ok {
					t.Errorf("%s = %v: %q, allowed is %v", v.pointer, x.value, message, x.ok)
				}
				if err := valid(t, f.schema, changed); (err == nil) != x.ok {
					t.Errorf("%s = %v in the schema: %v, allowed is %v", v.pointer, x.value, err, x.ok)
				}
				tried++
			}
		}
	}
	if tried < 300 {
		t.Errorf("only %d values were tried", tried)
	}
}

// The same for whole numbers.
func TestEveryIntegerHasItsRange(t *testing.T) {
	for _, f := range formats(t) {
		for _, v := range visits(t, f) {
			k, ok := v.field.kind.(integer)
			if !ok || len(k.one) > 0 {
				continue
			}
			for value, allowed := range map[float64]bool{
				float64(k.lo): true, float64(k.hi): true, float64(k.lo - 1): false, float64(k.hi + 1): false,
				float64(k.lo) + 0.5: false, 1e300: false,
			} {
				changed := edited(t, f.document, v.pointer, value)
				message := messageAt(f.read(changed), v.pointer)
				if refused := strings.Contains(message, k.allowed()); refused == allowed {
					t.Errorf("%s = %v: %q, allowed is %v", v.pointer, value, message, allowed)
				}
				if err := valid(t, f.schema, changed); (err == nil) != allowed {
					t.Errorf("%s = %v in the schema: %v, allowed is %v", v.pointer, value, err, allowed)
				}
			}
		}
	}
}

// A value of another JSON type is refused at its place, by reader and schema.
func TestEveryKeyRefusesOtherTypes(t *testing.T) {
	samples := []any{"x", 1.5, true, nil, []any{}, map[string]any{}}
	for _, f := range formats(t) {
		for _, v := range visits(t, f) {
			for _, sample := range samples {
				if reflect.TypeOf(sample) == reflect.TypeOf(v.value) || sample == nil && acceptsNull(v.field) {
					continue
				}
				changed := edited(t, f.document, v.pointer, sample)
				if m := messageAt(f.read(changed), v.pointer); !strings.Contains(m, " must be ") {
					t.Errorf("%s %s = %v: %q", f.name, v.pointer, sample, m)
				}
				if valid(t, f.schema, changed) == nil {
					t.Errorf("the schema accepts %s %s = %v", f.name, v.pointer, sample)
				}
			}
		}
	}
}

// acceptsNull reports whether null says that there is no value.
func acceptsNull(f *field) bool {
	switch f.kind.(type) {
	case optionalNumber, figure:
		return true
	}
	return false
}

// A key that stands twice is told at its place.
func TestEveryKeyStandsOnce(t *testing.T) {
	for _, f := range formats(t) {
		for _, v := range visits(t, f) {
			// Append the key again, with its own value, to its object.
			const mark = "\x01"
			at := v.pointer[:strings.LastIndexByte(v.pointer, '/')]
			value, err := json.Marshal(v.value)
			if err != nil {
				t.Fatal(err)
			}
			marked := edited(t, f.document, at+"/"+mark, 0)
			twice := strings.Replace(string(marked), `"\u0001":0`, fmt.Sprintf("%q:%s", v.field.key, value), 1)
			if m := messageAt(f.read([]byte(twice)), v.pointer); m == "" ||
				!strings.Contains(m, "stands twice in one object") && v.field.key != "format" {
				t.Errorf("%s %s twice: %q", f.name, v.pointer, m)
			}
		}
	}
}

// A key that the format does not have is told in every object.
func TestEveryObjectRefusesUnknownKeys(t *testing.T) {
	for _, f := range formats(t) {
		objects := map[string]bool{}
		for _, v := range visits(t, f) {
			objects[v.pointer[:strings.LastIndexByte(v.pointer, '/')]] = true
		}
		for at := range objects {
			changed := edited(t, f.document, at+"/wholly unknown", 1)
			if m := messageAt(f.read(changed), at+"/wholly unknown"); !strings.Contains(m,
				`unknown key "wholly unknown" in `) {
				t.Errorf("%s %s: %q", f.name, at, m)
			}
			if valid(t, f.schema, changed) == nil {
				t.Errorf("the schema accepts an unknown key at %s %q", f.name, at)
			}
		}
	}
}

// Whatever a few changes make of a file: what the reader accepts the schema
// accepts too, is valid, and keeps its meaning through the writer.
func TestReaderAcceptsNoMoreThanTheSchema(t *testing.T) {
	f := formats(t)[0]
	all := visits(t, f)
	values := []any{0.0, 1.0, -1.0, 0.5, 2.0, 5.0, 30.0, 90.0, 1e9, "", "x", "ALT", "L1", "L", "SIM J1902+0307",
		"A-0104", "kepler", "ell1", "transit",
		"2027-01-05T00:00:00Z", "2027-01-05T00:00:00.25Z", true, false, nil, unset, []any{}, []any{"L"}, []any{30.0},
		[]any{1.0, 2.0}, map[string]any{}}
	accepted := 0
	rapid.Check(t, func(t *rapid.T) {
		document := f.document
		var places []string
		for range rapid.IntRange(1, 3).Draw(t, "changes") {
			v := rapid.SampledFrom(all).Draw(t, "key")
			nested := func(p string) bool {
				return strings.HasPrefix(p+"/", v.pointer+"/") || strings.HasPrefix(v.pointer+"/", p+"/")
			}
			if slices.ContainsFunc(places, nested) {
				continue // its place may be gone
			}
			places = append(places, v.pointer)
			document = edited(t, document, v.pointer, rapid.SampledFrom(values).Draw(t, "value"))
		}
		c, err := ReadCampaign(document)
		if err != nil {
			return
		}
		accepted++
		doc, _ := jsonschema.UnmarshalJSON(bytes.NewReader(document))
		if err := f.schema.Validate(doc); err != nil {
			t.Fatalf("the reader accepts what the schema refuses: %v\n%s", err, document)
		}
		data, err := WriteCampaign(c)
		if err != nil {
			t.Fatalf("%v\n%s", err, document)
		}
		if back, err := ReadCampaign(data); err != nil || !back.Equal(c) {
			t.Fatalf("another campaign after writing, %v", err)
		}
	})
	if accepted == 0 {
		t.Error("no changed file was accepted: the test tests nothing")
	}
}
