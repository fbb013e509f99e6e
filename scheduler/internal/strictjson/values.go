package strictjson

import (
	"bytes"
	"unicode/utf16"
	"unicode/utf8"
)

// Text reads a string. The bytes are valid until the next call.
func (x *Lexer) Text() ([]byte, bool) {
	if x.Kind() != String {
		x.fail(x.pos, "a string is expected here, not %s", x.found())
		return nil, false
	}
	return x.text()
}

// text reads a string at the present place. The bytes lie in the document
// where the string has no escapes.
func (x *Lexer) text() ([]byte, bool) {
	start := x.pos + 1
	ascii := true
	for i := start; i < len(x.data); i++ {
		switch c := x.data[i]; {
		case c == '"':
			b := x.data[start:i]
			if !ascii && !utf8.Valid(b) {
				x.fail(start, "text that is not valid UTF-8")
				return nil, false
			}
			x.pos = i + 1
			return b, true
		case c == '\\':
			return x.escaped(start)
		case c < ' ':
			x.fail(i, "a control character (byte 0x%02X) inside a string; escape it or leave it out", c)
			return nil, false
		case c >= utf8.RuneSelf:
			ascii = false
		}
	}
	x.fail(start-1, "a string that does not end")
	return nil, false
}

// escaped reads a string that has escapes, from its first byte on, into bytes of
// its own.
func (x *Lexer) escaped(start int) ([]byte, bool) {
	var out []byte
	for i := start; i < len(x.data); {
		switch c := x.data[i]; {
		case c == '"':
			if !utf8.Valid(out) {
				x.fail(start, "text that is not valid UTF-8")
				return nil, false
			}
			x.pos = i + 1
			return out, true
		case c < ' ':
			x.fail(i, "a control character (byte 0x%02X) inside a string; escape it or leave it out", c)
			return nil, false
		case c == '\\':
			var ok bool
			if out, i, ok = x.escape(out, i); !ok {
				return nil, false
			}
		default:
			out = append(out, c)
			i++
		}
	}
	x.fail(start-1, "a string that does not end")
	return nil, false
}

// plainEscapes are the characters that may follow a backslash, but for u.
var plainEscapes = map[byte]byte{'"': '"', '\\': '\\', '/': '/', 'b': '\b', 'f': '\f', 'n': '\n', 'r': '\r', 't': '\t'}

// escape reads the escape at i and appends what it stands for; it returns the
// place after it.
func (x *Lexer) escape(out []byte, i int) ([]byte, int, bool) {
	if i+1 >= len(x.data) {
		x.fail(i, "a string that does not end")
		return nil, 0, false
	}
	if c, ok := plainEscapes[x.data[i+1]]; ok {
		return append(out, c), i + 2, true
	}
	r := x.hex(i)
	if r < 0 {
		x.fail(i, "an escape that JSON does not have; write a backslash as \\\\")
		return nil, 0, false
	}
	// Characters beyond 16 bits are written as two escapes, a surrogate pair.
	if !utf16.IsSurrogate(r) {
		return utf8.AppendRune(out, r), i + 6, true
	}
	if full := utf16.DecodeRune(r, x.hex(i+6)); full != utf8.RuneError {
		return utf8.AppendRune(out, full), i + 12, true
	}
	x.fail(i, "half of a surrogate pair, which is no character")
	return nil, 0, false
}

// hex is the value of a \uXXXX at i, or -1.
func (x *Lexer) hex(i int) rune {
	if i+6 > len(x.data) || x.data[i] != '\\' || x.data[i+1] != 'u' {
		return -1
	}
	var r rune
	for _, c := range x.data[i+2 : i+6] {
		switch {
		case c >= '0' && c <= '9':
			c -= '0'
		case c >= 'a' && c <= 'f':
			c -= 'a' - 10
		case c >= 'A' && c <= 'F':
			c -= 'A' - 10
		default:
			return -1
		}
		r = r<<4 | rune(c)
	}
	return r
}

// digits is the place after the digits that start at i.
func (x *Lexer) digits(i int) int {
	for i < len(x.data) && x.data[i] >= '0' && x.data[i] <= '9' {
		i++
	}
	return i
}

// Number reads a number and returns it as it is written. It may lie outside
// what a float64 can hold.
func (x *Lexer) Number() ([]byte, bool) {
	if x.Kind() != Number {
		x.fail(x.pos, "a number is expected here, not %s", x.found())
		return nil, false
	}
	start, i := x.pos, x.pos
	// The grammar of RFC 8259: no plus sign, no leading zero, digits on both
	// sides of the point.
	if x.data[i] == '-' {
		i++
	}
	whole := x.digits(i)
	bad := whole == i || whole > i+1 && x.data[i] == '0'
	i = whole
	if i < len(x.data) && x.data[i] == '.' {
		end := x.digits(i + 1)
		bad = bad || end == i+1
		i = end
	}
	if i < len(x.data) && (x.data[i] == 'e' || x.data[i] == 'E') {
		i++
		if i < len(x.data) && (x.data[i] == '+' || x.data[i] == '-') {
			i++
		}
		end := x.digits(i)
		bad = bad || end == i
		i = end
	}
	if bad {
		x.fail(start, "%q is not how JSON writes a number", x.data[start:min(i+1, len(x.data), start+40)])
		return nil, false
	}
	x.pos = i
	return x.data[start:i], true
}

// Bool reads true or false.
func (x *Lexer) Bool() (value, ok bool) {
	if x.Kind() != Bool {
		x.fail(x.pos, "true or false is expected here, not %s", x.found())
		return false, false
	}
	if x.word("true") {
		x.pos += len("true")
		return true, true
	}
	x.pos += len("false")
	return false, true
}

// Null reads null.
func (x *Lexer) Null() bool {
	if x.Kind() != Null {
		x.fail(x.pos, "null is expected here, not %s", x.found())
		return false
	}
	x.pos += len("null")
	return true
}

// Skip passes over the next value, whatever it is, and returns the bytes of a
// value that is not an object or list, as written.
func (x *Lexer) Skip() []byte {
	kind := x.Kind()
	start := x.pos
	switch kind {
	case Object:
		x.BeginObject()
		for first := true; ; first = false {
			if _, ok := x.NextKey(first); !ok {
				return nil
			}
			x.Skip()
		}
	case Array:
		x.BeginArray()
		for first := true; x.NextItem(first); first = false {
			x.Skip()
		}
		return nil
	case String:
		x.text()
	case Number:
		x.Number()
	case Bool:
		x.Bool()
	case Null:
		x.Null()
	case NotFinite:
		x.pos += x.notFinite()
	}
	if x.err != nil {
		return nil
	}
	return bytes.TrimSpace(x.data[start:x.pos])
}
