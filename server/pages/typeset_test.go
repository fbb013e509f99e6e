package pages

import "testing"

func TestTypeset(t *testing.T) {
	for in, want := range map[string]string{
		"Never up in 5 blocks: 9.1 deg at the highest (block QDG-2026-W49-1 of QDG), and the limit there is 15.0 deg.": "Never up in 5 blocks: 9.1° at the highest (block QDG-2026-W49-1 of QDG), and the limit there is 15.0°.",
		"SIM J0142-1330 stands at -12.5 deg": "SIM J0142-1330 stands at \u221212.5°",
		"-3 deg and (-4 deg)":                "\u22123° and (\u22124°)",
		"5 degrees, 2 h - 3 h, deg":          "5 degrees, 2 h - 3 h, deg",
		"":                                   "",
	} {
		if got := typeset(in); got != want {
			t.Errorf("%q becomes %q, want %q", in, got, want)
		}
	}
}
