package static

import (
	"math"
	"regexp"
	"strconv"
	"strings"
	"testing"
)

// colours reads the custom properties of the first rule after a marker.
func colours(t *testing.T, css, marker string) map[string][3]float64 {
	t.Helper()
	_, rest, ok := strings.Cut(css, marker)
	if !ok {
		t.Fatalf("no rule %q", marker)
	}
	rule, _, _ := strings.Cut(rest, "}")
	out := map[string][3]float64{}
	for _, m := range regexp.MustCompile(`--([a-z-]+): #([0-9a-f]{6});`).FindAllStringSubmatch(rule, -1) {
		v, err := strconv.ParseUint(m[2], 16, 32)
		if err != nil {
			t.Fatal(err)
		}
		out[m[1]] = [3]float64{float64(v >> 16), float64(v >> 8 & 255), float64(v & 255)}
	}
	return out
}

// luminance is the relative luminance of WCAG 2.2.
func luminance(c [3]float64) float64 {
	lin := func(v float64) float64 {
		if v /= 255; v <= 0.04045 {
			return v / 12.92
		} else {
			return math.Pow((v+0.055)/1.055, 2.4)
		}
	}
	return 0.2126*lin(c[0]) + 0.7152*lin(c[1]) + 0.0722*lin(c[2])
}

// contrast is the contrast ratio of WCAG 2.2, 1 to 21.
func contrast(a, b [3]float64) float64 {
	x, y := luminance(a), luminance(b)
	return (max(x, y) + 0.05) / (min(x, y) + 0.05)
}

// TestContrastItself checks the formula against its two fixed points: black on
// white is 21:1 by definition, and #767676 on white is known as the lightest
// grey above 4.5:1.
func TestContrastItself(t *testing.T) {
	white := [3]float64{255, 255, 255}
	if got := contrast([3]float64{}, white); math.Abs(got-21) > 1e-9 {
		t.Errorf("black on white %v, want 21", got)
	}
	if at, over := contrast([3]float64{118, 118, 118}, white), contrast([3]float64{119, 119, 119}, white); at < 4.5 || over >= 4.5 {
		t.Errorf("greys %v and %v, want 4.5 between", at, over)
	}
}

func TestColoursCanBeRead(t *testing.T) {
	b, err := files.ReadFile("files/tokens.css")
	if err != nil {
		t.Fatal(err)
	}
	css := string(b)
	themes := map[string]map[string][3]float64{
		"light":       colours(t, css, ":root {"),
		"dark":        colours(t, css, `:root:not([data-theme="light"]) {`),
		"dark chosen": colours(t, css, `:root[data-theme="dark"] {`),
	}
	// Text on the grounds that it stands on.
	pairs := map[string][]string{
		"ink":        {"ground", "paper", "raised", "lane", "night", "allowed", "bar", "bar-done", "bar-lost", "accent-tint", "good-tint", "caution-tint", "wrong-tint"},
		"soft":       {"ground", "paper", "raised", "lane"},
		"link":       {"ground", "paper", "raised", "accent-tint"},
		"accent-ink": {"accent"},
		"accent":     {"raised"},
		"margin":     {"paper", "lane"},
		"good":       {"raised", "paper"},
		"caution":    {"raised", "paper"},
		"wrong":      {"raised", "paper"},
		"curve":      {"lane"},
	}
	for name, c := range themes {
		for text, grounds := range pairs {
			for _, ground := range grounds {
				a, okA := c[text]
				b, okB := c[ground]
				if !okA || !okB {
					t.Errorf("%s: no colour %s or %s", name, text, ground)
					continue
				}
				if got := contrast(a, b); got < 4.5 {
					t.Errorf("%s: %s on %s has %.2f:1, want 4.5:1", name, text, ground, got)
				}
			}
		}
	}
	for key, v := range themes["dark"] {
		if themes["dark chosen"][key] != v {
			t.Errorf("%s differs between the system's dark and the chosen dark", key)
		}
	}
}
