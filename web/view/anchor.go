package view

import (
	"fmt"
	"strings"
)

// Anchor makes an element's id of what kind of thing it is and of a name that
// people chose, which may hold spaces and anything else: letters, digits and
// single dashes stay, other characters become their number between underscores.
// Different names never give the same anchor. It stands in addresses as it is.
func Anchor(kind, name string) string {
	var b strings.Builder
	b.WriteString(kind)
	b.WriteByte('-')
	for _, r := range name {
		if r == '-' || r >= '0' && r <= '9' || r >= 'a' && r <= 'z' || r >= 'A' && r <= 'Z' {
			b.WriteRune(r)
		} else {
			fmt.Fprintf(&b, "_%x_", r)
		}
	}
	return b.String()
}
