package scheduler

import (
	"reflect"
	"strings"
	"testing"
	"time"
)

// Every field of a plan lands where it belongs, and the text is written back
// as it was.
func TestReadPlanFillsEveryField(t *testing.T) {
	p, err := ReadPlan([]byte(planText))
	if err != nil {
		t.Fatal(err)
	}
	az := -97.125
	monday := time.Date(2027, 1, 4, 0, 0, 0, 0, time.UTC)
	want := &Plan{
		Campaign: "Every field", From: monday, To: monday.Add(Week), Score: 6.5, Possible: 12.25, Bound: 7,
		Scans: []Scan{
			{Block: "A-0104", Telescope: "ALT", Source: "SIM J0412+1833", Receiver: "L1",
				Start: monday.Add(22 * time.Hour), Minutes: 25, MotorAzDeg: &az, Pinned: true, TOAUs: 0.62,
				Earns: []Earning{{"c1", "c1#1", 4.5}, {"p1", "p1@0", 1.5}}},
			{Block: "T-0106", Telescope: "TRA", Source: "SIM J1902+0307", Receiver: "U1",
				Start: monday.Add(50*time.Hour + 10*time.Minute), Minutes: 30},
		},
		Unmet: []Unmet{
			{"o1", "o1#1", 3.75, []Reason{{"never-up", "Never up at EQU in a block with L.", 412}}},
			{"b1", "b1#1", 0.5, []Reason{{"", "No block in the window.", 0}}},
			{"c2", "c2#1", 3, nil},
		},
		Certificate: Certificate{map[string]float64{"c1#1": 0.25, "o1#1": 1.5}, 7},
	}
	if !reflect.DeepEqual(p, want) {
		t.Errorf("read %+v\nwant %+v", p, want)
	}
	if end := p.Scans[0].End(); !end.Equal(monday.Add(22*time.Hour + 25*time.Minute)) {
		t.Errorf("the first scan ends at %v", end)
	}
	if data, err := WritePlan(p); err != nil || string(data) != planText {
		t.Errorf("written back, %v:\n%s", err, data)
	}
}

// A re-check must be able to read plans that lack what it can recompute.
func TestReadPlanAllowsWhatMayBeAbsent(t *testing.T) {
	for _, x := range []struct {
		at    string
		value any
		ok    func(*Plan) bool
	}{
		{"/unmet", unset, func(p *Plan) bool { return p.Unmet == nil }},
		{"/certificate", unset, func(p *Plan) bool { return p.Certificate.Prices != nil && p.Certificate.Bound == 0 }},
		{"/scans/0/toa_us", nil, func(p *Plan) bool { return p.Scans[0].TOAUs == 0 }},
		{"/scans/0/motor_az_deg", nil, func(p *Plan) bool { return p.Scans[0].MotorAzDeg == nil }},
		{"/scans/0/earns", unset, func(p *Plan) bool { return p.Scans[0].Earns == nil }},
		{"/unmet/0/reasons/0", "Too full.",
			func(p *Plan) bool { return p.Unmet[0].Reasons[0] == Reason{Text: "Too full."} }},
		{"/scans", []any{}, func(p *Plan) bool { return p.Scans == nil }},
	} {
		p, err := ReadPlan(edited(t, []byte(planText), x.at, x.value))
		if err != nil || !x.ok(p) {
			t.Errorf("%s = %v: %v", x.at, x.value, err)
		}
	}
}

// What is wrong with a plan file is named like that of a campaign.
func TestReadPlanNamesWhatIsWrong(t *testing.T) {
	for _, b := range []broken{
		{"/campaign", unset, "", "campaign is missing"},
		{"/from", "2027-W01",
			"", `from is "2027-W01"; it must be an instant in UTC such as 2027-01-18T06:30:00Z (RFC 3339, with Z)`},
		{"/to", "2027-01-04T00:00:00Z", "", "to is 2027-01-04T00:00:00Z, not after from, 2027-01-04T00:00:00Z"},
		{"/score", "6.5", "", `score must be a finite number, not the string "6.5"`},
		{"/bound", nil, "", "bound must be a finite number, not null"},
		{"/scans/1/minutes", 0, "", "minutes is 0; it must be from 1 to 20160 minutes"},
		{"/scans/1/motor", 5, "", `unknown key "motor" in a scan; did you mean "motor_az_deg"?`},
		{"/scans/1/toa_us", -1, "", "toa_us is -1; it must be from 0 to 1e+300"},
		{"/scans/0/motor_az_deg", "12", "", `motor_az_deg must be a finite number, not the string "12"`},
		{"/scans/0/earns/1/unit", unset, "", "unit is missing"},
		{"/scans/0/pinned", 1, "", "pinned must be true or false, not 1"},
		{"/unmet/0/reasons/0/count", -1, "", "count is -1; it must be from 0 to 2147483648"},
		{"/certificate/prices/c1#1", "x", "", `c1#1 must be a finite number, not the string "x"`},
		{"/certificate/prices", []any{}, "", "prices must be an object, not a list"},
	} {
		_, err := ReadPlan(edited(t, []byte(planText), b.at, b.value))
		if b.pointer == "" {
			b.pointer = b.at
		}
		if err == nil || err.Error() != b.pointer+": "+b.message {
			t.Errorf("%s = %v:\n got  %v\n want %s: %s", b.at, b.value, err, b.pointer, b.message)
		}
	}
	twice := strings.Replace(planText, `"c1#1": 0.25`, `"c1#1": 0.25, "c1#1": 0.5`, 1)
	if _, err := ReadPlan([]byte(twice)); err == nil ||
		err.Error() != `/certificate/prices/c1#1: the key "c1#1" stands twice in one object` {
		t.Errorf("a price twice: %v", err)
	}
}
