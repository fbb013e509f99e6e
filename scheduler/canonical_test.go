package scheduler

import (
	"cmp"
	"math"
	"math/rand/v2"
	"reflect"
	"slices"
	"strings"
	"testing"
	"time"

	"pgregory.net/rapid"
)

// canonicalText is a campaign as WriteCampaign writes it: elements in order,
// keys in order, one item a line, defaults left out.
const canonicalText = `{
 "format": "campaign/1",
 "campaign": {"name": "Two telescopes", "start": "2027-01-04T00:00:00Z", "end": "2027-01-18T00:00:00Z"},
 "telescopes": [
  {"code": "AAA", "name": "First", "longitude_deg": 10, "latitude_deg": 50.5, "height_m": 100, "timezone": "Europe/Berlin", "mount": "altaz", "elevation_min_deg": 8, "elevation_max_deg": 88, "horizon": [[0, 5], [180, 7.25]], "setup_s": 600, "cal_s": 60, "switch_s": 90, "settle_s": 10, "azimuth_range_deg": [-180, 360], "rate_az_deg_s": 0.5, "rate_el_deg_s": 0.25, "receivers": [
   {"code": "L1", "bands": ["L"], "freq_mhz": 1400, "bandwidth_mhz": 400, "npol": 2, "trec_k": 20, "gain_k_per_jy": 1.5},
   {"code": "W1", "bands": ["U", "L"], "freq_mhz": 1100, "bandwidth_mhz": 900, "npol": 1, "trec_k": 25, "tatm_k": 0, "gain_k_per_jy": 1.25}
  ]},
  {"code": "BBB", "name": "Second", "longitude_deg": -70, "latitude_deg": -30, "height_m": 2000, "timezone": "America/Santiago", "mount": "equatorial", "elevation_min_deg": 10, "elevation_max_deg": 90, "sun_min_deg": 5, "setup_s": 300, "cal_s": 60, "switch_s": 90, "settle_s": 10, "hour_angle_range_h": [-6, 6], "rate_ha_deg_s": 0.4, "rate_dec_deg_s": 0.3, "receivers": [
   {"code": "L1", "bands": ["L"], "freq_mhz": 1400, "bandwidth_mhz": 300, "npol": 2, "trec_k": 22, "gain_k_per_jy": 0.9}
  ]}
 ],
 "sources": [
  {"name": "SIM J0100-2000", "ra_deg": 15, "dec_deg": -20, "period_s": 0.004, "dm_pc_cm3": 0, "flux_mjy": 1, "flux_freq_mhz": 1400, "spectral_index": -1.6, "width_s": 0.0002, "scatter_1ghz_s": 5e-8, "scan_minutes": [20, 40], "binary": {"model": "ell1", "pb_d": 1.5, "a1_ls": 1.9, "tasc_mjd": 59000, "eps1": 0, "eps2": 0}},
  {"name": "SIM J2300+1000", "ra_deg": 345, "dec_deg": 10, "period_s": 0.002, "dm_pc_cm3": 30, "flux_mjy": 2, "flux_freq_mhz": 1400, "spectral_index": 0, "width_s": 0.0001, "scan_minutes": [30]}
 ],
 "cadence_targets": [
  {"id": "c1", "source": "SIM J0100-2000", "bands": ["L"], "every_d": 7},
  {"id": "c2", "source": "SIM J2300+1000", "bands": ["U", "L"], "every_d": 14, "early_d": 0}
 ],
 "blocks": [
  {"id": "x", "telescope": "BBB", "start": "2027-01-05T00:00:00Z", "end": "2027-01-05T06:00:00Z", "receivers": ["L1"]},
  {"id": "b", "telescope": "AAA", "start": "2027-01-05T12:00:00Z", "end": "2027-01-05T18:00:00Z", "receivers": ["W1", "L1"], "lost": [["2027-01-05T13:00:00Z", "2027-01-05T13:30:00Z"], ["2027-01-05T15:00:00Z", "2027-01-05T15:30:00Z"]]}
 ],
 "history": [
  {"source": "SIM J2300+1000", "telescope": "AAA", "receiver": "L1", "start": "2026-12-30T10:00:00Z", "minutes": 30, "counted": false},
  {"source": "SIM J2300+1000", "telescope": "AAA", "receiver": "L1", "start": "2026-12-31T10:00:00.25Z", "minutes": 29.5, "counted": true}
 ]
}
`

// The canonical text reads and writes as itself, also from another order.
func TestWriteCampaignWritesTheCanonicalText(t *testing.T) {
	c, err := ReadCampaign([]byte(canonicalText))
	if err != nil {
		t.Fatal(err)
	}
	slices.Reverse(c.Telescopes)
	slices.Reverse(c.Telescopes[1].Receivers)
	slices.Reverse(c.Sources)
	slices.Reverse(c.CadenceTargets)
	slices.Reverse(c.Blocks)
	slices.Reverse(c.Blocks[0].Lost)
	slices.Reverse(c.History)
	got, err := WriteCampaign(c)
	if err != nil {
		t.Fatal(err)
	}
	have, want := strings.Split(string(got), "\n"), strings.Split(canonicalText, "\n")
	for i := range max(len(have), len(want)) {
		if i >= len(have) || i >= len(want) || have[i] != want[i] {
			t.Fatalf("line %d of\n%s", i+1, got)
		}
	}
}

