package scheduler

import (
	"fmt"
	"slices"
	"time"
)

// Week is the length of an ISO week; UTC days are taken as 86400 s.
const Week = 7 * 24 * time.Hour

// WeekName is the ISO 8601 week that holds t, by its UTC date: "2027-W03".
func WeekName(t time.Time) string {
	year, week := t.UTC().ISOWeek()
	return fmt.Sprintf("%04d-W%02d", year, week)
}

// WeekStart is Monday 00:00 UTC of the ISO week that holds t.
func WeekStart(t time.Time) time.Time {
	t = t.UTC()
	day := (int(t.Weekday()) + 6) % 7 // days since Monday
	return time.Date(t.Year(), t.Month(), t.Day()-day, 0, 0, 0, 0, time.UTC)
}

// WeekHorizon is the ISO week with the given name, "2027-W03": from Monday
// 00:00 UTC to the next. A name that is no week is an error of kind
// ErrInvalid; so is a week 53 of a year that has none.
func WeekHorizon(name string) (Horizon, error) {
	bad := func() (Horizon, error) {
		return Horizon{}, Errorf(ErrInvalid, "week %q is not an ISO week such as 2027-W03", name)
	}
	if len(name) != len("2027-W03") || name[4:6] != "-W" {
		return bad()
	}
	year, week := 0, 0
	for i, c := range []byte(name) {
		switch {
		case i == 4 || i == 5:
		case c < '0' || c > '9':
			return bad()
		case i < 4:
			year = 10*year + int(c-'0')
		default:
			week = 10*week + int(c-'0')
		}
	}
	if week < 1 || week > 53 {
		return Horizon{}, Errorf(ErrInvalid, "week %q: a year has the weeks 01 to 52 or 53", name)
	}
	// The 4th of January always lies in week 1.
	from := WeekStart(time.Date(year, 1, 4, 0, 0, 0, 0, time.UTC)).AddDate(0, 0, 7*(week-1))
	if WeekName(from) != name {
		return Horizon{}, Errorf(ErrInvalid, "week %q: %04d has 52 weeks", name, year)
	}
	if from.Before(FirstInstant) || !from.Before(EndInstant) {
		return Horizon{}, Errorf(ErrInvalid, "week %q is outside the years %d to %d",
			name, FirstInstant.Year(), EndInstant.Year()-1)
	}
	return Horizon{From: from, To: from.Add(Week)}, nil
}

// DefaultHorizon is the ISO week to plan where none is named: that of the
// campaign's first block, or of its start where it has no blocks.
func DefaultHorizon(c *Campaign) Horizon {
	first := c.Start
	for i, b := range c.Blocks {
		if i == 0 || b.Start.Before(first) {
			first = b.Start
		}
	}
	from := WeekStart(first)
	return Horizon{From: from, To: from.Add(Week)}
}

// Contains reports whether t lies in [From, To).
func (h Horizon) Contains(t time.Time) bool { return !t.Before(h.From) && t.Before(h.To) }

// Blocks are the campaign's blocks that start in the horizon, by start, then
// telescope, then id. They point into the campaign.
func (h Horizon) Blocks(c *Campaign) []*Block {
	var in []*Block
	for i := range c.Blocks {
		if h.Contains(c.Blocks[i].Start) {
			in = append(in, &c.Blocks[i])
		}
	}
	slices.SortStableFunc(in, func(a, b *Block) int { return compareBlocks(*a, *b) })
	return in
}
