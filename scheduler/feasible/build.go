package feasible

import (
	"errors"
	"fmt"
	"math"
	"time"

	"cadencewright/astro"
	"cadencewright/astro/sky"
	"cadencewright/scheduler"
	"cadencewright/scheduler/units"
)

// ErrStopped says that a problem was not built to its end because it was asked
// to stop.
var ErrStopped = errors.New("stopped before the sky was read to the end of the horizon")

// Build samples the sky for every block of the horizon. The campaign must be
// valid.
func Build(c *scheduler.Campaign, h scheduler.Horizon) (*Problem, error) {
	return BuildUntil(c, h, nil)
}

// BuildUntil is Build with a way out: stop, if not nil, is asked before each
// source of each block, by the caller's goroutine, and once it says true the
// error is ErrStopped. A large campaign takes some tenths of a second, one
// source of one block well below a millisecond.
func BuildUntil(c *scheduler.Campaign, h scheduler.Horizon, stop func() bool) (*Problem, error) {
	if stop == nil {
		stop = func() bool { return false }
	}
	if stop() {
		return nil, ErrStopped
	}
	set, err := units.Build(c, h)
	if err != nil {
		return nil, err
	}
	p := &Problem{Campaign: c, Horizon: h, Units: set, GridMin: c.GridMin}
	b := &builder{p: p, ix: scheduler.NewIndex(c), tel: map[string]int{}, src: map[string]int{}, stop: stop}
	for i := range c.Telescopes {
		b.tel[c.Telescopes[i].Code] = i
	}
	for i := range c.Sources {
		b.src[c.Sources[i].Name] = i
		b.stars = append(b.stars, c.Sources[i].Star())
	}
	if err := b.radiometers(); err != nil {
		return nil, err
	}
	for i := range c.Blocks {
		bl := &c.Blocks[i]
		if bl.Start.Before(h.From) || !bl.Start.Before(h.To) {
			continue
		}
		block, err := b.block(i)
		if err != nil {
			return nil, fmt.Errorf("block %s: %w", bl.ID, err)
		}
		p.Blocks = append(p.Blocks, *block)
	}
	return p, nil
}

type builder struct {
	p     *Problem
	ix    *scheduler.Index
	tel   map[string]int
	src   map[string]int
	stars []astro.Star
	radio [][][]radio // by telescope, receiver, source
	stop  func() bool

	// Buffers that every block uses again.
	track sky.Track
	ok    []bool
	bad   []int
	rate  []float64
}

// mountOf is a telescope's mount.
func mountOf(t *scheduler.Telescope) Mount {
	m := Mount{Kind: t.Mount, AzRange: t.AzimuthRangeDeg, SettleS: t.SettleS, CalS: t.CalS, SwitchS: t.SwitchS, SetupS: t.SetupS}
	switch t.Mount {
	case scheduler.MountEquatorial:
		m.Axis1, m.Axis2 = sky.Axis{RateDegS: t.RateHADegS, AccelDegS2: t.AccelHADegS2}, sky.Axis{RateDegS: t.RateDecDegS, AccelDegS2: t.AccelDecDegS2}
	case scheduler.MountAltAz:
		m.Axis1, m.Axis2 = sky.Axis{RateDegS: t.RateAzDegS, AccelDegS2: t.AccelAzDegS2}, sky.Axis{RateDegS: t.RateElDegS, AccelDegS2: t.AccelElDegS2}
	case scheduler.MountTransit:
		m.Axis2 = sky.Axis{RateDegS: t.RateElDegS, AccelDegS2: t.AccelElDegS2}
	}
	return m
}

// ceilGrid is seconds in whole grid steps, rounded up.
func ceilGrid(s float64, gridMin int) int {
	return int(math.Ceil(s/60/float64(gridMin) - 1e-9))
}

// block samples one block.
func (b *builder) block(i int) (*Block, error) {
	bl := &b.p.Campaign.Blocks[i]
	g := b.p.GridMin
	tel := b.tel[bl.Telescope]
	t := &b.p.Campaign.Telescopes[tel]
	first := int(math.Ceil(units.Minutes(bl.Start)/float64(g)-1e-9)) * g
	last := int(math.Floor(units.Minutes(bl.End)/float64(g)+1e-9)) * g
	out := &Block{Index: i, Telescope: tel, FirstMin: first, Steps: max(0, (last-first)/g), Mount: mountOf(t),
		MinGap: ceilGrid(t.SettleS+t.CalS, g), at: make([]int, len(b.p.Campaign.Sources))}
	for s := range out.at {
		out.at[s] = -1
	}
	for _, code := range bl.Receivers {
		for j := range t.Receivers {
			if t.Receivers[j].Code == code {
				out.Receivers = append(out.Receivers, j)
			}
		}
	}
	if err := b.pins(out, bl); err != nil {
		return nil, err
	}
	if out.Steps < 1 {
		return out, nil
	}
	half := time.Duration(g) * time.Minute / 2
	w, err := sky.NewWindow(t.Site(), units.Instant(float64(first)), half, 2*out.Steps+1, b.p.Campaign.DUT1S)
	if err != nil {
		return nil, err
	}
	fractions, err := b.fractions(t, out)
	if err != nil {
		return nil, err
	}
	lims := newLimits(t)
	for s := range b.p.Campaign.Sources {
		if len(b.p.Units.BySource[s]) == 0 && !pinned(out, s) {
			continue
		}
		if b.stop() {
			return nil, ErrStopped
		}
		w.Track(b.stars[s], &b.track)
		b.place(out, bl, lims, s, fractions)
	}
	return out, nil
}

func pinned(b *Block, source int) bool {
	for _, p := range b.Pins {
		if p.Source == source {
			return true
		}
	}
	return false
}

// pins are the block's pins on its grid.
func (b *builder) pins(out *Block, bl *scheduler.Block) error {
	for i := range b.p.Campaign.Pins {
		p := &b.p.Campaign.Pins[i]
		if p.Block != bl.ID {
			continue
		}
		src, ok := b.src[p.Source]
		if !ok {
			return fmt.Errorf("pin %d: no such source: %s", i, p.Source)
		}
		pin := Pin{Index: i, Source: src, Receiver: -1, Minutes: p.Minutes, Steps: p.Minutes / b.p.GridMin,
			Start: (int(math.Round(units.Minutes(p.Start))) - out.FirstMin) / b.p.GridMin}
		for j, code := range bl.Receivers {
			if code == p.Receiver {
				pin.Receiver = j
			}
		}
		if pin.Receiver < 0 {
			return fmt.Errorf("pin %d: block %s has no receiver %s", i, bl.ID, p.Receiver)
		}
		out.Pins = append(out.Pins, pin)
	}
	return nil
}
