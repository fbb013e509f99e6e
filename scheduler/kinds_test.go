package scheduler

import (
	"math"
	"strings"
	"testing"
	"time"

	"pgregory.net/rapid"
)

func TestParseInstant(t *testing.T) {
	day := time.Date(2027, 1, 18, 0, 0, 0, 0, time.UTC)
	for _, x := range []struct {
		text string
		want time.Duration // after the day's start
	}{
		{"2027-01-18T00:00:00Z", 0},
		{"2027-01-18T06:30:05Z", 6*time.Hour + 30*time.Minute + 5*time.Second},
		{"2027-01-18T23:59:59.999Z", 24*time.Hour - time.Millisecond},
		{"2027-01-18T00:00:00.1Z", 100 * time.Millisecond},
		{"2027-01-18T00:00:00.0004Z", 0},
		{"2027-01-18T00:00:00.0005Z", time.Millisecond},
		{"2027-01-18T00:00:00.0014999999999999999999Z", time.Millisecond},
		{"2027-01-17T23:59:59.9999999999Z", 0},
	} {
		got, ok := parseInstant(x.text)
		if !ok || !got.Equal(day.Add(x.want)) || got.Location() != time.UTC {
			t.Errorf("%s is %v, %v; want %v", x.text, got, ok, day.Add(x.want))
		}
	}
	for _, text := range []string{
		"", "Z", "2027-01-18", "2027-01-18T06:30Z", "2027-01-18T06:30:00", "2027-01-18T06:30:00+00:00",
		"2027-01-18 06:30:00Z",
		"2027-01-18t06:30:00z", "2027-01-18T6:30:00Z", "2027-01-18T06:30:00,5Z", "2027-01-18T06:30:00.Z",
		"2027-01-18T06:30:00.5.5Z",
		"2027-02-29T00:00:00Z", "2027-00-10T00:00:00Z", "2027-01-18T24:00:00Z", "2027-01-18T06:60:00Z",
		"2016-12-31T23:59:60Z",
		"20270118T063000Z", "+2027-01-18T06:30:00Z", "2027-01-18T06:30:00Z ", " 2027-01-18T06:30:00Z",
		"2027-W03-1T00:00:00Z",
	} {
		if got, ok := parseInstant(text); ok {
			t.Errorf("%q is read as %v", text, got)
		}
	}
}

// Whatever is written is read back, to the millisecond.
func TestInstantsRoundTrip(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		at := anyInstant(t).Add(time.Duration(rapid.IntRange(-400, 400).Draw(t, "us")) * time.Microsecond)
		var w writer
		w.instant(at.In(time.FixedZone("", 3*3600)))
		back, ok := parseInstant(strings.Trim(string(w.b), `"`))
		if !ok || !back.Equal(at.Round(time.Millisecond)) {
			t.Fatalf("%v is written %s, read %v", at, w.b, back)
		}
	})
}

// What is allowed is said in words.
func TestAllowedInWords(t *testing.T) {
	for _, x := range []struct{ got, want string }{
		{within(-90, 90, "degrees").allowed(), "from -90 to 90 degrees"},
		{above(0, 1e6, "MHz").hinting("give MHz").allowed(), "greater than 0 and at most 1000000 MHz (give MHz)"},
		{number{lo: 0, hi: 1, below: true}.allowed(), "from 0 to less than 1"},
		{anyNumber.allowed(), "a finite number"},
		{integer{lo: 1, hi: 9, unit: "orbits"}.allowed(), "from 1 to 9 orbits"},
		{integer{one: []int{1, 2, 5, 10}}.allowed(), "1, 2, 5 or 10"},
		{integer{one: []int{4}}.allowed(), "4"},
		{orList([]string{"a", "b", "c"}), "a, b or c"},
		{orList([]string{"a"}), "a"},
		{orList(nil), ""},
		{few([]string{"L1", "W1"}), "L1, W1"}, {few(strings.Split("abcdefghijk", "")), "a, b, c, d, e, f, g, h and 3 more"}, {few(nil), ""},
		{short(0.00005), "5e-05"}, {short(123456.5), "123456.5"}, {short(1e7), "1e+07"}, {short(-0.5), "-0.5"},
		{short(0), "0"},
		{quote("a\n\"b"), `"a\n\"b"`}, {quote(strings.Repeat("é", 61)), `"` + strings.Repeat("é", 60) + `…"`},
	} {
		if x.got != x.want {
			t.Errorf("%q, want %q", x.got, x.want)
		}
	}
}

