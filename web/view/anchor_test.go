package view_test

import (
	"net/url"
	"regexp"
	"testing"

	"cadencewright/web/view"

	"pgregory.net/rapid"
)

func TestAnchor(t *testing.T) {
	for name, want := range map[string]string{
		"B001": "block-B001", "QDG-2026-W49-1": "block-QDG-2026-W49-1", "late night 2": "block-late_20_night_20_2", "a_b": "block-a_5f_b", "ø#%": "block-_f8__23__25_",
	} {
		if got := view.Anchor("block", name); got != want {
			t.Errorf("anchor of %q is %q, want %q", name, got, want)
		}
	}
}

// Whatever people call a block: the anchor is one word that an address can hold
// as it is, and no two names share it.
func TestAnchorsAreWords(t *testing.T) {
	word := regexp.MustCompile(`^block-[A-Za-z0-9_-]*$`)
	rapid.Check(t, func(t *rapid.T) {
		a, b := rapid.String().Draw(t, "a"), rapid.String().Draw(t, "b")
		x, y := view.Anchor("block", a), view.Anchor("block", b)
		if !word.MatchString(x) || url.PathEscape(x) != x {
			t.Errorf("anchor of %q is %q", a, x)
		}
		if (x == y) != (a == b) {
			t.Errorf("%q and %q give %q and %q", a, b, x, y)
		}
	})
}
