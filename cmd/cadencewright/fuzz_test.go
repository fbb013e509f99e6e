package main

import (
	"testing"
	"time"

	"cadencewright/scheduler"
)

// FuzzFlagValues feeds the readers of flags: whatever is typed, they give a
// value in range or a usage error.
func FuzzFlagValues(f *testing.F) {
	for _, s := range []string{"now", "2027-01-18T20:30Z", "7d", "90m", "-30:43:12", "63.0625", "", "::", "1e309", "0x1p-2", "NaN", "١٢"} {
		f.Add(s)
	}
	now := time.Date(2027, 1, 18, 20, 31, 0, 0, time.UTC)
	f.Fuzz(func(t *testing.T, text string) {
		if at, err := parseInstant("from", text, now); err == nil {
			if at.Before(scheduler.FirstInstant) || !at.Before(scheduler.EndInstant) || at.Location() != time.UTC {
				t.Errorf("%q became the instant %v", text, at)
			}
		} else if !isUsage(err) {
			t.Errorf("%q: %v is no usage error", text, err)
		}
		if d, err := parseSpan("for", text); err == nil && d <= 0 {
			t.Errorf("%q became the length %v", text, d)
		} else if err != nil && !isUsage(err) {
			t.Errorf("%q: %v is no usage error", text, err)
		}
		for _, hours := range []bool{false, true} {
			if a, err := parseAngle("ra", text, hours, 0, 360); err == nil && !(a >= 0 && a <= 360) {
				t.Errorf("%q became the angle %v", text, a)
			} else if err != nil && (!isUsage(err) || a != 0) {
				t.Errorf("%q: %v, %v", text, a, err)
			}
		}
	})
}
