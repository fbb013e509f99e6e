package scheduler

import (
	"reflect"
	"slices"
	"strings"
	"testing"
	"time"
	"unsafe"
)

// A message begins with the name of the thing it is about, where that has one.
func TestMessagesNameTheThing(t *testing.T) {
	c := everyField(t)
	for at, want := range map[string]string{
		"":                                         "",
		"/campaign/name":                           "",
		"/telescopes":                              "",
		"/telescopes/1":                            "telescope EQU",
		"/telescopes/1/mount":                      "telescope EQU",
		"/telescopes/0/receivers/1":                "telescope ALT, receiver W1",
		"/telescopes/0/receivers/1/bands/0":        "telescope ALT, receiver W1",
		"/telescopes/0/receivers":                  "telescope ALT",
		"/telescopes/0/receivers/7/code":           "telescope ALT",
		"/telescopes/9/name":                       "",
		"/sources/2/binary":                        "SIM J1902+0307",
		"/cadence_targets/0/source":                "goal c1",
		"/phase_goals/0/windows/1/to":              "goal p1",
		"/overlap_goals/0":                         "goal o1",
		"/band_pair_goals/0/within_h":              "goal b1",
		"/blocks/2/start":                          "block T-0106",
		"/history/0/source":                        "",
		"/pins/0/start":                            "",
		"/blocks/x/start":                          "",
		"/blocks/-1/start":                         "",
		"/blocks/99999999999999999999999999/start": "",
	} {
		if got := thingAt(c, at); got != want {
			t.Errorf("%q is named %q, want %q", at, got, want)
		}
	}
	c.Sources[0].Name = "line\nbreak \"quoted\" " + strings.Repeat("x", 200)
	if got := thingAt(c, "/sources/0"); strings.Contains(got, "\n") || len(got) > 100 {
		t.Errorf("a hostile name is shown as %q", got)
	}
}

// Problems of single values come in the order of the file, those between
// values after them.
func TestProblemsComeInOrder(t *testing.T) {
	document := readTestFile(t, "every-field.json")
	for _, x := range []struct {
		at    string
		value any
	}{
		{"/pins/0/minutes", -1}, {"/campaign/dut1_s", 2}, {"/sources/1/dec_deg", 100}, {"/cadence_targets/1/source", "nobody"},
		{"/telescopes/2/cal_s", -1}, {"/blocks/0/telescope", "nowhere"},
	} {
		document = edited(t, document, x.at, x.value)
	}
	_, err := ReadCampaign(document)
	got := pointers(problemsOf(t, err))
	// The test's documents have their keys in alphabetical order.
	want := []string{"/campaign/dut1_s", "/pins/0/minutes", "/sources/1/dec_deg", "/telescopes/2/cal_s", "/cadence_targets/1/source", "/blocks/0/telescope"}
	if !reflect.DeepEqual(got, want) {
		t.Errorf("problems at\n %v, want\n %v", got, want)
	}
}

// Values that are shown are shown short.
func TestMessagesStayShort(t *testing.T) {
	document := readTestFile(t, "every-field.json")
	long := strings.Repeat("long ", 10000)
	for _, at := range []string{"/campaign/start", "/telescopes/0/mount", "/telescopes/0/timezone", "/sources/0/ra_deg", "/cadence_targets/0/source",
		"/cadence_targets/0/id", "/blocks/0/receivers/0", "/pins/0/block", "/pins/0/receiver", "/history/0/telescope", "/history/0/counted", "/" + long} {
		_, err := ReadCampaign(edited(t, document, at, long))
		for _, p := range problemsOf(t, err) {
			if len(p.Message) > 400 {
				t.Errorf("%.40s: a message of %d bytes: %.200s", at, len(p.Message), p.Message)
			}
		}
	}
	huge := strings.Replace(string(document), `"ra_deg": 63.0625`, `"ra_deg": 1`+strings.Repeat("0", 5000), 1)
	_, err := ReadCampaign([]byte(huge))
	if p := problemsOf(t, err); len(p[0].Message) > 200 || !strings.Contains(p[0].Message, "too large to hold") {
		t.Errorf("a number of 5000 digits: %.300s", p[0].Message)
	}
}

// What stands under an unknown key is passed over whatever it is.
func TestUnknownKeysArePassedOver(t *testing.T) {
	document := readTestFile(t, "every-field.json")
	for _, value := range []any{nil, 1, "x", true, []any{[]any{map[string]any{"a": []any{1, 2}}}}, map[string]any{"campaign": map[string]any{"name": 1}}} {
		_, err := ReadCampaign(edited(t, document, "/campaign/extra", value))
		if got := pointers(problemsOf(t, err)); !slices.Equal(got, []string{"/campaign/extra"}) {
			t.Errorf("%v under an unknown key: problems at %v", value, got)
		}
	}
}

// Equal names of a long history are one string in memory.
func TestReaderSharesNames(t *testing.T) {
	c, err := ReadCampaign(readTestFile(t, "large-1.json"))
	if err != nil {
		t.Fatal(err)
	}
	first := map[string]*byte{}
	for _, h := range c.History {
		p := unsafe.StringData(h.Source)
		if q, ok := first[h.Source]; ok && q != p {
			t.Fatalf("%s is held twice", h.Source)
		}
		first[h.Source] = p
	}
	if len(first) < 50 {
		t.Errorf("only %d names in the history", len(first))
	}
}

// A minus zero is read as zero, so that it is not written back.
func TestReaderDropsMinusZero(t *testing.T) {
	text := strings.Replace(string(readTestFile(t, "every-field.json")), `"dec_deg": 3.125`, `"dec_deg": -0.0`, 1)
	c, err := ReadCampaign([]byte(text))
	if err != nil {
		t.Fatal(err)
	}
	data, err := WriteCampaign(c)
	if err != nil || !strings.Contains(string(data), `"dec_deg": 0, `) {
		t.Errorf("-0 is written back otherwise, %v", err)
	}
}

// FuzzParseInstant compares with the standard library, which accepts more.
func FuzzParseInstant(f *testing.F) {
	for _, s := range []string{"2027-01-18T06:30:00Z", "2027-01-18T06:30:00.123456789123Z", "2027-02-30T00:00:00Z", "2016-12-31T23:59:60Z", "0000-01-01T00:00:00Z", "9999-12-31T23:59:59.9Z"} {
		f.Add(s)
	}
	f.Fuzz(func(t *testing.T, s string) {
		got, ok := parseInstant(s)
		want, err := time.Parse(time.RFC3339Nano, s)
		if ok && len(s) <= len("2027-01-18T06:30:00.123456789Z") && (err != nil || got.Sub(want).Abs() > 500*time.Microsecond) {
			t.Fatalf("%q is read as %v; the standard library says %v, %v", s, got, want, err)
		}
		if ok && (got.Location() != time.UTC || got.Nanosecond()%int(time.Millisecond) != 0) {
			t.Fatalf("%q is read as %v", s, got)
		}
	})
}

// FuzzWeekHorizon: whatever the name, a week that is accepted has that name.
func FuzzWeekHorizon(f *testing.F) {
	for _, s := range []string{"2027-W03", "2026-W53", "2027-W53", "1972-W01", "2099-W53", "2027-W3", "W03-2027"} {
		f.Add(s)
	}
	f.Fuzz(func(t *testing.T, s string) {
		h, err := WeekHorizon(s)
		if err == nil && (WeekName(h.From) != s || h.To.Sub(h.From) != Week || h.From.Weekday() != time.Monday) {
			t.Fatalf("%q is taken as %v", s, h)
		}
	})
}
