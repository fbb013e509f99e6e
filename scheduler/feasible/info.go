package feasible

import (
	"math"
	"time"

	"cadencewright/astro/sensitivity"
	"cadencewright/scheduler"
)

// radio is a receiver looking at a source.
type radio struct {
	meter sensitivity.Radiometer
	use   bool // some goal of the source can use it, or it is pinned
}

// radiometers prepares every receiver for every source.
func (b *builder) radiometers() error {
	c := b.p.Campaign
	for ti := range c.Telescopes {
		t := &c.Telescopes[ti]
		perRx := make([][]radio, len(t.Receivers))
		for ri := range t.Receivers {
			perRx[ri] = make([]radio, len(c.Sources))
			for si := range c.Sources {
				perRx[ri][si] = radio{Radiometer(&c.Sources[si], &t.Receivers[ri]), b.serves(ti, ri, si)}
			}
		}
		b.radio = append(b.radio, perRx)
	}
	for i := range c.Pins {
		p := &c.Pins[i]
		bl := b.ix.Block(p.Block)
		if bl == nil {
			continue
		}
		t := &c.Telescopes[b.tel[bl.Telescope]]
		for ri := range t.Receivers {
			if t.Receivers[ri].Code == p.Receiver {
				b.radio[b.tel[bl.Telescope]][ri][b.src[p.Source]].use = true
			}
		}
	}
	return nil
}

// serves tells whether some unit of the source can use a receiver.
func (b *builder) serves(tel, rx, src int) bool {
	set := b.p.Units
	if !set.Detectable(src, tel, rx) {
		return false
	}
	for _, u := range set.BySource[src] {
		if set.Bands(&set.Goals[set.Units[u].Goal], tel, rx) != 0 {
			return true
		}
	}
	return false
}

// Radiometer is a receiver looking at a source.
func Radiometer(s *scheduler.Source, r *scheduler.Receiver) sensitivity.Radiometer {
	return sensitivity.NewRadiometer(s.Pulsar(), r.FrontEnd())
}

// fractions is the usable part of each receiver's band at every mid-step of
// the block, nil where it is all.
func (b *builder) fractions(t *scheduler.Telescope, out *Block) ([][]float64, error) {
	list := make([][]float64, len(out.Receivers))
	var hours []int
	for j, ri := range out.Receivers {
		loss := t.Receivers[ri].RFILoss
		if len(loss) == 0 {
			continue
		}
		if hours == nil {
			zone, err := t.Location()
			if err != nil {
				return nil, err
			}
			hours = localHours(zone, out, b.p.GridMin)
		}
		f := make([]float64, out.Steps)
		for k := range f {
			f[k] = 1 - loss[hours[k]]
		}
		list[j] = f
	}
	return list, nil
}

// localHours is the hour of the telescope's clock at every mid-step. Clocks
// change at whole quarters of an hour.
func localHours(zone *time.Location, out *Block, gridMin int) []int {
	hours := make([]int, out.Steps)
	quarter, hour := int64(-1), 0
	for k := range hours {
		mid := float64(out.FirstMin) + (float64(k)+0.5)*float64(gridMin)
		if q := int64(math.Floor(mid / 15)); q != quarter {
			quarter, hour = q, time.Unix(q*900, 0).In(zone).Hour()
		}
		hours[k] = hour
	}
	return hours
}

// info sums the information of every useful receiver over the steps from Lo.
func (b *builder) info(pl *Place, out *Block, hi int, fractions [][]float64) {
	pl.Info = make([][]float64, len(out.Receivers))
	step := float64(b.p.GridMin) * 60
	n := hi - pl.Lo
	b.rate = grow(b.rate, n)
	for k := 0; k+1 < n; k++ { // the sine of the elevation at mid-steps
		el := b.track.ElDeg[2*(pl.Lo+k)+1]
		b.rate[k] = math.Sin(math.Max(el, 0.1) * math.Pi / 180)
	}
	for j, ri := range out.Receivers {
		r := &b.radio[out.Telescope][ri][pl.Source]
		if !r.use || !r.meter.Detectable() {
			continue
		}
		sum := make([]float64, n)
		for k := 0; k+1 < n; k++ {
			f := 1.0
			if fractions[j] != nil {
				f = fractions[j][pl.Lo+k]
			}
			sum[k+1] = sum[k] + r.meter.InfoRate(b.rate[k], f)*step
		}
		pl.Info[j] = sum
	}
}
