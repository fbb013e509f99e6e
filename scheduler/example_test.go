package scheduler_test

import (
	"errors"
	"fmt"
	"time"

	"cadencewright/scheduler"
)

// small is a campaign of one telescope, one pulsar, one goal and one block.
const small = `{
 "format": "campaign/1",
 "campaign": {"name": "Example", "start": "2027-01-04T00:00:00Z", "end": "2027-02-01T00:00:00Z", "grid_min": 5},
 "telescopes": [
  {"code": "TRM", "name": "Transit Meadow", "longitude_deg": 148.25, "latitude_deg": -31.5, "height_m": 410,
   "timezone": "Australia/Sydney", "mount": "transit", "elevation_min_deg": 20, "elevation_max_deg": 90,
   "setup_s": 300, "cal_s": 30, "switch_s": 60, "settle_s": 5, "rate_el_deg_s": 0.2, "track_half_min": 45,
   "receivers": [{"code": "U1", "bands": ["U"], "freq_mhz": 800, "bandwidth_mhz": 320, "npol": 2, "trec_k": 30, "gain_k_per_jy": 2.1}]}
 ],
 "sources": [
  {"name": "SIM J1130-2204", "ra_deg": 172.5, "dec_deg": -22.0625, "period_s": 0.00284, "dm_pc_cm3": 12, "flux_mjy": 0.8,
   "flux_freq_mhz": 1400, "spectral_index": -1.2, "width_s": 0.00012, "scan_minutes": [30, 60]}
 ],
 "cadence_targets": [{"id": "weekly", "source": "SIM J1130-2204", "bands": ["U"], "every_d": 7}],
 "blocks": [{"id": "T1", "telescope": "TRM", "start": "2027-01-12T16:00:00Z", "end": "2027-01-12T19:00:00Z", "receivers": ["U1"]}]
}`

// A campaign that was read has its defaults filled in.
func ExampleReadCampaign() {
	c, err := scheduler.ReadCampaign([]byte(small))
	if err != nil {
		fmt.Println(err)
		return
	}
	g := c.CadenceTargets[0]
	fmt.Printf("%s wants %s every %g d, up to %g d early, at priority %g\n", g.ID, g.Source, g.EveryD, g.EarlyD, g.Priority)
	fmt.Println("first week to plan:", scheduler.WeekName(scheduler.DefaultHorizon(c).From))
	// Output:
	// weekly wants SIM J1130-2204 every 7 d, up to 1.75 d early, at priority 1
	// first week to plan: 2027-W02
}

// Everything that is wrong is told at once, each with its place.
func ExampleProblems() {
	broken := []byte(`{
 "format": "campaign/1",
 "campaign": {"name": "Example", "start": "2027-01-04", "end": "2027-02-01T00:00:00Z", "grid_mins": 5},
 "cadence_targets": [{"id": "weekly#1", "source": "SIM J1130-2204", "bands": ["U", "U"], "every_d": NaN}]
}`)
	_, err := scheduler.ReadCampaign(broken)
	fmt.Println(err)
	fmt.Println("invalid input:", errors.Is(err, scheduler.ErrInvalid))
	// Output:
	// /campaign/start: start is "2027-01-04"; it must be an instant in UTC such as 2027-01-18T06:30:00Z (RFC 3339, with Z)
	// /campaign/grid_mins: unknown key "grid_mins" in the campaign; did you mean "grid_min"?
	// /cadence_targets/0/bands/1: goal weekly#1: bands[1] is "U", which stands in the list already
	// /cadence_targets/0/every_d: goal weekly#1: every_d must be a finite number, not NaN
	// /cadence_targets/0/id: goal weekly#1: id is "weekly#1"; it must not hold # or @
	// /cadence_targets/0/source: goal weekly#1: there is no source "SIM J1130-2204"
	// invalid input: true
}

// Weeks are those of ISO 8601: from Monday 00:00 UTC.
func ExampleWeekHorizon() {
	h, err := scheduler.WeekHorizon("2026-W53")
	fmt.Println(h.From.Format(time.RFC1123), "to", h.To.Format(time.RFC1123), err)
	_, err = scheduler.WeekHorizon("2027-W53")
	fmt.Println(err)
	// Output:
	// Mon, 28 Dec 2026 00:00:00 UTC to Mon, 04 Jan 2027 00:00:00 UTC <nil>
	// week "2027-W53": 2027 has 52 weeks
}

// Plans are written in one form: the same plan, the same bytes.
func ExampleWritePlan() {
	monday := time.Date(2027, 1, 11, 0, 0, 0, 0, time.UTC)
	plan := &scheduler.Plan{
		Campaign: "Example", From: monday, To: monday.Add(scheduler.Week), Score: 3, Possible: 3, Bound: 3,
		Scans: []scheduler.Scan{{Block: "T1", Telescope: "TRM", Source: "SIM J1130-2204", Receiver: "U1",
			Start: monday.Add(40 * time.Hour).Add(10 * time.Minute), Minutes: 30, TOAUs: 0.75,
			Earns: []scheduler.Earning{{Goal: "weekly", Unit: "weekly#1", Value: 3}}}},
		Certificate: scheduler.Certificate{Prices: map[string]float64{"weekly#1": 0.5}, Bound: 3},
	}
	data, err := scheduler.WritePlan(plan)
	fmt.Printf("%s%v\n", data, err)
	// Output:
	// {
	//  "format": "plan/1",
	//  "campaign": "Example",
	//  "from": "2027-01-11T00:00:00Z",
	//  "to": "2027-01-18T00:00:00Z",
	//  "score": 3,
	//  "possible": 3,
	//  "bound": 3,
	//  "scans": [
	//   {"block": "T1", "telescope": "TRM", "source": "SIM J1130-2204", "receiver": "U1", "start": "2027-01-12T16:10:00Z", "minutes": 30, "toa_us": 0.75, "earns": [
	//    {"goal": "weekly", "unit": "weekly#1", "value": 3}
	//   ]}
	//  ],
	//  "certificate": {"prices": {"weekly#1": 0.5}, "bound": 3}
	// }
	// <nil>
}

// The kind of an error decides what a caller does; its text is for people.
func ExampleErrorf() {
	err := scheduler.Errorf(scheduler.ErrStale, "the plan is at revision %d, the change was made on %d", 7, 6)
	fmt.Println(err)
	fmt.Println(errors.Is(err, scheduler.ErrStale), scheduler.KindOf(fmt.Errorf("saving: %w", err)))
	// Output:
	// the plan is at revision 7, the change was made on 6
	// true stale
}

// Names are looked up in an index that is built once.
func ExampleNewIndex() {
	c, err := scheduler.ReadCampaign([]byte(small))
	if err != nil {
		fmt.Println(err)
		return
	}
	x := scheduler.NewIndex(c)
	b := x.Block("T1")
	fmt.Println(x.Telescope(b.Telescope).Name, b.Duration(), x.Receiver(b.Telescope, "U1").FreqMHz, x.Source("SIM J0000+0000") == nil)
	// Output:
	// Transit Meadow 3h0m0s 800 true
}
