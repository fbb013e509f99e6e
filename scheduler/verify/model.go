package verify

import (
	"time"

	"cadencewright/astro"
	"cadencewright/astro/sensitivity"
	"cadencewright/astro/sky"
	"cadencewright/scheduler"
)

// model is a campaign seen over one horizon: what there is, and what can be
// earned. It does not change once built.
type model struct {
	campaign *scheduler.Campaign
	horizon  scheduler.Horizon
	from, to msec // the horizon
	grid     msec // step of the planning grid

	// By name, as the files have them.

	telescopes map[string]*telescope
	sources    map[string]*source

	blocks    []*block // that start in the horizon, in time order
	blockByID map[string]*block
	pins      []*pin // in those blocks

	// What can be earned. A unit's index is its place in units; prices, takers
	// and the like are slices by that index.
	groups []*group
	units  []*unit
	byName map[string]*unit
}

// telescope is a site, a mount and receivers.
type telescope struct {
	*scheduler.Telescope
	site      astro.Geodetic
	mask      sky.Mask
	zone      *time.Location
	receivers map[string]*receiver
}

// receiver is one front end at its telescope.
type receiver struct {
	*scheduler.Receiver
	telescope *telescope
	index     int // over all receivers of the campaign
}

// source is a pulsar with what is wanted of it.
type source struct {
	*scheduler.Source
	star    astro.Star
	groups  []*group
	history []*made // counted and before the horizon, by start

	// One a receiver of the campaign, by its index: what the sky, the pulsar
	// and the receiver make of a second of time is asked for millions of times.
	radiometer []sensitivity.Radiometer
}

// made is a scan of the history that counts.
type made struct {
	receiver   *receiver
	start, end msec
}

// block is a stretch of awarded time.
type block struct {
	*scheduler.Block
	telescope  *telescope
	receivers  []*receiver
	start, end msec
	lost       [][2]msec
	pins       []*pin
}

// pin is a scan that must stand.
type pin struct {
	*scheduler.Pin
	block      *block
	source     *source
	receiver   *receiver
	start, end msec
}

// newModel looks at a valid campaign over a horizon. It trusts the campaign:
// names resolve, numbers lie in their ranges, blocks of a telescope are apart.
func newModel(c *scheduler.Campaign, h scheduler.Horizon) (*model, error) {
	m := &model{campaign: c, horizon: h, from: instantOf(h.From), to: instantOf(h.To), grid: msec(c.GridMin) * minute,
		telescopes: map[string]*telescope{}, sources: map[string]*source{}, blockByID: map[string]*block{}, byName: map[string]*unit{}}
	all, err := m.addTelescopes()
	if err != nil {
		return nil, err
	}
	m.addSources(all)
	m.addHistory()
	for _, b := range h.Blocks(c) {
		m.addBlock(b)
	}
	m.addPins()
	if err := m.addGoals(); err != nil {
		return nil, err
	}
	return m, nil
}

// addTelescopes gives all receivers of the campaign.
func (m *model) addTelescopes() ([]*receiver, error) {
	var all []*receiver
	for i := range m.campaign.Telescopes {
		t := &telescope{Telescope: &m.campaign.Telescopes[i], receivers: map[string]*receiver{}}
		t.site = astro.Geodetic{Lon: astro.FromDeg(t.LongitudeDeg), Lat: astro.FromDeg(t.LatitudeDeg), HeightM: t.HeightM}
		for _, p := range t.Horizon {
			t.mask = append(t.mask, sky.MaskPoint{AzDeg: p.AzimuthDeg, ElDeg: p.ElevationDeg})
		}
		var err error
		if t.zone, err = t.Location(); err != nil {
			return nil, err
		}
		for j := range t.Receivers {
			r := &receiver{Receiver: &t.Receivers[j], telescope: t, index: len(all)}
			t.receivers[r.Code] = r
			all = append(all, r)
		}
		m.telescopes[t.Code] = t
	}
	return all, nil
}

func (m *model) addSources(all []*receiver) {
	for i := range m.campaign.Sources {
		s := &source{Source: &m.campaign.Sources[i]}
		s.star = astro.Star{RA: astro.FromDeg(s.RADeg), Dec: astro.FromDeg(s.DecDeg), PosEpochMJD: s.PosEpochMJD,
			PMRAMasYr: s.PMRAMasYr, PMDecMasYr: s.PMDecMasYr}
		for _, r := range all {
			s.radiometer = append(s.radiometer, newRadiometer(s, r))
		}
		m.sources[s.Name] = s
	}
}

func (m *model) addHistory() {
	for _, h := range m.campaign.History {
		if !h.Counted || !h.Start.Before(m.horizon.From) {
			continue
		}
		s, start := m.sources[h.Source], instantOf(h.Start)
		s.history = append(s.history, &made{receiver: m.telescopes[h.Telescope].receivers[h.Receiver],
			start: start, end: start + lengthOf(h.Minutes, minute)})
	}
	for _, s := range m.sources {
		sortByStart(s.history, func(h *made) msec { return h.start })
	}
}

func (m *model) addBlock(b *scheduler.Block) {
	own := &block{Block: b, telescope: m.telescopes[b.Telescope], start: instantOf(b.Start), end: instantOf(b.End)}
	for _, code := range b.Receivers {
		own.receivers = append(own.receivers, own.telescope.receivers[code])
	}
	for _, l := range b.Lost {
		own.lost = append(own.lost, [2]msec{instantOf(l.Start), instantOf(l.End)})
	}
	m.blocks = append(m.blocks, own)
	m.blockByID[b.ID] = own
}

func (m *model) addPins() {
	for i := range m.campaign.Pins {
		p := &pin{Pin: &m.campaign.Pins[i]}
		if p.block = m.blockByID[p.Block]; p.block == nil {
			continue
		}
		p.source, p.receiver = m.sources[p.Source], p.block.telescope.receivers[p.Receiver]
		p.start = instantOf(p.Start)
		p.end = p.start + msec(p.Minutes)*minute
		p.block.pins = append(p.block.pins, p)
		m.pins = append(m.pins, p)
	}
}

// possible is the sum of the weights of all units.
func (m *model) possible() float64 {
	sum := 0.0
	for _, u := range m.units {
		sum += u.weight
	}
	return sum
}

// hasReceiver reports whether the block has the receiver.
func (b *block) hasReceiver(r *receiver) bool {
	for _, own := range b.receivers {
		if own == r {
			return true
		}
	}
	return false
}

// ready is how long the telescope needs at the start of a block, and after a
// lost part, before a scan can begin.
func (t *telescope) ready() msec { return lengthOf(t.SetupS+t.CalS, second) }

// gap is the least time between two scans, travel left out, in grid steps. The
// model leaves travel and receiver changes out of the bound: it then holds for
// every order of scans, and a block's best set is a simple programme.
func (m *model) gap(t *telescope) int64 { return ceilDiv(lengthOf(t.SettleS+t.CalS, second), m.grid) }
