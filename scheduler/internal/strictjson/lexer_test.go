package strictjson

import (
	"encoding/json"
	"errors"
	"fmt"
	"reflect"
	"strings"
	"testing"
	"unicode/utf16"
	"unicode/utf8"

	"pgregory.net/rapid"
)

// value reads any value into what encoding/json would make of it, numbers as
// they are written.
func value(x *Lexer) any {
	switch x.Kind() {
	case Object:
		m := map[string]any{}
		x.BeginObject()
		for first := true; ; first = false {
			key, ok := x.NextKey(first)
			if !ok {
				return m
			}
			name := string(key)
			m[name] = value(x)
		}
	case Array:
		list := []any{}
		x.BeginArray()
		for first := true; x.NextItem(first); first = false {
			list = append(list, value(x))
		}
		return list
	case String:
		b, _ := x.Text()
		return string(b)
	case Number:
		b, _ := x.Number()
		return json.Number(b)
	case Bool:
		v, _ := x.Bool()
		return v
	case Null:
		x.Null()
	case NotFinite:
		return string(x.Skip())
	}
	return nil
}

func TestLexerReadsEveryKind(t *testing.T) {
	const document = ` {"a": [1, -2.5e+3, 0, 1E-2], "b": {"c": "x\"\\\/\b\f\n\r\t\u00e9\ud83d\ude00é", "": {}}, "t": true, "f": false, "n": null, "e": []} `
	x := New([]byte(document), 10)
	got := value(x)
	if !x.End() {
		t.Fatal(x.Err())
	}
	d := json.NewDecoder(strings.NewReader(document))
	d.UseNumber()
	var want any
	if err := d.Decode(&want); err != nil {
		t.Fatal(err)
	}
	if !reflect.DeepEqual(got, want) {
		t.Errorf("read %v, want %v", got, want)
	}
}

// What programs write for values that JSON lacks is a kind of its own.
func TestLexerSeesWhatIsNotFinite(t *testing.T) {
	for _, word := range []string{"NaN", "nan", "Infinity", "-Infinity", "-NaN", "Inf", "-Inf", "inf", "-inf"} {
		x := New([]byte("["+word+", 1]"), 10)
		if got := value(x); !reflect.DeepEqual(got, []any{word, json.Number("1")}) || !x.End() {
			t.Errorf("%s is read as %v, %v", word, got, x.Err())
		}
	}
	for _, word := range []string{"N", "-", "-x", "Na", "infant"} {
		if x := New([]byte("["+word+"]"), 10); value(x) != nil && x.End() {
			t.Errorf("%s is accepted", word)
		}
	}
}

