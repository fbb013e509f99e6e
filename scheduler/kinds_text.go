package scheduler

import (
	"strconv"
	"strings"
	"time"
	"unicode"
	"unicode/utf8"

	"cadencewright/scheduler/internal/strictjson"
)

// text is a string of one line.
type text struct {
	empty bool // may be empty
	most  int  // characters; 0: MaxTextLength
	lines bool // may hold line breaks
}

func (k text) reset(to any) { *to.(*string) = "" }

func (k text) read(r *fileReader, to any) {
	if v, ok := r.text("a string"); ok {
		*to.(*string) = v
		k.check(&r.checker, to)
	}
}

// limit is the most characters.
func (k text) limit() int {
	if k.most > 0 {
		return k.most
	}
	return MaxTextLength
}

// check counts characters, not bytes, and tells of one fault at a time.
func (k text) check(c *checker, from any) {
	v := *from.(*string)
	switch {
	case v == "" && !k.empty:
		c.bad("%s is empty; it must hold at least one character", c.name())
	case !utf8.ValidString(v):
		c.bad("%s is not valid UTF-8", c.name())
	case len(v) > k.limit() && utf8.RuneCountInString(v) > k.limit():
		c.bad("%s is %d characters long; at most %d are allowed", c.name(), utf8.RuneCountInString(v), k.limit())
	case strings.IndexFunc(v, k.isControl) >= 0:
		c.bad("%s is %s; it must not hold control characters", c.name(), quote(v))
	}
}

// isControl reports a character that has no place in a name: it would show as
// nothing, or break a line of a table.
func (k text) isControl(r rune) bool { return unicode.IsControl(r) && (!k.lines || r != '\n') }

func (k text) isDefault(from any) bool { return *from.(*string) == "" }

func (k text) write(w *writer, from any) { w.text(*from.(*string)) }

func (k text) schema() map[string]any {
	s := map[string]any{"type": "string", "maxLength": k.limit()}
	if !k.empty {
		s["minLength"] = 1
	}
	return s
}

// choice is one of a few words.
type choice []string

func (k choice) reset(to any) { *to.(*string) = "" }

func (k choice) read(r *fileReader, to any) {
	if v, ok := r.text(orList(k)); ok {
		*to.(*string) = v
		k.check(&r.checker, to)
	}
}

// check lists the words, and guesses at the one that was meant.
func (k choice) check(c *checker, from any) {
	if v := *from.(*string); !contains(k, v) {
		c.bad("%s is %s; it must be %s%s", c.name(), quote(v), orList(k), c.suggest(v, k))
	}
}

func (k choice) isDefault(from any) bool { return *from.(*string) == "" }

func (k choice) write(w *writer, from any) { w.text(*from.(*string)) }

func (k choice) schema() map[string]any {
	return map[string]any{"type": "string", "enum": []string(k)}
}

// literal is the format name that a file starts with; it has no Go field.
type literal string

func (k literal) reset(any) {}

// read keeps a wrong format apart from other problems: see wrongFormat.
func (k literal) read(r *fileReader, _ any) {
	at := r.pointer()
	v, ok := r.text("a string")
	if r.lex.Err() != nil || ok && v == string(k) {
		return
	}
	message := "format must be " + quote(string(k))
	if ok {
		message = "format is " + quote(v) + "; it must be " + quote(string(k))
		switch v {
		case CampaignFormat:
			message += ": this file is a campaign"
		case PlanFormat:
			message += ": this file is a plan"
		}
	}
	r.wrongFormat = &Problem{at, message}
}

func (k literal) check(*checker, any)    {}
func (k literal) isDefault(any) bool     { return false }
func (k literal) write(w *writer, _ any) { w.text(string(k)) }
func (k literal) schema() map[string]any { return map[string]any{"const": string(k)} }

// truth is true or false.
type truth struct{}

func (k truth) reset(to any) { *to.(*bool) = false }

func (k truth) read(r *fileReader, to any) {
	if r.expect(strictjson.Bool, "true or false") {
		*to.(*bool), _ = r.lex.Bool()
	}
}

func (k truth) check(*checker, any)     {}
func (k truth) isDefault(from any) bool { return !*from.(*bool) }

func (k truth) write(w *writer, from any) { w.b = strconv.AppendBool(w.b, *from.(*bool)) }

func (k truth) schema() map[string]any { return map[string]any{"type": "boolean"} }

// instant is a moment in UTC: RFC 3339 with Z, kept to the millisecond.
type instant struct{}

const instantWanted = "an instant in UTC such as 2027-01-18T06:30:00Z (RFC 3339, with Z)"

func (k instant) reset(to any) { *to.(*time.Time) = time.Time{} }

func (k instant) read(r *fileReader, to any) {
	v, ok := r.text(instantWanted)
	if !ok {
		return
	}
	t, ok := parseInstant(v)
	if !ok {
		r.bad("%s is %s; it must be %s", r.name(), quote(v), instantWanted)
		return
	}
	*to.(*time.Time) = t
	k.check(&r.checker, to)
}

// check keeps to the years in which the time scales are known.
func (k instant) check(c *checker, from any) {
	t := *from.(*time.Time)
	switch {
	case t.IsZero():
		c.bad("%s is not set; it must be %s", c.name(), instantWanted)
	case t.Before(FirstInstant) || !t.Before(EndInstant):
		c.bad("%s is %s; it must lie in the years %d to %d", c.name(), t.UTC().Format("2006-01-02T15:04:05Z"),
			FirstInstant.Year(), EndInstant.Year()-1)
	}
}

func (k instant) isDefault(from any) bool { return from.(*time.Time).IsZero() }

func (k instant) write(w *writer, from any) { w.instant(*from.(*time.Time)) }

// instantPattern is the pattern of RFC 3339 with Z.
const instantPattern = `^\d{4}-\d{2}-\d{2}T\d{2}:\d{2}:\d{2}(\.\d+)?Z$`

func (k instant) schema() map[string]any {
	return map[string]any{"type": "string", "format": "date-time", "pattern": instantPattern}
}

// parseInstant reads RFC 3339 with Z alone, rounded to the millisecond. A leap
// second is refused: the planning model counts days of 86400 s.
func parseInstant(s string) (time.Time, bool) {
	// time.Parse also takes a comma for the point and hours of one digit.
	if len(s) < len("2006-01-02T15:04:05Z") || s[len(s)-1] != 'Z' || s[10] != 'T' || s[13] != ':' {
		return time.Time{}, false
	}
	if fraction := s[19 : len(s)-1]; fraction != "" {
		if fraction[0] != '.' || len(fraction) < 2 || strings.Trim(fraction[1:], "0123456789") != "" {
			return time.Time{}, false
		}
		if len(fraction) > 10 { // nanoseconds are more than is kept
			s = s[:19+10] + "Z"
		}
	}
	t, err := time.Parse(time.RFC3339Nano, s)
	if err != nil {
		return time.Time{}, false
	}
	return t.UTC().Round(time.Millisecond), true
}
