// Package strictjson reads JSON (RFC 8259) one token at a time for readers
// that must tell people exactly what is wrong and where. Beyond what the
// standard library's decoder offers it lets its caller see a key that stands
// twice, passes over NaN and Infinity as values of their own kind (so that
// everything wrong with a file can be reported together), refuses text that is
// not valid UTF-8 instead of altering it, and says line and column of a syntax
// error.
//
// The caller walks the document: Kind looks at the next value, BeginObject,
// NextKey, BeginArray, NextItem, Text, Number, Bool, Null and Skip consume.
// The first syntax error sticks: from then on everything answers false or
// zero, and Err tells what it was.
package strictjson

import (
	"bytes"
	"fmt"
)

// Kind is the kind of a value.
type Kind byte

// The kinds of value.
const (
	Invalid   Kind = iota // no value can start here, or the input is over
	Object                // {…}
	Array                 // […]
	String                // "…"
	Number                // finite in its writing; may still be too large
	Bool                  // true or false
	Null                  // null
	NotFinite             // NaN, Infinity and the like, which JSON does not have
)

// String names the kind as a person would.
func (k Kind) String() string {
	return [...]string{"nothing", "an object", "a list", "a string", "a number",
		"true or false", "null", "not a finite number"}[k]
}

// Lexer reads one document. The zero value is an empty one; use New.
type Lexer struct {
	data  []byte
	pos   int
	err   error
	depth int
	max   int
}

// New is a lexer at the start of data, which it does not change or copy.
// Nesting deeper than maxDepth is an error.
func New(data []byte, maxDepth int) *Lexer { return &Lexer{data: data, max: maxDepth} }

// SyntaxError says why a document is not JSON.
type SyntaxError struct {
	Line, Column int // from 1; the column counts bytes
	Message      string
}

// Error is the message with its place.
func (e *SyntaxError) Error() string {
	return fmt.Sprintf("not valid JSON at line %d, column %d: %s", e.Line, e.Column, e.Message)
}

// Err is the first syntax error, or nil.
func (x *Lexer) Err() error { return x.err }

// fail notes a syntax error at the place pos.
func (x *Lexer) fail(pos int, format string, args ...any) {
	if x.err != nil {
		return
	}
	// Counted only now: lines cost nothing while all goes well.
	before := x.data[:min(pos, len(x.data))]
	line := bytes.Count(before, []byte{'\n'}) + 1
	column := len(before) - (bytes.LastIndexByte(before, '\n') + 1) + 1
	x.err = &SyntaxError{Line: line, Column: column, Message: fmt.Sprintf(format, args...)}
}

// space passes over white space.
func (x *Lexer) space() {
	for x.pos < len(x.data) {
		switch x.data[x.pos] {
		case ' ', '\t', '\n', '\r':
			x.pos++
		default:
			return
		}
	}
}

// peek is the next byte that is not white space, or 0 at the end.
func (x *Lexer) peek() byte {
	x.space()
	if x.pos < len(x.data) {
		return x.data[x.pos]
	}
	return 0
}

// Kind is the kind of the next value, which it does not consume. Where no
// value can start it notes a syntax error.
func (x *Lexer) Kind() Kind {
	if x.err != nil {
		return Invalid
	}
	switch c := x.peek(); {
	case c == '{':
		return Object
	case c == '[':
		return Array
	case c == '"':
		return String
	case x.notFinite() > 0:
		return NotFinite
	case c == '-' || c >= '0' && c <= '9':
		return Number
	case x.word("true") || x.word("false"):
		return Bool
	case x.word("null"):
		return Null
	}
	x.fail(x.pos, "a value is expected here, not %s", x.found())
	return Invalid
}

// found describes what stands at the present place.
func (x *Lexer) found() string {
	if x.pos >= len(x.data) {
		return "the end of the file"
	}
	if c := x.data[x.pos]; c > ' ' && c < 0x7f {
		return fmt.Sprintf("%q", rune(c))
	}
	return fmt.Sprintf("byte 0x%02X", x.data[x.pos])
}

// word reports whether the given word stands at the present place.
func (x *Lexer) word(w string) bool { return bytes.HasPrefix(x.data[x.pos:], []byte(w)) }

// notFiniteWords are ways in which programs write values that JSON lacks.
var notFiniteWords = []string{"NaN", "nan", "Infinity", "-Infinity", "-NaN", "Inf", "-Inf", "inf", "-inf"}

// notFinite is the length of such a word at the present place, or 0.
func (x *Lexer) notFinite() int {
	rest := x.data[min(x.pos, len(x.data)):]
	if len(rest) < 3 || rest[0] >= '0' && rest[0] <= '9' || rest[0] == '-' && rest[1] >= '0' && rest[1] <= '9' {
		return 0
	}
	longest := 0
	for _, w := range notFiniteWords {
		if len(w) > longest && x.word(w) {
			longest = len(w)
		}
	}
	return longest
}

// open enters an object or list.
func (x *Lexer) open(c byte, what string) bool {
	if x.err != nil {
		return false
	}
	if x.peek() != c {
		x.fail(x.pos, "%s is expected here, not %s", what, x.found())
		return false
	}
	if x.depth >= x.max {
		x.fail(x.pos, "nested more than %d deep", x.max)
		return false
	}
	x.depth++
	x.pos++
	return true
}

// BeginObject enters an object; call NextKey until it answers false.
func (x *Lexer) BeginObject() bool { return x.open('{', "an object") }

// BeginArray enters a list; call NextItem until it answers false.
func (x *Lexer) BeginArray() bool { return x.open('[', "a list") }

// next goes to the next member of an object or list that ends with end; first
// is true for its first member.
//
// A comma must stand between members and may not follow the last.
func (x *Lexer) next(first bool, end byte) bool {
	if x.err != nil {
		return false
	}
	c := x.peek()
	if c == end {
		x.pos++
		x.depth--
		return false
	}
	if first {
		return true
	}
	if c != ',' {
		x.fail(x.pos, "a comma or %q is expected here, not %s", rune(end), x.found())
		return false
	}
	x.pos++
	if x.peek() == end {
		x.fail(x.pos, "a comma before %q", rune(end))
		return false
	}
	return true
}

// NextItem goes to the next item of a list, whose value the caller must then
// consume. first is true for the first call after BeginArray. It answers false
// after the last item, with the list left.
func (x *Lexer) NextItem(first bool) bool { return x.next(first, ']') }

// NextKey reads the next key of an object; the caller must then consume the
// value. The bytes are valid until the next call. first is true for the first
// call after BeginObject. It answers false after the last key, with the object
// left.
func (x *Lexer) NextKey(first bool) ([]byte, bool) {
	if !x.next(first, '}') {
		return nil, false
	}
	if x.peek() != '"' {
		x.fail(x.pos, "a key in double quotes is expected here, not %s", x.found())
		return nil, false
	}
	key, ok := x.text()
	if !ok {
		return nil, false
	}
	if x.peek() != ':' {
		x.fail(x.pos, "a colon is expected after the key %q, not %s", key, x.found())
		return nil, false
	}
	x.pos++
	return key, true
}

// End checks that nothing but white space is left.
func (x *Lexer) End() bool {
	if x.err != nil {
		return false
	}
	x.space()
	if x.pos < len(x.data) {
		x.fail(x.pos, "the document is over, but %s follows", x.found())
		return false
	}
	return true
}