func TestLexerNamesTheFault(t *testing.T) {
	for _, c := range []struct {
		text, want string
		line, col  int
	}{
		{"[1 2]", "a comma or ']' is expected here, not '2'", 1, 4},
		{"[1,]", "a comma before ']'", 1, 4},
		{`{"a": 1,}`, "a comma before '}'", 1, 9},
		{"{\n  a: 1}", "a key in double quotes is expected here, not 'a'", 2, 3},
		{`{"a" 1}`, `a colon is expected after the key "a", not '1'`, 1, 6},
		{`{"a": }`, "a value is expected here, not '}'", 1, 7},
		{"[01]", `"01]" is not how JSON writes a number`, 1, 2},
		{"[1.]", `"1.]" is not how JSON writes a number`, 1, 2},
		{"[.5]", "a value is expected here, not '.'", 1, 2},
		{"[1e]", `"1e]" is not how JSON writes a number`, 1, 2},
		{"[+1]", "a value is expected here, not '+'", 1, 2},
		{`["a`, "a string that does not end", 1, 2},
		{`["a\`, "a string that does not end", 1, 4},
		{`["\n\`, "a string that does not end", 1, 5},
		{`["\n`, "a string that does not end", 1, 2},
		{"[\"a\tb\"]", "a control character (byte 0x09) inside a string; escape it or leave it out", 1, 4},
		{"[\"\\n\tb\"]", "a control character (byte 0x09) inside a string; escape it or leave it out", 1, 5},
		{`["\x"]`, `an escape that JSON does not have; write a backslash as \\`, 1, 3},
		{`["\u12"]`, `an escape that JSON does not have; write a backslash as \\`, 1, 3},
		{`["\ud800"]`, "half of a surrogate pair, which is no character", 1, 3},
		{`["\ud800\u0041"]`, "half of a surrogate pair, which is no character", 1, 3},
		{"[\"\xc3\"]", "text that is not valid UTF-8", 1, 3},
		{"[\"\\n\xc3\"]", "text that is not valid UTF-8", 1, 3},
		{"[true false]", "a comma or ']' is expected here, not 'f'", 1, 7},
		{"\n\n\x00", "a value is expected here, not byte 0x00", 3, 1},
		{"", "a value is expected here, not the end of the file", 1, 1},
		{"[[[[1]]]]", "nested more than 3 deep", 1, 4},
		{"1 1", "the document is over, but '1' follows", 1, 3},
	} {
		x := New([]byte(c.text), 3)
		value(x)
		x.End()
		var e *SyntaxError
		if !errors.As(x.Err(), &e) {
			t.Errorf("%q is accepted", c.text)
			continue
		}
		if e.Message != c.want || e.Line != c.line || e.Column != c.col {
			t.Errorf("%q: %d:%d %s, want %d:%d %s", c.text, e.Line, e.Column, e.Message, c.line, c.col, c.want)
		}
		if want := fmt.Sprintf("not valid JSON at line %d, column %d: %s", c.line, c.col, c.want); e.Error() != want {
			t.Errorf("%q: %s", c.text, e)
		}
	}
}

// A value of another kind than asked for is a fault, and after a fault all
// answers are false.
func TestLexerRefusesTheWrongKind(t *testing.T) {
	for name, read := range map[string]func(*Lexer) bool{
		"object": func(x *Lexer) bool { return x.BeginObject() },
		"list":   func(x *Lexer) bool { return x.BeginArray() },
		"string": func(x *Lexer) bool { _, ok := x.Text(); return ok },
		"number": func(x *Lexer) bool { _, ok := x.Number(); return ok },
		"truth":  func(x *Lexer) bool { _, ok := x.Bool(); return ok },
		"null":   func(x *Lexer) bool { return x.Null() },
	} {
		accepted := 0
		for _, text := range []string{"{}", "[]", `"x"`, "1", "true", "null"} {
			x := New([]byte(text), 3)
			if read(x) {
				accepted++
				continue
			}
			first := x.Err()
			if first == nil || x.Kind() != Invalid || x.Skip() != nil || x.End() || x.NextItem(true) ||
				x.BeginArray() || !errors.Is(x.Err(), first) {
				t.Errorf("%s of %s: a fault that does not stick, %v", name, text, first)
			}
		}
		if accepted != 1 {
			t.Errorf("%s accepts %d of the six kinds", name, accepted)
		}
	}
}

func TestSkipShowsScalars(t *testing.T) {
	for _, c := range []struct{ text, want string }{
		{` 12.5 `, "12.5"}, {`"a\"b"`, `"a\"b"`}, {"true", "true"}, {"null", "null"}, {"NaN", "NaN"},
		{`{"a": [1, {"b": 2}]}`, ""}, {"[[], {}]", ""},
	} {
		x := New([]byte(c.text), 5)
		if got := string(x.Skip()); got != c.want || !x.End() {
			t.Errorf("%s skipped as %q, %v", c.text, got, x.Err())
		}
	}
}

func TestKindString(t *testing.T) {
	for k, want := range map[Kind]string{Invalid: "nothing", Object: "an object", Array: "a list", String: "a string",
		Number: "a number", Bool: "true or false", Null: "null", NotFinite: "not a finite number"} {
		if got := k.String(); got != want {
			t.Errorf("%d is %q, want %q", k, got, want)
		}
	}
}

// The lexer accepts what the standard library accepts, but for what it refuses
// on purpose, and reads the same values.
func FuzzLexer(f *testing.F) {
	for _, s := range []string{`{"a": [1, -2.5e3, "x\u00e9\n", true, null, {}]}`, "[NaN, -Infinity]", `"\ud83d\ude00"`,
		`"\ud83d"`, "[[[[[]]]]]", "1 2", `{"a": 1, "a": 2}`, "[1,]", "-0.0e-0", "\xef\xbb\xbf{}"} {
		f.Add([]byte(s))
	}
	f.Fuzz(func(t *testing.T, data []byte) {
		x := New(data, 50)
		got := value(x)
		ok := x.End()
		y := New(data, 50)
		y.Skip()
		if y.End() != ok {
			t.Fatalf("read %v, skipped %v", x.Err(), y.Err())
		}
		text := string(data)
		switch {
		case ok && json.Valid(data):
			d := json.NewDecoder(strings.NewReader(text))
			d.UseNumber()
			var want any
			if err := d.Decode(&want); err != nil || !reflect.DeepEqual(got, want) {
				t.Fatalf("read %v, want %v, %v", got, want, err)
			}
		case ok && !strings.ContainsAny(text, "nN"):
			t.Fatalf("%q is no JSON but accepted as %v", text, got)
		case !ok && json.Valid(data) && utf8.Valid(data) && !strings.Contains(text, `\u`) &&
			strings.Count(text, "[")+strings.Count(text, "{") < 50:
			t.Fatalf("%q is JSON, but %v", text, x.Err())
		}
	})
}

// anyDocument writes a random value with random white space and escapes, the
// way some program somewhere would.
func anyDocument(t *rapid.T, depth int) string {
	space := func() string { return rapid.StringMatching(`[ \t\r\n]{0,2}`).Draw(t, "space") }
	text := func() string {
		var b strings.Builder
		b.WriteByte('"')
		for _, r := range rapid.StringN(0, 6, -1).Draw(t, "text") {
			switch {
			case r == '"' || r == '\\':
				b.WriteString(`\` + string(r))
			case r < ' ' || rapid.Bool().Draw(t, "escape"):
				for _, u := range utf16.Encode([]rune{r}) {
					fmt.Fprintf(&b, `\u%04x`, u)
				}
			default:
				b.WriteRune(r)
			}
		}
		b.WriteByte('"')
		return b.String()
	}
	kinds := 6
	if depth == 0 {
		kinds = 4
	}
	var s string
	switch rapid.IntRange(0, kinds-1).Draw(t, "kind") {
	case 0:
		s = text()
	case 1:
		s = rapid.StringMatching(`-?(0|[1-9][0-9]{0,3})(\.[0-9]{1,3})?([eE][+-]?[0-9]{1,2})?`).Draw(t, "number")
	case 2:
		s = rapid.SampledFrom([]string{"true", "false"}).Draw(t, "truth")
	case 3:
		s = "null"
	case 4:
		var items []string
		for range rapid.IntRange(0, 3).Draw(t, "items") {
			items = append(items, anyDocument(t, depth-1))
		}
		s = "[" + space() + strings.Join(items, ",") + "]"
	case 5:
		var items []string
		for range rapid.IntRange(0, 3).Draw(t, "members") {
			items = append(items, space()+text()+space()+":"+anyDocument(t, depth-1))
		}
		s = "{" + space() + strings.Join(items, ",") + "}"
	}
	return space() + s + space()
}

// Any document is read as the standard library reads it, is skipped whole, and
// is refused where a byte of it is missing at the end or one follows.
func TestLexerReadsAnyDocument(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		document := anyDocument(t, 4)
		x := New([]byte(document), 10)
		got := value(x)
		if !x.End() {
			t.Fatalf("%q: %v", document, x.Err())
		}
		d := json.NewDecoder(strings.NewReader(document))
		d.UseNumber()
		var want any
		if err := d.Decode(&want); err != nil || !reflect.DeepEqual(got, want) {
			t.Fatalf("%q is read as %v, want %v, %v", document, got, want, err)
		}
		y := New([]byte(document), 10)
		y.Skip()
		if !y.End() {
			t.Fatalf("%q cannot be skipped: %v", document, y.Err())
		}
		trimmed := strings.TrimRight(document, " \t\r\n")
		last := trimmed[len(trimmed)-1]
		if short := trimmed[:len(trimmed)-1]; last == '"' || last == ']' || last == '}' {
			if z := New([]byte(short), 10); value(z) != nil && z.End() {
				t.Fatalf("%q is accepted", short)
			}
		}
		if z := New([]byte(trimmed+"]"), 10); value(z) != nil && z.End() {
			t.Fatalf("%q is accepted", trimmed+"]")
		}
	})
}

// Reading does not change or keep what was read, but for texts without
// escapes, which lie in the document.
func TestTextLiesInTheDocument(t *testing.T) {
	document := []byte(`["plain", "esc\u0061ped"]`)
	x := New(document, 3)
	x.BeginArray()
	x.NextItem(true)
	plain, _ := x.Text()
	x.NextItem(false)
	escaped, _ := x.Text()
	if string(plain) != "plain" || string(escaped) != "escaped" {
		t.Fatalf("%q, %q", plain, escaped)
	}
	if &plain[0] != &document[2] {
		t.Error("a plain text was copied")
	}
	if n := testing.AllocsPerRun(50, func() {
		y := New(document, 3)
		y.BeginArray()
		y.NextItem(true)
		y.Text()
	}); n > 1 {
		t.Errorf("%v allocations to read a plain text", n)
	}
}

// The nesting that is allowed is allowed, in objects and lists alike.
func TestDepth(t *testing.T) {
	for depth := 1; depth < 6; depth++ {
		for _, pair := range [][2]string{{"[", "]"}, {`{"a":`, "}"}} {
			document := strings.Repeat(pair[0], depth) + "1" + strings.Repeat(pair[1], depth)
			for most := 1; most < 6; most++ {
				x := New([]byte(document), most)
				x.Skip()
				if ok := x.End(); ok != (depth <= most) {
					t.Errorf("%s with at most %d: accepted is %v", document, most, ok)
				}
			}
		}
	}
	// Side by side is not deep.
	x := New([]byte("["+strings.Repeat("[[]],", 50)+"[]]"), 3)
	x.Skip()
	if !x.End() {
		t.Error(x.Err())
	}
}

// A document of brackets alone is refused without a deep stack.
func TestHostileNesting(t *testing.T) {
	for _, text := range []string{strings.Repeat("[", 1<<20), strings.Repeat(`{"a":`, 1<<18),
		strings.Repeat("[{\"\":", 1<<18)} {
		x := New([]byte(text), 64)
		x.Skip()
		if x.End() || !strings.Contains(x.Err().Error(), "nested more than 64 deep") {
			t.Errorf("%.20s…: %v", text, x.Err())
		}
	}
}

func BenchmarkSkip(b *testing.B) {
	document := []byte("[" + strings.Repeat(`{"source": "SIM J0412+1833", "start": "2027-01-04T17:00:00Z", "minutes": 30.5, "counted": true},`, 1000) + "0]")
	b.SetBytes(int64(len(document)))
	for b.Loop() {
		x := New(document, 10)
		x.Skip()
		if !x.End() {
			b.Fatal(x.Err())
		}
	}
}