// Canonical is in order, stays itself when taken again, and does not depend on
// the order it starts from.
func TestCanonicalIsInOrder(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		c := anyCampaign(t)
		d := c.Canonical()
		ordered := slices.IsSortedFunc(d.Telescopes, func(a, b Telescope) int { return cmp.Compare(a.Code, b.Code) }) &&
			slices.IsSortedFunc(d.Sources, func(a, b Source) int { return cmp.Compare(a.Name, b.Name) }) &&
			slices.IsSortedFunc(d.CadenceTargets, func(a, b CadenceTarget) int { return cmp.Compare(a.ID, b.ID) }) &&
			slices.IsSortedFunc(d.Blocks, func(a, b Block) int { return a.Start.Compare(b.Start) }) &&
			slices.IsSortedFunc(d.History, func(a, b HistoryScan) int { return a.Start.Compare(b.Start) }) &&
			slices.IsSortedFunc(d.Pins, func(a, b Pin) int { return a.Start.Compare(b.Start) })
		if !ordered {
			t.Fatal("the canonical form is not in order")
		}
		if !reflect.DeepEqual(d.Canonical(), d) {
			t.Fatal("the canonical form has another canonical form")
		}
		r := rand.New(rand.NewPCG(rapid.Uint64().Draw(t, "seed"), 0))
		e := c.Clone()
		swapped(r, e.Telescopes)
		swapped(r, e.Sources)
		swapped(r, e.CadenceTargets)
		swapped(r, e.Blocks)
		swapped(r, e.History)
		if !reflect.DeepEqual(e.Canonical(), d) || !e.Equal(c) || !c.Equal(e) {
			t.Fatal("another order gives another canonical form")
		}
	})
}

// Two campaigns that differ in a single value are not equal, and a value
// changed back makes them equal again.
func TestEqualSeesEveryValue(t *testing.T) {
	c := everyField(t)
	d := c.Clone()
	all := leaves(reflect.ValueOf(d).Elem())
	if len(all) < 200 {
		t.Fatalf("only %d values in the campaign", len(all))
	}
	for i, v := range all {
		before := reflect.ValueOf(v.Interface())
		switch v.Kind() {
		case reflect.Struct:
			v.Set(reflect.ValueOf(v.Interface().(time.Time).Add(time.Millisecond)))
		case reflect.Float64:
			v.SetFloat(math.Nextafter(v.Float(), math.Inf(1)))
		case reflect.Int:
			v.SetInt(v.Int() + 1)
		case reflect.Bool:
			v.SetBool(!v.Bool())
		case reflect.String:
			v.SetString(v.String() + "'")
		}
		if c.Equal(d) {
			t.Errorf("value %d, %v, changed to %v, and the campaigns are still equal", i, before, v)
		}
		v.Set(before)
	}
	if !c.Equal(d) {
		t.Error("everything changed back, and the campaigns differ")
	}
}

// Differences below the resolution of a millisecond do not count.
func TestEqualIgnoresMicroseconds(t *testing.T) {
	c := everyField(t)
	d := c.Clone()
	for _, v := range leaves(reflect.ValueOf(d).Elem()) {
		if v.Type() == timeType {
			at := v.Interface().(time.Time)
			v.Set(reflect.ValueOf(at.Add(300 * time.Microsecond).In(time.FixedZone("", -7200))))
		}
	}
	if !c.Equal(d) {
		t.Error("microseconds or a time zone make campaigns differ")
	}
	a, err1 := WriteCampaign(c)
	b, err2 := WriteCampaign(d)
	if err1 != nil || err2 != nil || string(a) != string(b) {
		t.Errorf("microseconds or a time zone make files differ, %v %v", err1, err2)
	}
}

// An index finds what a search finds, for any campaign.
func TestIndexAgreesWithSearch(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		c := anyCampaign(t)
		x := NewIndex(c)
		names := []string{"", "absent"}
		for i := range c.Telescopes {
			names = append(names, c.Telescopes[i].Code)
		}
		for i := range c.Sources {
			names = append(names, c.Sources[i].Name)
		}
		for i := range c.Blocks {
			names = append(names, c.Blocks[i].ID)
		}
		c.EachGoal(func(_ GoalKind, _ int, g *Goal) { names = append(names, g.ID) })
		for _, n := range names {
			if x.Telescope(n) != c.TelescopeByCode(n) || x.Source(n) != c.SourceByName(n) || x.Block(n) != c.BlockByID(n) || x.Goal(n) != c.GoalByID(n) {
				t.Fatalf("index and search differ on %q", n)
			}
		}
		for i := range c.Blocks {
			b := &c.Blocks[i]
			if tel := c.TelescopeByCode(b.Telescope); x.Receiver(b.Telescope, b.Receivers[0]) != tel.ReceiverByCode(b.Receivers[0]) {
				t.Fatalf("index and search differ on a receiver of %q", b.Telescope)
			}
		}
	})
}
