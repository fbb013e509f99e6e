package scheduler

import (
	"strings"
	"testing"
)

// The statements of the campaign format, one by one: what it allows.
func TestFormatAllows(t *testing.T) {
	text := string(readTestFile(t, "every-field.json"))
	for _, x := range []struct{ what, old, new string }{
		{"longitudes from -180 to 360", `"longitude_deg": 9.5`, `"longitude_deg": 350.5`},
		{"a right ascension of 360", `"ra_deg": 63.0625`, `"ra_deg": 360`},
		{"a motor range of more than a turn", `[-180, 360]`, `[-720, 720]`},
		{"a horizon of one corner", `[[0, 5.5], [120, 11], [300.25, 7]]`, `[[359.999, 5.5]]`},
		{"an elevation limit of the zenith", `"elevation_max_deg": 88`, `"elevation_max_deg": 90`},
		{"no settling, setup, calibration or receiver change",
			`"setup_s": 600, "cal_s": 60, "switch_s": 90, "settle_s": 10`,
			`"setup_s": 0, "cal_s": 0, "switch_s": 0, "settle_s": 0`},
		{"drives that reach their rate at once", `, "accel_az_deg_s2": 0.05, "accel_el_deg_s2": 0.04`, ``},
		{"no atmosphere", `"tatm_k": 3`, `"tatm_k": 0`},
		{"bands of any label", `"bands": ["U", "L", "S"]`, `"bands": ["350 MHz", "L", "π"]`},
		{"a pulse of most of the period", `"width_s": 0.0009`, `"width_s": 0.01249`},
		{"a mask below the horizon", `[120, 11]`, `[120, -90]`},
		{"scattering beyond the period", `"scatter_1ghz_s": 0.000002`, `"scatter_1ghz_s": 3.5`},
		{"a circular Kepler orbit", `"ecc": 0.3`, `"ecc": 0`},
		{"an orbit without size", `"a1_ls": 9.25`, `"a1_ls": 0`},
		{"a goal of one telescope",
			`"id": "c1", "source": "SIM J0412+1833", "bands": ["L"], "telescopes": ["ALT", "EQU"]`,
			`"id": "c1", "source": "SIM J0412+1833", "bands": ["L"], "telescopes": ["EQU"]`},
		{"a goal in a band that nobody has", `"id": "c2", "source": "SIM J1902+0307", "bands": ["L", "U"]`,
			`"id": "c2", "source": "SIM J1902+0307", "bands": ["X"]`},
		{"a phase goal without windows", `[{"from": 0.9, "to": 1.1, "need": 3}, {"from": 0.4, "to": 0.6, "need": 1}]`,
			`[]`},
		{"a window over the whole orbit", `{"from": 0.4, "to": 0.6, "need": 1}`, `{"from": 0.4, "to": 1.4, "need": 1}`},
		{"bands at the same instant", `"within_h": 24`, `"within_h": 0`},
		{"a block outside the campaign", `"start": "2027-01-06T02:00:00Z", "end": "2027-01-06T04:00:00Z"`,
			`"start": "2028-01-06T02:00:00Z", "end": "2028-01-06T04:00:00Z"`},
		{"instants to the millisecond", `"start": "2027-01-06T02:00:00Z"`, `"start": "2027-01-06T02:00:00.001Z"`},
		{"lost parts that touch", `[["2027-01-04T20:00:00Z", "2027-01-04T20:45:00.5Z"]]`,
			`[["2027-01-04T20:00:00Z", "2027-01-04T20:45:00Z"], ["2027-01-04T20:45:00Z", "2027-01-04T21:00:00Z"]]`},
		{"history off the grid", `"minutes": 38.5`, `"minutes": 0.25`},
		{"history of any date", `"start": "2026-12-28T19:05:00Z"`, `"start": "1999-12-28T19:05:00Z"`},
		{"a pin of a length that is no scan length", `"minutes": 25}`, `"minutes": 5}`},
		{"a pin at the start of its block", `"start": "2027-01-04T22:00:00Z"`, `"start": "2027-01-04T17:00:00Z"`},
		{"a pin in a lost part, as after a loss", `"start": "2027-01-04T22:00:00Z"`, `"start": "2027-01-04T20:10:00Z"`},
	} {
		if strings.Count(text, x.old) == 0 {
			t.Errorf("%s: the test file has no %s", x.what, x.old)
			continue
		}
		changed := strings.Replace(text, x.old, x.new, 1)
		c, err := ReadCampaign([]byte(changed))
		if err != nil {
			t.Errorf("%s: %v", x.what, err)
			continue
		}
		data, err := WriteCampaign(c)
		if err != nil {
			t.Errorf("%s: %v", x.what, err)
			continue
		}
		if back, err := ReadCampaign(data); err != nil || !back.Equal(c) {
			t.Errorf("%s: another campaign after writing, %v", x.what, err)
		}
	}
}