// NaN lies in no range, not even that of any finite number.
func TestNumberRefusesNaN(t *testing.T) {
	for _, k := range []number{within(-1, 1, ""), above(0, 1, ""), anyNumber} {
		var c checker
		nan := math.NaN()
		k.check(&c, &nan)
		if k.ok(nan) || c.err() == nil {
			t.Errorf("NaN is %s", k.allowed())
		}
	}
}

// Names may hold any characters but those that cannot be seen.
func TestTextRefusesWhatCannotBeSeen(t *testing.T) {
	for value, want := range map[string]string{
		"SIM J0412+1833": "", "Kvitvarden 45 m": "", "é☉Ω": "", "a b": "", strings.Repeat("ß", MaxTextLength): "",
		"":                                   "is empty; it must hold at least one character",
		"a\tb":                               "must not hold control characters",
		"a\nb":                               "must not hold control characters",
		"a\x00b":                             "must not hold control characters",
		"a\u0085b":                           "must not hold control characters",
		"a\xc3b":                             "is not valid UTF-8",
		strings.Repeat("ß", MaxTextLength+1): "is 501 characters long; at most 500 are allowed",
	} {
		var c checker
		c.enterKey("name")
		text{}.check(&c, &value)
		if got := messageAt(c.err(), "/name"); want == "" && got != "" || !strings.HasSuffix(got, want) {
			t.Errorf("%.20q: %q, want %q", value, got, want)
		}
	}
	lines := "First line.\nSecond."
	var c checker
	if (text{lines: true}).check(&c, &lines); c.err() != nil {
		t.Errorf("two lines where lines are allowed: %v", c.err())
	}
}

// A place is written as RFC 6901 wants it, and named by its last key.
func TestPlaces(t *testing.T) {
	var c checker
	if c.pointer() != "" || c.name() != "the file" {
		t.Errorf("the whole is %q, %q", c.pointer(), c.name())
	}
	c.enterKey("a/b~c")
	c.enterIndex(3)
	c.enterIndex(0)
	if c.pointer() != "/a~1b~0c/3/0" || c.name() != "a/b~c[3][0]" {
		t.Errorf("%q, %q", c.pointer(), c.name())
	}
	c.enterKey("")
	if c.pointer() != "/a~1b~0c/3/0/" {
		t.Errorf("an empty key: %q", c.pointer())
	}
	if got := place("blocks", 7, "lost", "0"); got != "/blocks/7/lost/0" {
		t.Errorf("%q", got)
	}
}

// The edit distance is that of the plain recursion, up to the bound.
func TestEditDistance(t *testing.T) {
	var plain func(a, b string) int
	plain = func(a, b string) int {
		switch {
		case a == "" || b == "":
			return len(a) + len(b)
		case a[0] == b[0]:
			return plain(a[1:], b[1:])
		}
		return 1 + min(plain(a[1:], b[1:]), plain(a[1:], b), plain(a, b[1:]))
	}
	rapid.Check(t, func(t *rapid.T) {
		a := rapid.StringMatching(`[ab]{0,6}`).Draw(t, "a")
		b := rapid.StringMatching(`[abc]{0,6}`).Draw(t, "b")
		most := rapid.IntRange(1, 8).Draw(t, "most")
		got, want := editDistance(a, b, most), plain(a, b)
		if want < most && got != want || want >= most && got < most {
			t.Fatalf("%q to %q within %d: %d, want %d", a, b, most, got, want)
		}
	})
}

// The writer refuses what the formats cannot hold rather than write it wrong.
func TestWriterRefuses(t *testing.T) {
	for want, write := range map[string]func(*writer){
		"NaN is not a finite number and cannot be written":                   func(w *writer) { w.number(math.NaN()) },
		"+Inf is not a finite number and cannot be written":                  func(w *writer) { w.number(math.Inf(1)) },
		"the instant 2100-01-01T00:00:00Z is outside the years 1972 to 2099": func(w *writer) { w.instant(EndInstant) },
		"the instant 1971-12-31T23:59:59Z is outside the years 1972 to 2099": func(w *writer) { w.instant(FirstInstant.Add(-time.Second)) },
		`the text "a\xff" is not valid UTF-8 and cannot be written`:          func(w *writer) { w.text("a\xff") },
		"the instant 0001-01-01T00:00:00Z is outside the years 1972 to 2099": func(w *writer) { w.instant(time.Time{}); w.number(math.NaN()) },
	} {
		var w writer
		write(&w)
		if w.err == nil || w.err.Error() != want || KindOf(w.err) == nil {
			t.Errorf("%v, want %s", w.err, want)
		}
	}
	var w writer
	w.text("a\"\\/\n\x01é")
	if got := string(w.b); got != `"a\"\\/\u000a\u0001é"` {
		t.Errorf("escapes: %s", got)
	}
}
