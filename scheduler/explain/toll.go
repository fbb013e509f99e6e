package explain

import (
	"math"
	"slices"

	"cadencewright/scheduler"
	"cadencewright/scheduler/feasible"
	"cadencewright/scheduler/units"
)

// Tolls are minutes, degrees or hours, one sort in each world, so that they can
// be compared; a receiver more is one whatever it is.

// toll is what an option owes to the world not being the real one.
func (w *world) toll(o *option) float64 {
	switch w.kind {
	case ScanLength:
		m := o.steps * w.GridMin
		return heavy * float64(distance(m, nearestLength(w.q.source.ScanMinutes, m)))
	case Receiver:
		if slices.Contains(w.base.index.Block(w.blockOf(o).ID).Receivers, w.receiverOf(o)) {
			return 0
		}
		return heavy
	case LowerLimit:
		b := &w.Blocks[o.block]
		return heavy * math.Max(0, w.base.Campaign.Telescopes[b.Telescope].ElevationMinDeg-w.lowest(b, o))
	case LongerBlock:
		early, late := w.outside(o)
		return heavy * (early + late)
	}
	if w.spares[w.blockOf(o).ID] {
		return heavy * (float64(o.steps*w.GridMin) + w.readyMin(o)) / 60
	}
	return 0
}

func (w *world) blockOf(o *option) *scheduler.Block {
	return &w.Campaign.Blocks[w.Blocks[o.block].Index]
}

// receiverOf is the code of an option's receiver.
func (w *world) receiverOf(o *option) string {
	b := &w.Blocks[o.block]
	return w.Campaign.Telescopes[b.Telescope].Receivers[b.Receivers[o.receiver]].Code
}

// readyMin is the time in minutes from a block's start to its first scan.
func (w *world) readyMin(o *option) float64 {
	m := &w.Blocks[o.block].Mount
	return (m.SetupS + m.CalS) / 60
}

// outside is by how many whole minutes an option needs its block to begin
// earlier and to end later.
func (w *world) outside(o *option) (early, late float64) {
	real := w.base.index.Block(w.blockOf(o).ID)
	if real == nil {
		return math.Inf(1), 0
	}
	// People give whole minutes; a block of 59.5 min would be odd.
	early = math.Ceil(units.Minutes(real.Start) - (o.startMin - w.readyMin(o)) - units.MS)
	late = math.Ceil(o.endMin - units.Minutes(real.End) - units.MS)
	return math.Max(0, early), math.Max(0, late)
}

// lowest is the least elevation of an option in degrees. Mounts that do not
// move in elevation have it at one of the scan's ends.
func (w *world) lowest(b *feasible.Block, o *option) float64 {
	i, j := o.start-o.place.Lo, o.start+o.steps-o.place.Lo
	t := &w.Campaign.Telescopes[b.Telescope]
	if b.Mount.Kind == scheduler.MountAltAz {
		low := math.Inf(1)
		for _, el := range o.place.Axis2[i : j+1] {
			low = math.Min(low, el)
		}
		return low
	}
	at := func(k int) float64 {
		ha, dec := o.place.Axis1[k], o.place.Axis2[k]
		if b.Mount.Kind == scheduler.MountTransit { // at the end of its track, which is the worst
			ha = t.TrackHalfMin / 4 / math.Max(math.Cos(dec*math.Pi/180), 1e-6)
		}
		// The altitude of a point on the sphere, from hour angle and declination.
		sinLat, cosLat := math.Sincos(t.LatitudeDeg * math.Pi / 180)
		sinDec, cosDec := math.Sincos(dec * math.Pi / 180)
		return math.Asin(sinLat*sinDec+cosLat*cosDec*math.Cos(ha*math.Pi/180)) * 180 / math.Pi
	}
	return math.Min(at(i), at(j))
}
