package scheduler

import (
	"math"
	"strconv"
	"strings"
	"time"
)

// How values are shown inside messages: short, and never able to break a line.

// quote shows text inside a message, cut where it is long.
func quote(s string) string {
	const most = 60
	if r := []rune(s); len(r) > most {
		s = string(r[:most]) + "…"
	}
	return strconv.Quote(s)
}

// brief shows a name inside a message without quotes, cut where it is long.
func brief(s string) string { return strings.Trim(quote(s), `"`) }

// few shows the first names of a list.
func few(names []string) string {
	const most = 8
	var b strings.Builder
	for i, n := range names {
		switch {
		case i == most:
			return b.String() + " and " + strconv.Itoa(len(names)-most) + " more"
		case i > 0:
			b.WriteString(", ")
		}
		b.WriteString(brief(n))
	}
	return b.String()
}

// orList is "a, b or c".
func orList(words []string) string {
	if len(words) < 2 {
		return strings.Join(words, "")
	}
	last := len(words) - 1
	return strings.Join(words[:last], ", ") + " or " + words[last]
}

// short is a number as a person writes it.
func short(v float64) string {
	if a := math.Abs(v); a >= 1e7 || a != 0 && a < 1e-4 {
		return strconv.FormatFloat(v, 'g', -1, 64)
	}
	return strconv.FormatFloat(v, 'f', -1, 64)
}

// instantText shows an instant inside a message.
func instantText(t time.Time) string { return t.UTC().Format("2006-01-02T15:04:05.999Z") }

// spanText shows a stretch of time inside a message.
func spanText(a, b time.Time) string { return instantText(a) + " to " + instantText(b) }
