package scheduler

import (
	"fmt"
	"math"
	"strconv"
	"time"
	"unicode/utf8"
)

// writer appends JSON in its one canonical form.
type writer struct {
	b     []byte
	depth int // of lists written a line an item
	err   error
}

func (w *writer) raw(s string) { w.b = append(w.b, s...) }

// line starts a new line at the present depth.
func (w *writer) line() {
	w.b = append(w.b, '\n')
	for range w.depth {
		w.b = append(w.b, ' ')
	}
}

// number writes the shortest decimal that reads back as the same float64.
func (w *writer) number(v float64) {
	if math.IsNaN(v) || math.IsInf(v, 0) {
		w.fail("%v is not a finite number and cannot be written", v)
		return
	}
	if v == 0 {
		v = 0 // -0 is written as 0
	}
	// Very small and very large numbers are short only with an exponent.
	format := byte('f')
	if a := math.Abs(v); a != 0 && (a < 1e-6 || a >= 1e15) {
		format = 'e'
	}
	start := len(w.b)
	w.b = strconv.AppendFloat(w.b, v, format, -1, 64)
	// 1e-09 as 1e-9.
	if n := len(w.b); format == 'e' && n-start >= 4 && w.b[n-4] == 'e' && w.b[n-2] == '0' {
		w.b[n-2] = w.b[n-1]
		w.b = w.b[:n-1]
	}
}

// instant writes RFC 3339 with Z, to the millisecond, without needless digits.
func (w *writer) instant(t time.Time) {
	t = t.UTC().Round(time.Millisecond)
	if t.Before(FirstInstant) || !t.Before(EndInstant) {
		w.fail("the instant %s is outside the years %d to %d", t.Format(time.RFC3339), FirstInstant.Year(), EndInstant.Year()-1)
		return
	}
	w.b = append(w.b, '"')
	w.b = t.AppendFormat(w.b, "2006-01-02T15:04:05.999Z")
	w.b = append(w.b, '"')
}

// text writes a string. Only what JSON demands is escaped.
func (w *writer) text(s string) {
	if !utf8.ValidString(s) {
		w.fail("the text %q is not valid UTF-8 and cannot be written", s)
		return
	}
	w.b = append(w.b, '"')
	for i := 0; i < len(s); i++ {
		switch c := s[i]; {
		case c == '"' || c == '\\':
			w.b = append(w.b, '\\', c)
		case c < ' ':
			w.b = append(w.b, fmt.Sprintf("\\u%04x", c)...)
		default:
			w.b = append(w.b, c)
		}
	}
	w.b = append(w.b, '"')
}

// fail keeps the first error.
func (w *writer) fail(format string, args ...any) {
	if w.err == nil {
		w.err = Errorf(ErrInvalid, format, args...)
	}
}
