package pages

import "regexp"

// typeset gives plain text of the planner the signs that pages use: a degree
// sign for deg, and a minus sign where a figure is negative. Names that hold
// a hyphen stay as they are.
func typeset(s string) string {
	s = degrees.ReplaceAllString(s, "$1°")
	return negative.ReplaceAllString(s, "${1}\u2212$2")
}

var (
	degrees  = regexp.MustCompile(`(\d) deg\b`)
	negative = regexp.MustCompile(`(^|[\s(])-(\d)`)
)
