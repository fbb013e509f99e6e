package demo

import (
	"math"
	"time"

	"cadencewright/astro/sky"
	"cadencewright/scheduler"
)

// grid is the planning grid as a duration.
const grid = gridMin * time.Minute

// upTable says when each source is up during one block, by the grid.
type upTable struct {
	block *scheduler.Block
	tel   *scheduler.Telescope
	start time.Time // the first grid instant at or after the block's start
	n     int       // instants
	// upTo[s][i] counts the instants before the i-th at which source s is up.
	upTo [][]int
	high [][]float64 // elevation, degrees
}

// newUpTable samples all sources over a block.
func newUpTable(c *scheduler.Campaign, b *scheduler.Block) *upTable {
	u := &upTable{block: b, tel: c.TelescopeByCode(b.Telescope), start: b.Start.Add(grid - 1).Truncate(grid)}
	u.n = int(b.End.Sub(u.start)/grid) + 1
	w, err := sky.NewWindow(u.tel.Site(), u.start, grid, u.n, c.DUT1S)
	if err != nil {
		panic("demo: " + err.Error()) // Generate keeps to the years that are tabulated
	}
	mask := u.tel.Mask()
	var track sky.Track
	for i := range c.Sources {
		s := &c.Sources[i]
		w.Track(s.Star(), &track)
		counts := make([]int, u.n+1)
		for k := range u.n {
			counts[k+1] = counts[k]
			if isUp(u.tel, s, mask, &track, k) {
				counts[k+1]++
			}
		}
		u.upTo = append(u.upTo, counts)
		u.high = append(u.high, append([]float64(nil), track.ElDeg[:u.n]...))
	}
	return u
}

// isUp reports whether a source may be observed at one sample: limits of
// elevation, horizon, mount and Sun.
func isUp(t *scheduler.Telescope, s *scheduler.Source, mask sky.Mask, track *sky.Track, k int) bool {
	el, ha := track.ElDeg[k], track.HADeg[k]
	if el < math.Max(t.ElevationMinDeg, mask.ElevationDeg(track.AzDeg[k])) || el > t.ElevationMaxDeg {
		return false
	}
	if track.SunDeg[k] < math.Max(t.SunMinDeg, s.SunMinDeg) {
		return false
	}
	switch t.Mount {
	case scheduler.MountEquatorial:
		return ha >= 15*t.HourAngleRangeH[0] && ha <= 15*t.HourAngleRangeH[1]
	case scheduler.MountTransit:
		return math.Abs(ha)*4*math.Cos(track.DecDeg[k]*math.Pi/180) <= t.TrackHalfMin
	}
	return true
}

// up reports whether source s is up at every grid instant from a start to an
// end, both in the block.
func (u *upTable) up(s int, start, end time.Time) bool {
	i, j := int(start.Sub(u.start)/grid), int(end.Sub(u.start)/grid)
	return i >= 0 && j < u.n && i <= j && u.upTo[s][j+1]-u.upTo[s][i] == j-i+1
}

// first is the earliest grid instant at which a scan may start.
func (u *upTable) first() time.Time {
	ready := u.block.Start.Add(time.Duration((u.tel.SetupS + u.tel.CalS) * float64(time.Second)))
	return ready.Add(grid - 1).Truncate(grid)
}
