package main

import (
	"os"
	"strings"
	"testing"
	"time"

	"cadencewright/scheduler"
	"cadencewright/testdata"
)

// everyField is the campaign of that name in testdata: blocks from 4 to 6
// January 2027.
func everyField(t *testing.T) *scheduler.Campaign {
	t.Helper()
	data, err := os.ReadFile(testdata.Path("campaigns", "every-field.json"))
	if err != nil {
		t.Fatal(err)
	}
	c, err := scheduler.ReadCampaign(data)
	if err != nil {
		t.Fatal(err)
	}
	return c
}

func TestHorizonFlags(t *testing.T) {
	c := everyField(t)
	tests := []struct {
		name     string
		flags    horizonFlags
		from, to string // or an error:
		bad      string
	}{
		{name: "first block's week", from: "2027-01-04T00:00:00Z", to: "2027-01-11T00:00:00Z"},
		{name: "a week", flags: horizonFlags{week: "2027-W01"}, from: "2027-01-04T00:00:00Z", to: "2027-01-11T00:00:00Z"},
		{name: "a day", flags: horizonFlags{from: "2027-01-05", to: "2027-01-06"}, from: "2027-01-05T00:00:00Z", to: "2027-01-06T00:00:00Z"},
		{name: "a start", flags: horizonFlags{from: "2027-01-05T12:00Z"}, from: "2027-01-05T12:00:00Z", to: "2027-01-12T12:00:00Z"},
		{name: "no such week", flags: horizonFlags{week: "2027-W54"}, bad: "--week"},
		{name: "two ways", flags: horizonFlags{week: "2027-W01", from: "2027-01-05"}, bad: "not both"},
		{name: "only an end", flags: horizonFlags{to: "2027-01-05"}, bad: "--to goes with --from"},
		{name: "backwards", flags: horizonFlags{from: "2027-01-05", to: "2027-01-04"}, bad: "is not after"},
		{name: "a season", flags: horizonFlags{from: "2027-01-05", to: "2027-05-04"}, bad: "at most 8 weeks"},
		{name: "no date", flags: horizonFlags{from: "Monday"}, bad: "is no instant"},
		{name: "a week without blocks", flags: horizonFlags{week: "2027-W02"},
			bad: "no block starts in 2027-W02; the campaign's 3 blocks start from 2027-01-04 17:00 (2027-W01) to 2027-01-06 02:00 (2027-W01)"},
		{name: "a day without blocks", flags: horizonFlags{from: "2027-01-08", to: "2027-01-09"}, bad: "2027-01-08 00:00 to 2027-01-09 00:00 UTC"},
	}
	for _, tt := range tests {
		t.Run(tt.name, func(t *testing.T) {
			h, err := tt.flags.horizon(c)
			if tt.bad != "" {
				if err == nil || !strings.Contains(err.Error(), tt.bad) {
					t.Errorf("got %v, want an error with %q", err, tt.bad)
				}
				return
			}
			if err != nil || h.From.Format(time.RFC3339) != tt.from || h.To.Format(time.RFC3339) != tt.to {
				t.Errorf("got %v, %v; want %s to %s", h, err, tt.from, tt.to)
			}
		})
	}
	c.Blocks = nil
	if _, err := (&horizonFlags{}).horizon(c); err == nil || !strings.Contains(err.Error(), "the campaign has no blocks") {
		t.Errorf("without blocks: got %v", err)
	}
}
