package scheduler

import "time"

// TelescopeByCode is the telescope with the code, or nil.
func (c *Campaign) TelescopeByCode(code string) *Telescope {
	for i := range c.Telescopes {
		if c.Telescopes[i].Code == code {
			return &c.Telescopes[i]
		}
	}
	return nil
}

// SourceByName is the source with the name, or nil.
func (c *Campaign) SourceByName(name string) *Source {
	for i := range c.Sources {
		if c.Sources[i].Name == name {
			return &c.Sources[i]
		}
	}
	return nil
}

// BlockByID is the block with the id, or nil.
func (c *Campaign) BlockByID(id string) *Block {
	for i := range c.Blocks {
		if c.Blocks[i].ID == id {
			return &c.Blocks[i]
		}
	}
	return nil
}

// GoalByID is what the goal with the id has in common with all kinds, or nil.
func (c *Campaign) GoalByID(id string) *Goal {
	var found *Goal
	c.EachGoal(func(_ GoalKind, _ int, g *Goal) {
		if found == nil && g.ID == id {
			found = g
		}
	})
	return found
}

// GoalKind names one of the four kinds of goal.
type GoalKind string

// The four kinds of goal.
const (
	KindCadence  GoalKind = "cadence"
	KindPhase    GoalKind = "phase"
	KindOverlap  GoalKind = "overlap"
	KindBandPair GoalKind = "pair"
)

// EachGoal calls f for every goal: cadence targets, phase, overlap, then
// band-pair goals, each list in its order. i is the index in its own list, and
// g points into the campaign.
func (c *Campaign) EachGoal(f func(kind GoalKind, i int, g *Goal)) {
	for i := range c.CadenceTargets {
		f(KindCadence, i, &c.CadenceTargets[i].Goal)
	}
	for i := range c.PhaseGoals {
		f(KindPhase, i, &c.PhaseGoals[i].Goal)
	}
	for i := range c.OverlapGoals {
		f(KindOverlap, i, &c.OverlapGoals[i].Goal)
	}
	for i := range c.BandPairGoals {
		f(KindBandPair, i, &c.BandPairGoals[i].Goal)
	}
}

// ReceiverByCode is the telescope's receiver with the code, or nil.
func (t *Telescope) ReceiverByCode(code string) *Receiver {
	for i := range t.Receivers {
		if t.Receivers[i].Code == code {
			return &t.Receivers[i]
		}
	}
	return nil
}

// Location is the telescope's time zone.
func (t *Telescope) Location() (*time.Location, error) { return loadZone(t.Timezone) }

// HasBand reports whether the receiver has the band.
func (r *Receiver) HasBand(band string) bool { return contains(r.Bands, band) }

// AllowsTelescope reports whether the telescope may serve the goal: it is one
// of those named, or none is.
func (g *Goal) AllowsTelescope(code string) bool {
	return len(g.Telescopes) == 0 || contains(g.Telescopes, code)
}

// BandsOf are the goal's bands that the receiver has, in the goal's order.
func (g *Goal) BandsOf(r *Receiver) []string {
	var common []string
	for _, b := range g.Bands {
		if r.HasBand(b) {
			common = append(common, b)
		}
	}
	return common
}

// End is the instant the scan was over.
func (h HistoryScan) End() time.Time { return h.Start.Add(minutes(h.Minutes)) }

// End is the instant the pinned scan is over.
func (p Pin) End() time.Time { return p.Start.Add(time.Duration(p.Minutes) * time.Minute) }

// Duration is how long the block lasts, lost parts included.
func (b *Block) Duration() time.Duration { return b.End.Sub(b.Start) }

// Index finds the things of one campaign by name in constant time. It is built
// once; a campaign whose lists change needs a new one.
type Index struct {
	Campaign *Campaign

	telescopes map[string]*Telescope
	sources    map[string]*Source
	receivers  map[[2]string]*Receiver
	blocks     map[string]*Block
	goals      map[string]*Goal
}

// NewIndex builds the index of a campaign. Where a name stands twice, which no
// valid campaign has, the first counts.
func NewIndex(c *Campaign) *Index {
	x := &Index{
		Campaign:   c,
		telescopes: make(map[string]*Telescope, len(c.Telescopes)),
		sources:    make(map[string]*Source, len(c.Sources)),
		receivers:  map[[2]string]*Receiver{},
		blocks:     make(map[string]*Block, len(c.Blocks)),
		goals:      map[string]*Goal{},
	}
	for i := range c.Telescopes {
		t := &c.Telescopes[i]
		setOnce(x.telescopes, t.Code, t)
		for j := range t.Receivers {
			setOnce(x.receivers, [2]string{t.Code, t.Receivers[j].Code}, &t.Receivers[j])
		}
	}
	for i := range c.Sources {
		setOnce(x.sources, c.Sources[i].Name, &c.Sources[i])
	}
	for i := range c.Blocks {
		setOnce(x.blocks, c.Blocks[i].ID, &c.Blocks[i])
	}
	c.EachGoal(func(_ GoalKind, _ int, g *Goal) { setOnce(x.goals, g.ID, g) })
	return x
}

// Telescope is the telescope with the code, or nil.
func (x *Index) Telescope(code string) *Telescope { return x.telescopes[code] }

// Source is the source with the name, or nil.
func (x *Index) Source(name string) *Source { return x.sources[name] }

// Receiver is a telescope's receiver, or nil.
func (x *Index) Receiver(telescope, receiver string) *Receiver {
	return x.receivers[[2]string{telescope, receiver}]
}

// Block is the block with the id, or nil.
func (x *Index) Block(id string) *Block { return x.blocks[id] }

// Goal is the common part of the goal with the id, or nil.
func (x *Index) Goal(id string) *Goal { return x.goals[id] }

// setOnce keeps the first value of a key.
func setOnce[K comparable, V any](m map[K]*V, key K, v *V) {
	if _, ok := m[key]; !ok {
		m[key] = v
	}
}

// contains reports whether list holds s.
func contains(list []string, s string) bool {
	for _, x := range list {
		if x == s {
			return true
		}
	}
	return false
}

// minutes is a number of minutes as a duration, to the millisecond.
func minutes(m float64) time.Duration {
	return time.Duration(m*60000+0.5) * time.Millisecond
}

// loadZone finds an IANA time zone. "Local" and "" mean no place on Earth and
// are refused.
func loadZone(name string) (*time.Location, error) {
	if name == "" || name == "Local" {
		return nil, Errorf(ErrInvalid, "time zone %s is not an IANA name such as Europe/Berlin", quote(name))
	}
	loc, err := time.LoadLocation(name)
	if err != nil {
		return nil, Errorf(ErrInvalid, "time zone %s is not an IANA name such as Europe/Berlin", quote(name))
	}
	return loc, nil
}
