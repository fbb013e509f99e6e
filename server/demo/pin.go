package demo

import (
	"time"

	"cadencewright/scheduler"
)

// onePin pins one scan in the week after this one: half an hour in the middle
// of a block of the wide-band telescope, on a source that is well up, for
// observers who have agreed on it with somebody.
func onePin(c *scheduler.Campaign) []scheduler.Pin {
	for i := range c.Blocks {
		b := &c.Blocks[i]
		if b.Telescope != saltbush || b.Start.Before(c.Blocks[0].Start.Truncate(24*time.Hour).Add(scheduler.Week)) {
			continue
		}
		u := newUpTable(c, b)
		start := b.Start.Add(b.Duration() / 2).Truncate(grid)
		end := start.Add(30 * time.Minute)
		k := int(start.Sub(u.start) / grid)
		for s := range c.Sources {
			// Away from the zenith, where the azimuth runs fast.
			if u.up(s, start.Add(-30*time.Minute), end.Add(30*time.Minute)) && u.high[s][k] > 35 && u.high[s][k] < 70 {
				return []scheduler.Pin{{Block: b.ID, Source: c.Sources[s].Name, Receiver: b.Receivers[len(b.Receivers)-1], Start: start,
					Minutes: 30}}
			}
		}
	}
	return nil
}
