package scheduler

import (
	"bytes"
	"errors"
	"os"
	"path/filepath"
	"strings"
	"testing"
)

// seeds adds the kept campaigns, some broken on purpose, and scraps of JSON.
func seeds(f *testing.F) {
	files, err := filepath.Glob(filepath.Join(campaignFiles, "*.json"))
	if err != nil || len(files) < 7 {
		f.Fatalf("%d campaign files, %v", len(files), err)
	}
	for _, name := range files {
		data, err := os.ReadFile(name)
		if err != nil {
			f.Fatal(err)
		}
		if len(data) < 10000 { // mutating large files finds little
			f.Add(data)
		}
	}
	small := readTestFile(f, "every-field.json")
	for _, cut := range []int{0, 1, 30, 400, len(small) / 2, len(small) - 3} {
		f.Add(small[:cut])
	}
	for _, r := range [][2]string{{"-", "-Infinity "}, {`"L1"`, "null"}, {"0", "1e999"}, {"{", "[{"},
		{`"id"`, `"id": 1, "id"`}, {"2027", "0000"}} {
		f.Add(bytes.ReplaceAll(small, []byte(r[0]), []byte(r[1])))
	}
	for _, s := range []string{"null", "{}", "[]", `{"format": "campaign/1", "campaign": null}`,
		`{"format": "plan/1", "certificate": {"prices": {"a#1": 1e-400}}}`} {
		f.Add([]byte(s))
	}
	f.Add([]byte(strings.Repeat(`{"sources":[`, 100)))
}

// Whatever the bytes, the reader answers: with problems, or with a campaign
// that is valid and that keeps its meaning through the writer.
func FuzzReadCampaign(f *testing.F) {
	seeds(f)
	f.Fuzz(func(t *testing.T, data []byte) {
		c, err := ReadCampaign(data)
		if err != nil {
			var p Problems
			if !errors.As(err, &p) || len(p) == 0 || len(p) > MaxProblems+1 {
				t.Fatalf("error %T with %d problems", err, len(p))
			}
			return
		}
		if err := c.Validate(); err != nil {
			t.Fatalf("read, but not valid: %v", err)
		}
		first, err := WriteCampaign(c)
		if err != nil {
			t.Fatalf("read, but not to be written: %v", err)
		}
		back, err := ReadCampaign(first)
		if err != nil || !back.Equal(c) {
			t.Fatalf("another campaign after writing, %v:\n%s", err, first)
		}
		second, err := WriteCampaign(back)
		if err != nil || !bytes.Equal(first, second) {
			t.Fatalf("other bytes the second time, %v:\n%s\n%s", err, first, second)
		}
	})
}

// planText is a plan with every field.
const planText = `{
 "format": "plan/1",
 "campaign": "Every field",
 "from": "2027-01-04T00:00:00Z",
 "to": "2027-01-11T00:00:00Z",
 "score": 6.5,
 "possible": 12.25,
 "bound": 7,
 "scans": [
  {"block": "A-0104", "telescope": "ALT", "source": "SIM J0412+1833", "receiver": "L1", "start": "2027-01-04T22:00:00Z", "minutes": 25, "motor_az_deg": -97.125, "pinned": true, "toa_us": 0.62, "earns": [
   {"goal": "c1", "unit": "c1#1", "value": 4.5},
   {"goal": "p1", "unit": "p1@0", "value": 1.5}
  ]},
  {"block": "T-0106", "telescope": "TRA", "source": "SIM J1902+0307", "receiver": "U1", "start": "2027-01-06T02:10:00Z", "minutes": 30}
 ],
 "unmet": [
  {"goal": "o1", "unit": "o1#1", "weight": 3.75, "reasons": [{"code": "never-up", "text": "Never up at EQU in a block with L.", "count": 412}]},
  {"goal": "b1", "unit": "b1#1", "weight": 0.5, "reasons": [{"text": "No block in the window."}]},
  {"goal": "c2", "unit": "c2#1", "weight": 3}
 ],
 "certificate": {"prices": {"c1#1": 0.25, "o1#1": 1.5}, "bound": 7}
}
`

// The same for plans.
func FuzzReadPlan(f *testing.F) {
	seeds(f)
	f.Add([]byte(planText))
	f.Add([]byte(strings.ReplaceAll(planText, "0.62", "null")))
	f.Add([]byte(strings.ReplaceAll(planText, `{"text": "No block in the window."}`, `"No block."`)))
	f.Fuzz(func(t *testing.T, data []byte) {
		p, err := ReadPlan(data)
		if err != nil {
			var list Problems
			if !errors.As(err, &list) || len(list) == 0 || len(list) > MaxProblems+1 {
				t.Fatalf("error %T with %d problems", err, len(list))
			}
			return
		}
		first, err := WritePlan(p)
		if err != nil {
			t.Fatalf("read, but not to be written: %v", err)
		}
		back, err := ReadPlan(first)
		if err != nil {
			t.Fatalf("not readable after writing: %v\n%s", err, first)
		}
		second, err := WritePlan(back)
		if err != nil || !bytes.Equal(first, second) {
			t.Fatalf("other bytes the second time, %v:\n%s\n%s", err, first, second)
		}
	})
}