// What the format refuses, statement by statement, and where.
func TestFormatRefuses(t *testing.T) {
	text := string(readTestFile(t, "every-field.json"))
	for _, x := range []struct{ what, old, new, at string }{
		{"an unknown key", `"grid_min": 5`, `"grid_min": 5, "grid": 5`, "/campaign/grid"},
		{"a duplicate id", `"id": "b1"`, `"id": "o1"`, "/band_pair_goals/0/id"},
		{"a dangling reference", `"source": "SIM J1902+0307", "telescope": "TRA"`,
			`"source": "J1902+0307", "telescope": "TRA"`, "/history/1/source"},
		{"a value out of range", `"latitude_deg": 44.5`, `"latitude_deg": 444.5`, "/telescopes/1/latitude_deg"},
		{"NaN", `"latitude_deg": 44.5`, `"latitude_deg": NaN`, "/telescopes/1/latitude_deg"},
		{"infinity", `"latitude_deg": 44.5`, `"latitude_deg": -Infinity`, "/telescopes/1/latitude_deg"},
		{"a number too large to hold", `"latitude_deg": 44.5`, `"latitude_deg": 4e444`, "/telescopes/1/latitude_deg"},
		{"a key twice in one object", `"height_m": 480`, `"height_m": 480, "height_m": 480`, "/telescopes/1/height_m"},
		{"a key twice, once escaped", `"height_m": 480`, `"height_m": 480, "height\u005fm": 480`,
			"/telescopes/1/height_m"},
		{"two blocks of one telescope that overlap",
			`"id": "T-0106", "telescope": "TRA", "start": "2027-01-06T02:00:00Z", "end": "2027-01-06T04:00:00Z", "receivers": ["U1"]`,
			`"id": "T-0106", "telescope": "EQU", "start": "2027-01-05T05:59:59.999Z", "end": "2027-01-06T04:00:00Z", "receivers": ["L1"]`, "/blocks/2/start"},
		{"a block whose end is not after its start", `"end": "2027-01-06T04:00:00Z"`, `"end": "2027-01-06T02:00:00Z"`,
			"/blocks/2/end"},
		{"an id with a hash", `"id": "c2"`, `"id": "c#2"`, "/cadence_targets/1/id"},
		{"an id with an at sign", `"id": "c2"`, `"id": "c@2"`, "/cadence_targets/1/id"},
		{"a time zone by offset", `"Europe/Berlin"`, `"+01:00"`, "/telescopes/0/timezone"},
		{"an instant with an offset", `"start": "2027-01-06T02:00:00Z"`, `"start": "2027-01-06T03:00:00+01:00"`,
			"/blocks/2/start"},
		{"an instant without a zone", `"start": "2027-01-06T02:00:00Z"`, `"start": "2027-01-06T02:00:00"`,
			"/blocks/2/start"},
		{"scan lengths that do not fit the grid", `"scan_minutes": [15, 30]`, `"scan_minutes": [15, 31]`,
			"/sources/2/scan_minutes/1"},
		{"scan lengths that do not ascend", `"scan_minutes": [15, 30]`, `"scan_minutes": [30, 15]`,
			"/sources/2/scan_minutes/1"},
		{"a pair of three bands", `"id": "b1", "source": "SIM J1902+0307", "bands": ["L", "U"]`,
			`"id": "b1", "source": "SIM J1902+0307", "bands": ["L", "U", "S"]`, "/band_pair_goals/0/bands"},
		{"more telescopes at once than the goal has", `"count": 2`, `"count": 3`, "/overlap_goals/0/count"},
		{"a receiver that the block does not have", `"receiver": "L1", "start": "2027-01-04T22:00:00Z"`,
			`"receiver": "S1", "start": "2027-01-04T22:00:00Z"`, "/pins/0/receiver"},
		{"a pin off the grid", `"start": "2027-01-04T22:00:00Z"`, `"start": "2027-01-04T22:02:00Z"`, "/pins/0/start"},
		{"a pin that leaves its block", `"start": "2027-01-04T22:00:00Z"`, `"start": "2027-01-05T02:10:00Z"`,
			"/pins/0/start"},
		{"a list where an object belongs", `"campaign": {`, `"campaign": [], "x": {`, "/campaign"},
		{"null for a value", `"height_m": 480`, `"height_m": null`, "/telescopes/1/height_m"},
		{"a number as text", `"height_m": 480`, `"height_m": "480"`, "/telescopes/1/height_m"},
		{"a truth as a number", `"counted": false`, `"counted": 0`, "/history/1/counted"},
	} {
		if strings.Count(text, x.old) == 0 {
			t.Errorf("%s: the test file has no %s", x.what, x.old)
			continue
		}
		_, err := ReadCampaign([]byte(strings.Replace(text, x.old, x.new, 1)))
		if err == nil {
			t.Errorf("%s is accepted", x.what)
		} else if p := problemsOf(t, err); messageAt(p, x.at) == "" {
			t.Errorf("%s: no problem at %s, but\n%v", x.what, x.at, p)
		}
	}
}
