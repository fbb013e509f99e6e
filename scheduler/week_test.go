package scheduler

import (
	"errors"
	"fmt"
	"testing"
	"time"

	"pgregory.net/rapid"
)

func day(year int, month time.Month, d int) time.Time {
	return time.Date(year, month, d, 0, 0, 0, 0, time.UTC)
}

// ISO weeks about the turn of the year, the cases listed in ISO 8601 and its
// usual explanations.
func TestWeekHorizon(t *testing.T) {
	for _, x := range []struct {
		name string
		from time.Time
	}{
		{"2027-W03", day(2027, 1, 18)},
		{"2027-W01", day(2027, 1, 4)},
		{"2026-W53", day(2026, 12, 28)},
		{"2020-W53", day(2020, 12, 28)},
		{"2009-W01", day(2008, 12, 29)},
		{"2010-W01", day(2010, 1, 4)},
		{"2024-W52", day(2024, 12, 23)},
		{"1972-W01", day(1972, 1, 3)},
		{"2099-W53", day(2099, 12, 28)},
	} {
		h, err := WeekHorizon(x.name)
		if err != nil || !h.From.Equal(x.from) || !h.To.Equal(x.from.AddDate(0, 0, 7)) ||
			h.From.Location() != time.UTC {
			t.Errorf("%s is %v, %v; want from %v", x.name, h, err, x.from)
		}
		for _, at := range []time.Time{h.From, h.To.Add(-1), h.From.Add(50 * time.Hour).In(time.FixedZone("",
			-9*3600))} {
			if got := WeekName(at); got != x.name {
				t.Errorf("%v lies in %s, want %s", at, got, x.name)
			}
			if got := WeekStart(at); !got.Equal(x.from) {
				t.Errorf("the week of %v starts %v", at, got)
			}
		}
	}
}

func TestWeekHorizonRefuses(t *testing.T) {
	for _, x := range []struct{ name, want string }{
		{"", `week "" is not an ISO week such as 2027-W03`},
		{"2027-3", `week "2027-3" is not an ISO week such as 2027-W03`},
		{"2027-w03", `week "2027-w03" is not an ISO week such as 2027-W03`},
		{"2027-W3a", `week "2027-W3a" is not an ISO week such as 2027-W03`},
		{"+027-W03", `week "+027-W03" is not an ISO week such as 2027-W03`},
		{"2027-W00", `week "2027-W00": a year has the weeks 01 to 52 or 53`},
		{"2027-W54", `week "2027-W54": a year has the weeks 01 to 52 or 53`},
		{"2027-W53", `week "2027-W53": 2027 has 52 weeks`},
		{"1971-W40", `week "1971-W40" is outside the years 1972 to 2099`},
		{"2100-W01", `week "2100-W01" is outside the years 1972 to 2099`},
	} {
		_, err := WeekHorizon(x.name)
		if err == nil || err.Error() != x.want || !errors.Is(err, ErrInvalid) {
			t.Errorf("%q: %v, want %s", x.name, err, x.want)
		}
	}
}

// Name and horizon are each other's inverse for every instant.
func TestWeekNamesAreInverse(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		at := anyInstant(t)
		h, err := WeekHorizon(WeekName(at))
		if err != nil || !h.Contains(at) || h.From != WeekStart(at) || h.From.Weekday() != time.Monday {
			t.Fatalf("%v lies in %s, %v, %v", at, WeekName(at), h, err)
		}
	})
}

func TestDefaultHorizon(t *testing.T) {
	c := everyField(t)
	c.Start = day(2027, 1, 1)
	if got := WeekName(DefaultHorizon(c).From); got != "2027-W01" {
		t.Errorf("the week of the first block is %s", got)
	}
	c.Blocks[2].Start = day(2026, 12, 31) // not the first in the list
	if got := WeekName(DefaultHorizon(c).From); got != "2026-W53" {
		t.Errorf("the week of the first block is %s", got)
	}
	c.Blocks = nil
	c.Start = day(2027, 1, 12)
	if h := DefaultHorizon(c); h.From != day(2027, 1, 11) || h.To != day(2027, 1, 18) {
		t.Errorf("without blocks: %v", h)
	}
}

// A horizon's blocks are those that start in it, in canonical order.
func TestHorizonBlocks(t *testing.T) {
	c := everyField(t)
	at := c.Blocks[1].Start
	c.Blocks[2].Start = at // EQU and TRA start together
	c.Blocks[1], c.Blocks[2] = c.Blocks[2], c.Blocks[1]
	for _, x := range []struct {
		h    Horizon
		want string
	}{
		{Horizon{day(2027, 1, 4), day(2027, 1, 11)}, "[A-0104 E-0105 T-0106]"},
		{Horizon{at, day(2027, 1, 11)}, "[E-0105 T-0106]"},
		{Horizon{day(2027, 1, 4), at}, "[A-0104]"},
		{Horizon{day(2027, 1, 11), day(2027, 1, 18)}, "[]"},
	} {
		ids := []string{}
		for _, b := range x.h.Blocks(c) {
			ids = append(ids, b.ID)
			if b != c.BlockByID(b.ID) {
				t.Errorf("block %s is a copy", b.ID)
			}
		}
		if got := fmt.Sprint(ids); got != x.want {
			t.Errorf("blocks of %v: %s, want %s", x.h, got, x.want)
		}
	}
}
