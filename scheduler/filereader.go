package scheduler

import (
	"strconv"
	"strings"

	"cadencewright/scheduler/internal/strictjson"
)

// checker walks the values of a campaign or plan, knows its place, and gathers
// problems.
type checker struct {
	reporter
	path []step
}

// step is one step from a value into its parts.
type step struct {
	key   string
	index int // used where isKey is false
	isKey bool
}

func (c *checker) enterKey(key string) { c.path = append(c.path, step{key: key, isKey: true}) }
func (c *checker) enterIndex(i int)    { c.path = append(c.path, step{index: i}) }
func (c *checker) leave()              { c.path = c.path[:len(c.path)-1] }

// pointer is the present place as a JSON Pointer.
func (c *checker) pointer() string {
	var b strings.Builder
	for _, s := range c.path {
		b.WriteByte('/')
		if s.isKey {
			b.WriteString(pointerEscaper.Replace(s.key))
		} else {
			b.WriteString(strconv.Itoa(s.index))
		}
	}
	return b.String()
}

// name is the present place as a person would name it: the key, and the index
// where the place is an item of a list.
func (c *checker) name() string {
	if len(c.path) == 0 {
		return "the file"
	}
	n := len(c.path) - 1
	tail := ""
	for ; n > 0 && !c.path[n].isKey; n-- {
		tail = "[" + strconv.Itoa(c.path[n].index) + "]" + tail
	}
	return c.path[n].key + tail
}

// bad reports a problem at the present place.
func (c *checker) bad(format string, args ...any) {
	if c.full() {
		c.more++
		return
	}
	c.add(c.pointer(), format, args...)
}

// fileReader is a checker that takes its values from a file.
type fileReader struct {
	checker
	lex   *strictjson.Lexer
	names map[string]string // strings seen, see intern
	// brokenAt is the place where the file stopped being JSON.
	brokenAt string
	broken   bool
	// wrongFormat says that the file is of another format: then nothing else
	// that is wrong with it means anything.
	wrongFormat *Problem
}

// leave goes back out of a value; on the way out of broken JSON the innermost
// place is kept.
func (r *fileReader) leave() {
	if !r.broken && r.lex.Err() != nil {
		r.broken = true
		r.brokenAt = r.pointer()
	}
	r.checker.leave()
}

// expect reports a value of another kind and passes over it; want is the wanted
// kind as a person would say it.
func (r *fileReader) expect(k strictjson.Kind, want string) bool {
	got := r.lex.Kind()
	if got == k {
		return true
	}
	if got == strictjson.Invalid {
		return false
	}
	raw := r.lex.Skip()
	if r.lex.Err() != nil {
		return false
	}
	shown := got.String()
	switch got {
	case strictjson.String, strictjson.Number, strictjson.Bool, strictjson.NotFinite:
		if len(raw) > 60 {
			raw = append(append([]byte(nil), raw[:60]...), "…"...)
		}
		shown = string(raw)
		if got == strictjson.String {
			shown = "the string " + shown
		}
	}
	r.bad("%s must be %s, not %s", r.name(), want, shown)
	return false
}

// expectObject reports anything but an object.
func (r *fileReader) expectObject() bool { return r.expect(strictjson.Object, "an object") }

// list reads a list item by item: each call of item must consume one value.
// After most items it reports the list as too long and passes over the rest.
func (r *fileReader) list(want string, most int, item func(i int)) bool {
	if !r.expect(strictjson.Array, want) {
		return false
	}
	r.lex.BeginArray()
	n := 0
	for first := true; r.lex.NextItem(first); first = false {
		if n < most {
			r.enterIndex(n)
			item(n)
			r.leave()
		} else {
			r.lex.Skip()
		}
		n++
	}
	if n > most && r.lex.Err() == nil {
		r.bad("%s holds %d items; at most %d are allowed", r.name(), n, most)
		return false
	}
	return r.lex.Err() == nil
}

// number reads one number; ok is false, with the problem reported, where there
// is none that a computer can hold.
func (r *fileReader) number() (v float64, ok bool) {
	if !r.expect(strictjson.Number, "a finite number") {
		return 0, false
	}
	raw, ok := r.lex.Number()
	if !ok {
		return 0, false
	}
	v, err := strconv.ParseFloat(string(raw), 64)
	if err != nil {
		r.bad("%s must be a finite number; %.40s is too large to hold", r.name(), raw)
		return 0, false
	}
	return v + 0, true // -0 becomes 0
}

// text reads one string; want is what it stands for, for messages.
func (r *fileReader) text(want string) (string, bool) {
	if !r.expect(strictjson.String, want) {
		return "", false
	}
	b, ok := r.lex.Text()
	if !ok {
		return "", false
	}
	return r.intern(b), true
}

// intern makes a string of bytes, one and the same for all that are equal: a
// long history names few sources many times.
func (r *fileReader) intern(b []byte) string {
	const mostNames, longest = 50000, 64
	if s, ok := r.names[string(b)]; ok {
		return s
	}
	s := string(b)
	if len(s) <= longest && len(r.names) < mostNames {
		if r.names == nil {
			r.names = map[string]string{}
		}
		r.names[s] = s
	}
	return s
}

// suggest proposes the name that was probably meant, as an end of a sentence,
// or nothing.
func (r *reporter) suggest(got string, names []string) string {
	if len(r.found) >= MaxProblems || len(got) > 100 {
		return "" // the message will not be shown
	}
	best, bestAt := "", 3 // up to two slips of the hand
	if len(got) <= 3 {
		bestAt = 2
	}
	for _, n := range names {
		if d := editDistance(got, n, bestAt); d < bestAt {
			best, bestAt = n, d
		}
	}
	if best == "" {
		// A name without its unit, "elevation_min" for "elevation_min_deg".
		for _, n := range names {
			if len(got) >= 3 && strings.HasPrefix(n, got+"_") {
				best = n
				break
			}
		}
	}
	if best == "" {
		return ""
	}
	return "; did you mean " + quote(best) + "?"
}

// editDistance is the number of bytes to insert, drop or change to make b of
// a, or a number not below most.
func editDistance(a, b string, most int) int {
	if len(a)-len(b) >= most || len(b)-len(a) >= most {
		return most
	}
	row := make([]int, len(b)+1)
	for j := range row {
		row[j] = j
	}
	for i := 1; i <= len(a); i++ {
		diagonal := row[0]
		row[0] = i
		least := i
		for j := 1; j <= len(b); j++ {
			d := diagonal
			if a[i-1] != b[j-1] {
				d = 1 + min(diagonal, row[j], row[j-1])
			}
			diagonal, row[j] = row[j], d
			least = min(least, d)
		}
		if least >= most {
			return most
		}
	}
	return row[len(b)]
}
