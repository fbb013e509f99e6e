package scheduler

import (
	"cmp"
	"reflect"
	"slices"
	"time"
)

// WriteCampaign writes a campaign file in its canonical form: elements in
// canonical order (see Canonical), keys in the order of the planning model,
// defaults left out, numbers in the shortest form that reads back exactly,
// instants to the millisecond. Campaigns that are Equal give the same bytes.
// It does not change c. A campaign that Validate refuses is not written; the
// error is then Validate's.
func WriteCampaign(c *Campaign) ([]byte, error) {
	if err := c.Validate(); err != nil {
		return nil, err
	}
	return writeFile(&campaignFile, c.Canonical())
}

// WritePlan writes a plan file: scans and unmet units in the order they have,
// prices by name, numbers in the shortest form that reads back exactly. The
// same plan always gives the same bytes.
func WritePlan(p *Plan) ([]byte, error) {
	var c checker
	planFile.check(&c, p)
	checkPlan(&c, p)
	if err := c.err(); err != nil {
		return nil, err
	}
	return writeFile(&planFile, p)
}

// writeFile writes one document, with a line break at its end.
func writeFile(t *table, obj any) ([]byte, error) {
	var w writer
	t.write(&w, obj)
	if w.err != nil {
		return nil, w.err
	}
	return append(w.b, '\n'), nil
}

// Clone is a deep copy: nothing done to it changes c.
func (c *Campaign) Clone() *Campaign { return clone(c) }

// Clone is a deep copy: nothing done to it changes p.
func (p *Plan) Clone() *Plan { return clone(p) }

// Equal reports whether two campaigns mean the same: the same elements in
// whatever order, instants equal to the millisecond.
func (c *Campaign) Equal(d *Campaign) bool { return reflect.DeepEqual(c.Canonical(), d.Canonical()) }

// Canonical is a copy of the campaign with its elements in canonical order and
// every instant in UTC, rounded to the millisecond: telescopes and receivers by
// code, sources by name, goals by id, blocks by start, telescope and id, lost
// parts and history by start, pins by start and block. Lists whose order people
// choose or that rules number (bands, receivers of a block, telescopes of a
// goal, phase windows) stay as they are.
func (c *Campaign) Canonical() *Campaign {
	d := c.Clone()
	slices.SortStableFunc(d.Telescopes, func(a, b Telescope) int { return cmp.Compare(a.Code, b.Code) })
	for i := range d.Telescopes {
		slices.SortStableFunc(d.Telescopes[i].Receivers, func(a, b Receiver) int { return cmp.Compare(a.Code, b.Code) })
	}
	slices.SortStableFunc(d.Sources, func(a, b Source) int { return cmp.Compare(a.Name, b.Name) })
	slices.SortStableFunc(d.CadenceTargets, func(a, b CadenceTarget) int { return cmp.Compare(a.ID, b.ID) })
	slices.SortStableFunc(d.PhaseGoals, func(a, b PhaseGoal) int { return cmp.Compare(a.ID, b.ID) })
	slices.SortStableFunc(d.OverlapGoals, func(a, b OverlapGoal) int { return cmp.Compare(a.ID, b.ID) })
	slices.SortStableFunc(d.BandPairGoals, func(a, b BandPairGoal) int { return cmp.Compare(a.ID, b.ID) })
	for i := range d.Blocks {
		slices.SortStableFunc(d.Blocks[i].Lost, func(a, b Span) int {
			return cmp.Or(a.Start.Compare(b.Start), a.End.Compare(b.End))
		})
	}
	slices.SortStableFunc(d.Blocks, compareBlocks)
	slices.SortStableFunc(d.History, compareHistory)
	slices.SortStableFunc(d.Pins, comparePins)
	return d
}

// compareBlocks is the order in which blocks are shown and planned: by start,
// then telescope, then id.
func compareBlocks(a, b Block) int {
	return cmp.Or(a.Start.Compare(b.Start), cmp.Compare(a.Telescope, b.Telescope), cmp.Compare(a.ID, b.ID))
}

// compareHistory looks at every field, so that scans it calls equal are the
// same scan twice, and their order cannot matter.
func compareHistory(a, b HistoryScan) int {
	counted := func(h HistoryScan) int {
		if h.Counted {
			return 1
		}
		return 0
	}
	return cmp.Or(a.Start.Compare(b.Start), cmp.Compare(a.Telescope, b.Telescope), cmp.Compare(a.Source, b.Source),
		cmp.Compare(a.Receiver, b.Receiver), cmp.Compare(a.Minutes, b.Minutes), counted(a)-counted(b))
}

// comparePins looks at every field, as compareHistory does.
func comparePins(a, b Pin) int {
	return cmp.Or(a.Start.Compare(b.Start), cmp.Compare(a.Block, b.Block), cmp.Compare(a.Source, b.Source),
		cmp.Compare(a.Receiver, b.Receiver), cmp.Compare(a.Minutes, b.Minutes))
}

var timeType = reflect.TypeFor[time.Time]()

// clone copies anything made of the types of this package: empty lists become
// nil, instants UTC and whole milliseconds.
func clone[T any](v *T) *T {
	out := new(T)
	copyValue(reflect.ValueOf(out).Elem(), reflect.ValueOf(v).Elem())
	return out
}

// copyValue copies one value deeply.
func copyValue(to, from reflect.Value) {
	switch from.Kind() {
	case reflect.Struct:
		if from.Type() == timeType {
			t := from.Interface().(time.Time)
			to.Set(reflect.ValueOf(t.UTC().Round(time.Millisecond)))
			return
		}
		for i := range from.NumField() {
			copyValue(to.Field(i), from.Field(i))
		}
	case reflect.Slice:
		if from.Len() == 0 {
			return
		}
		to.Set(reflect.MakeSlice(from.Type(), from.Len(), from.Len()))
		if k := from.Type().Elem().Kind(); k == reflect.String || k == reflect.Float64 || k == reflect.Int {
			reflect.Copy(to, from)
			return
		}
		for i := range from.Len() {
			copyValue(to.Index(i), from.Index(i))
		}
	case reflect.Array:
		for i := range from.Len() {
			copyValue(to.Index(i), from.Index(i))
		}
	case reflect.Pointer:
		if !from.IsNil() {
			to.Set(reflect.New(from.Type().Elem()))
			copyValue(to.Elem(), from.Elem())
		}
	case reflect.Map:
		if from.IsNil() {
			return
		}
		to.Set(reflect.MakeMapWithSize(from.Type(), from.Len()))
		for m := from.MapRange(); m.Next(); {
			to.SetMapIndex(m.Key(), m.Value())
		}
	default:
		to.Set(from)
	}
}
