package runsheet

import (
	"fmt"
	"time"

	"cadencewright/scheduler"
)

// Night is local noon to local noon at a telescope: 24 hours, or 23 or 25 on
// the days the clocks change.
type Night struct {
	Name     string // the local date on which it begins, 2027-01-18
	From, To time.Time
	Zone     *time.Location
}

// NightNamed is the night that begins at local noon of the date.
func NightNamed(tel *scheduler.Telescope, date string) (Night, error) {
	zone, err := time.LoadLocation(tel.Timezone)
	if err != nil {
		return Night{}, fmt.Errorf("telescope %s: timezone %q: %w", tel.Code, tel.Timezone, err)
	}
	day, err := time.Parse(time.DateOnly, date)
	if err != nil {
		return Night{}, fmt.Errorf("night %q: must be a date like 2027-01-18", date)
	}
	y, m, d := day.Date()
	return Night{
		Name: date,
		From: time.Date(y, m, d, 12, 0, 0, 0, zone).UTC(),
		To:   time.Date(y, m, d+1, 12, 0, 0, 0, zone).UTC(),
		Zone: zone,
	}, nil
}

// NightAt is the night that holds an instant.
func NightAt(tel *scheduler.Telescope, t time.Time) (Night, error) {
	zone, err := time.LoadLocation(tel.Timezone)
	if err != nil {
		return Night{}, fmt.Errorf("telescope %s: timezone %q: %w", tel.Code, tel.Timezone, err)
	}
	local := t.In(zone)
	if local.Hour() < 12 {
		local = local.AddDate(0, 0, -1)
	}
	return NightNamed(tel, local.Format(time.DateOnly))
}

// Holds tells whether an instant lies in the night.
func (n Night) Holds(t time.Time) bool { return !t.Before(n.From) && t.Before(n.To) }

// Next and Previous are the neighbouring nights' names.
func (n Night) Next() string     { return shiftDate(n.Name, 1) }
func (n Night) Previous() string { return shiftDate(n.Name, -1) }

func shiftDate(date string, days int) string {
	t, err := time.Parse(time.DateOnly, date)
	if err != nil {
		return date // a Night's name is always a date
	}
	return t.AddDate(0, 0, days).Format(time.DateOnly)
}
