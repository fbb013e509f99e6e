package main

import (
	"errors"
	"math"
	"testing"
	"time"

	"pgregory.net/rapid"
)

func isUsage(err error) bool {
	var u usageError
	return errors.As(err, &u)
}

func TestParseInstant(t *testing.T) {
	now := time.Date(2027, 1, 18, 20, 31, 42, 5, time.FixedZone("ahead", 3600))
	good := map[string]string{
		"now":                       "2027-01-18T19:31:00Z",
		"2027-01-18":                "2027-01-18T00:00:00Z",
		"2027-01-18T20:30Z":         "2027-01-18T20:30:00Z",
		"2027-01-18T20:30":          "2027-01-18T20:30:00Z",
		"2027-01-18 20:30":          "2027-01-18T20:30:00Z",
		"2027-01-18 20:30:05":       "2027-01-18T20:30:05Z",
		"2027-01-18T20:30:05.25Z":   "2027-01-18T20:30:05.25Z",
		"2027-01-18T20:30:00+09:00": "2027-01-18T11:30:00Z",
	}
	for text, want := range good {
		got, err := parseInstant("from", text, now)
		if err != nil || got.Format(time.RFC3339Nano) != want {
			t.Errorf("%q: got %v, %v; want %s", text, got, err, want)
		}
	}
	for _, text := range []string{"", "yesterday", "2027-13-01", "18.1.2027", "2027-W03", "1971-12-31", "2100-01-01"} {
		if got, err := parseInstant("from", text, now); !isUsage(err) {
			t.Errorf("%q: got %v, %v; want a usage error", text, got, err)
		}
	}
}

func TestParseSpan(t *testing.T) {
	for text, want := range map[string]time.Duration{"90m": 90 * time.Minute, "1h30m": 90 * time.Minute, "7d": 168 * time.Hour, "0.5d": 12 * time.Hour} {
		if got, err := parseSpan("for", text); err != nil || got != want {
			t.Errorf("%q: got %v, %v", text, got, err)
		}
	}
	for _, text := range []string{"", "d", "7", "-1h", "0h", "0d", "NaNd", "1e9d", "week", "3 d"} {
		if got, err := parseSpan("for", text); !isUsage(err) {
			t.Errorf("%q: got %v, %v; want a usage error", text, got, err)
		}
	}
}

func TestParseAngle(t *testing.T) {
	tests := []struct {
		text  string
		hours bool
		want  float64
	}{
		{"63.0625", true, 63.0625},
		{"04:12:15", true, 63.0625},
		{"23:59:59.99", true, 359.99995833},
		{"4:30", true, 67.5},
		{"-30.72", false, -30.72},
		{"-30:43:12", false, -30.72},
		{"-00:30", false, -0.5},
		{"+18:33:45", false, 18.5625},
		{"0", false, 0},
	}
	for _, tt := range tests {
		if got, err := parseAngle("ra", tt.text, tt.hours, -360, 360); err != nil || math.Abs(got-tt.want) > 1e-8 {
			t.Errorf("%q: got %v, %v; want %v", tt.text, got, err, tt.want)
		}
	}
	for _, text := range []string{"", "abc", "1:60", "1:00:60", "1:-5", "1:2:3:4", "--5", "NaN", "Inf", "91", "-91", "1e5", "5:+3"} {
		if got, err := parseAngle("dec", text, false, -90, 90); !isUsage(err) {
			t.Errorf("%q: got %v, %v; want a usage error", text, got, err)
		}
	}
}

func TestSexagesimal(t *testing.T) {
	tests := []struct {
		value    float64
		decimals int
		signed   bool
		want     string
	}{
		{4.2041666667, 2, false, "04:12:15.00"},
		{-30.72, 1, true, "-30:43:12.0"},
		{18.5625, 0, true, "+18:33:45"},
		{0.99999999999, 0, false, "01:00:00"},
		{-0.5, 0, true, "-00:30:00"},
		{23.99999999, 3, false, "24:00:00.000"},
	}
	for _, tt := range tests {
		if got := sexagesimal(tt.value, tt.decimals, tt.signed); got != tt.want {
			t.Errorf("%v: got %s, want %s", tt.value, got, tt.want)
		}
	}
	for deg, want := range map[float64]string{0: "00:00", 63.06: "04:12", 359.99: "00:00", 360: "00:00", -15: "23:00"} {
		if got := clockOf(deg); got != want {
			t.Errorf("%v deg: got %s, want %s", deg, got, want)
		}
	}
}

func TestAnglesRoundTrip(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		deg := rapid.Float64Range(-90, 90).Draw(t, "deg")
		got, err := parseAngle("dec", sexagesimal(deg, 3, true), false, -90.001, 90.001)
		if err != nil || math.Abs(got-deg) > 0.001/3600 {
			t.Fatalf("%v became %v, %v", deg, got, err)
		}
	})
}

func TestPlainText(t *testing.T) {
	for name, want := range map[string]string{"": "", "ALT": "ALT", "=1+1": "'=1+1", "+x": "'+x", "-x": "'-x", "@x": "'@x"} {
		if got := plainText(name); got != want {
			t.Errorf("%q: got %q, want %q", name, got, want)
		}
	}
}
