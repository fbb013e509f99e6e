package scheduler

import (
	"reflect"
	"regexp"
	"testing"
)

// broken is one value of every-field.json made wrong, and what the reader must
// say of it: one problem, at the place, in these words.
type broken struct {
	at      string
	value   any
	pointer string // "" where it is the same as at
	message string
}

var brokenHead = []broken{
	{"/campaign/name", "", "", "name is empty; it must hold at least one character"},
	{"/campaign/name", 7, "", "name must be a string, not 7"},
	{"/campaign/name", "a\x07b", "", `name is "a\ab"; it must not hold control characters`},
	{"/campaign/name", unset, "", "name is missing"},
	{"/campaign/start", "2027-01-04",
		"", `start is "2027-01-04"; it must be an instant in UTC such as 2027-01-18T06:30:00Z (RFC 3339, with Z)`},
	{"/campaign/start", "2027-01-04T00:00:00+01:00",
		"", `start is "2027-01-04T00:00:00+01:00"; it must be an instant in UTC such as 2027-01-18T06:30:00Z (RFC 3339, with Z)`},
	{"/campaign/start", "2027-13-04T00:00:00Z",
		"", `start is "2027-13-04T00:00:00Z"; it must be an instant in UTC such as 2027-01-18T06:30:00Z (RFC 3339, with Z)`},
	{"/campaign/start", 60000.5, "",
		"start must be an instant in UTC such as 2027-01-18T06:30:00Z (RFC 3339, with Z), not 60000.5"},
	{"/campaign/start", "1969-07-20T20:17:40Z",
		"", "start is 1969-07-20T20:17:40Z; it must lie in the years 1972 to 2099"},
	{"/campaign/end", "2027-01-04T00:00:00Z",
		"", "end is 2027-01-04T00:00:00Z, not after start, 2027-01-04T00:00:00Z"},
	{"/campaign/end", "2032-02-01T00:00:00Z", "", "the campaign lasts 1854 days; at most 5 years are allowed"},
	{"/campaign/grid_min", 3, "", "grid_min is 3; it must be 1, 2, 5 or 10 minutes"},
	{"/campaign/grid_min", 2.5, "", "grid_min is 2.5; it must be a whole number 1, 2, 5 or 10 minutes"},
	{"/campaign/dut1_s", 1.5, "", "dut1_s is 1.5; it must be from -1 to 1 s"},
	{"/campaign", 4, "", "campaign must be an object, not 4"},
	{"/campaign", unset, "", "campaign is missing"},
	{"/telescops", []any{}, "", `unknown key "telescops" in a campaign file; did you mean "telescopes"?`},
	{"/odd~1key~0", 1, "", `unknown key "odd/key~" in a campaign file`},
	{"/history", nil, "", "history must be a list, not null"},
	{"/pins", map[string]any{}, "", "pins must be a list, not an object"},
}

var brokenTelescopes = []broken{
	{"/telescopes/0/name", unset, "", "telescope ALT: name is missing"},
	{"/telescopes/0/longitude_deg", 361, "",
		"telescope ALT: longitude_deg is 361; it must be from -180 to 360 degrees, east-positive"},
	{"/telescopes/0/latitude_deg", "51",
		"", `telescope ALT: latitude_deg must be a finite number, not the string "51"`},
	{"/telescopes/0/height_m", 12000, "", "telescope ALT: height_m is 12000; it must be from -500 to 9000 m"},
	{"/telescopes/0/timezone", "Europe/Berlinn",
		"", `telescope ALT: time zone "Europe/Berlinn" is not an IANA name such as Europe/Berlin`},
	{"/telescopes/0/timezone", "Local",
		"", `telescope ALT: time zone "Local" is not an IANA name such as Europe/Berlin`},
	{"/telescopes/0/timezone", "../../etc/passwd",
		"", `telescope ALT: time zone "../../etc/passwd" is not an IANA name such as Europe/Berlin`},
	{"/telescopes/0/mount", "altas",
		"", `telescope ALT: mount is "altas"; it must be altaz, equatorial or transit; did you mean "altaz"?`},
	{"/telescopes/0/elevation_max_deg", 8, "",
		"telescope ALT: elevation_max_deg is 8; it must be above elevation_min_deg, 8"},
	{"/telescopes/0/elevation_max_deg", 95, "",
		"telescope ALT: elevation_max_deg is 95; it must be from 0 to 90 degrees"},
	{"/telescopes/0/elevation_min", 9, "",
		`telescope ALT: unknown key "elevation_min" in a telescope; did you mean "elevation_min_deg"?`},
	{"/telescopes/0/horizon/1/0", 0, "/telescopes/0/horizon/1",
		"telescope ALT: horizon[1]: azimuth 0 comes after 0; azimuths must ascend"},
	{"/telescopes/0/horizon/2/0", 360, "/telescopes/0/horizon/2",
		"telescope ALT: horizon[2]: azimuth is 360; it must be from 0 to less than 360 degrees"},
	{"/telescopes/0/horizon/2/1", 91, "/telescopes/0/horizon/2",
		"telescope ALT: horizon[2]: elevation is 91; it must be from -90 to 90 degrees"},
	{"/telescopes/0/horizon/1/-", 5, "/telescopes/0/horizon/1",
		"telescope ALT: horizon[1] holds 3 items; at most 2 are allowed"},
	{"/telescopes/0/horizon/1", []any{5}, "",
		"telescope ALT: horizon[1] must be a pair [az_deg, el_deg], not 1 values"},
	{"/telescopes/0/horizon", []any{}, "",
		"telescope ALT: horizon is empty; leave it out where there is no mask"},
	{"/telescopes/0/sun_min_deg", -1, "", "telescope ALT: sun_min_deg is -1; it must be from 0 to 180 degrees"},
	{"/telescopes/0/setup_s", 86401, "", "telescope ALT: setup_s is 86401; it must be from 0 to 86400 s"},
	{"/telescopes/0/azimuth_range_deg", []any{10, 10}, "",
		"telescope ALT: azimuth_range_deg is [10, 10]; the first must be below the second"},
	{"/telescopes/0/azimuth_range_deg", []any{-900, 10}, "/telescopes/0/azimuth_range_deg/0",
		"telescope ALT: azimuth_range_deg[0] is -900; it must be from -720 to 720 degrees"},
	{"/telescopes/0/azimuth_range_deg", []any{10}, "",
		"telescope ALT: azimuth_range_deg must be two numbers [lo, hi], not 1"},
	{"/telescopes/0/azimuth_range_deg", 360, "",
		"telescope ALT: azimuth_range_deg must be a list of two numbers [lo, hi], not 360"},
	{"/telescopes/0/azimuth_range_deg", unset, "",
		"telescope ALT: azimuth_range_deg is missing; mount altaz needs it"},
	{"/telescopes/0/rate_az_deg_s", 0, "",
		"telescope ALT: rate_az_deg_s is 0; it must be greater than 0 and at most 100 degrees/s"},
	{"/telescopes/0/accel_az_deg_s2", 0, "",
		"telescope ALT: accel_az_deg_s2 is 0; it must be greater than 0 and at most 1000 degrees/s²"},
	{"/telescopes/0/track_half_min", 30, "",
		"telescope ALT: track_half_min belongs to mount transit; this one is altaz"},
	{"/telescopes/1/rate_el_deg_s", 0.3, "",
		"telescope EQU: rate_el_deg_s belongs to mount altaz and transit; this one is equatorial"},
	{"/telescopes/1/hour_angle_range_h", []any{-13, 6}, "/telescopes/1/hour_angle_range_h/0",
		"telescope EQU: hour_angle_range_h[0] is -13; it must be from -12 to 12 hours"},
	{"/telescopes/2/track_half_min", unset, "",
		"telescope TRA: track_half_min is missing; mount transit needs it"},
	{"/telescopes/2/receivers", []any{}, "", "telescope TRA: receivers is empty; it must hold at least 1"},
	{"/telescopes/0/receivers/0", "L1",
		"", `telescope ALT: receivers[0] must be an object, not the string "L1"`},
	{"/telescopes/2/receivers/-", map[string]any{"code": "U1", "bands": []any{"U"}, "freq_mhz": 800,
		"bandwidth_mhz": 100, "npol": 2, "trec_k": 20, "gain_k_per_jy": 1},
		"/telescopes/2/receivers/1/code",
		`telescope TRA, receiver U1: code "U1" stands at /telescopes/2/receivers/0/code already; it must be unique`},
	{"/telescopes/0/receivers/1/bands", []any{"U", "L",
		"U"}, "/telescopes/0/receivers/1/bands/2",
		`telescope ALT, receiver W1: bands[2] is "U", which stands in the list already`},
	{"/telescopes/0/receivers/1/bands", []any{}, "",
		"telescope ALT, receiver W1: bands is empty; it must hold at least one string"},
	{"/telescopes/0/receivers/1/bands/1", 20, "",
		"telescope ALT, receiver W1: bands[1] must be a string, not 20"},
	{"/telescopes/0/receivers/0/freq_mhz", 1.4e9, "",
		"telescope ALT, receiver L1: freq_mhz is 1.4e+09; it must be from 10 to 1000000 MHz (give MHz, not Hz or GHz)"},
	{"/telescopes/0/receivers/0/freq_mhz", 1.4, "",
		"telescope ALT, receiver L1: freq_mhz is 1.4; it must be from 10 to 1000000 MHz (give MHz, not Hz or GHz)"},
	{"/telescopes/0/receivers/0/bandwidth_mhz", 2801, "",
		"telescope ALT, receiver L1: bandwidth_mhz is 2801; a band about 1400 MHz can be at most 2800 MHz wide"},
	{"/telescopes/0/receivers/0/npol", 4, "",
		"telescope ALT, receiver L1: npol is 4; it must be from 1 to 2 polarisations"},
	{"/telescopes/0/receivers/0/trec_k", 0, "",
		"telescope ALT, receiver L1: trec_k is 0; it must be greater than 0 and at most 100000 K"},
	{"/telescopes/0/receivers/0/tatm_k", -2, "",
		"telescope ALT, receiver L1: tatm_k is -2; it must be from 0 to 1000 K"},
	{"/telescopes/0/receivers/0/digitisation", 0.9, "",
		"telescope ALT, receiver L1: digitisation is 0.9; it must be from 1 to 10"},
	{"/telescopes/0/receivers/0/rfi_loss/3", 1, "",
		"telescope ALT, receiver L1: rfi_loss[3] is 1; it must be from 0 to less than 1"},
	{"/telescopes/0/receivers/0/rfi_loss/-", 0, "/telescopes/0/receivers/0/rfi_loss",
		"telescope ALT, receiver L1: rfi_loss holds 25 items; at most 24 are allowed"},
	{"/telescopes/0/receivers/0/rfi_loss", []any{0.5}, "",
		"telescope ALT, receiver L1: rfi_loss holds 1 numbers; it must hold 24, one a local hour"},
}

var brokenSources = []broken{
	{"/sources/1/ra_deg", 360.5, "", "SIM J1130-2204: ra_deg is 360.5; it must be from 0 to 360 degrees"},
	{"/sources/1/dec_deg", -90.5, "", "SIM J1130-2204: dec_deg is -90.5; it must be from -90 to 90 degrees"},
	{"/sources/0/pos_epoch_mjd", 2451545, "",
		"SIM J0412+1833: pos_epoch_mjd is 2451545; it must be from 15020 to 88069 (a modified Julian date of the years 1900 to 2099; MJD = JD - 2400000.5)"},
	{"/sources/1/period_s", 284, "",
		"SIM J1130-2204: period_s is 284; it must be greater than 0 and at most 100 s (give seconds, not milliseconds)"},
	{"/sources/1/period_s", 0, "",
		"SIM J1130-2204: period_s is 0; it must be greater than 0 and at most 100 s (give seconds, not milliseconds)"},
	{"/sources/1/width_s", 0.00284, "",
		"SIM J1130-2204: width_s is 0.00284; it must be less than period_s, 0.00284 s"},
	{"/sources/1/flux_mjy", -0.5, "",
		"SIM J1130-2204: flux_mjy is -0.5; it must be greater than 0 and at most 1000000 mJy"},
	{"/sources/1/spectral_index", 11, "", "SIM J1130-2204: spectral_index is 11; it must be from -10 to 10"},
	{"/sources/1/scan_minutes", []any{}, "",
		"SIM J1130-2204: scan_minutes holds 0 lengths; it must hold from 1 to 100"},
	{"/sources/1/scan_minutes", []any{30, 30}, "/sources/1/scan_minutes/1",
		"SIM J1130-2204: scan_minutes[1] is 30 after 30; scan lengths must ascend"},
	{"/sources/1/scan_minutes", []any{32}, "/sources/1/scan_minutes/0",
		"SIM J1130-2204: scan_minutes[0] is 32; it must be a multiple of the grid, 5 minutes"},
	{"/sources/1/scan_minutes", []any{7.5}, "/sources/1/scan_minutes/0",
		"SIM J1130-2204: scan_minutes[0] is 7.5; it must be a whole number of minutes from 1 to 20160"},
	{"/sources/1/scan_minutes", 30, "", "SIM J1130-2204: scan_minutes must be a list of minutes, not 30"},
	{"/sources/0/binary/model", "dd", "", `SIM J0412+1833: model is "dd"; it must be kepler or ell1`},
	{"/sources/0/binary/ecc", 1, "", "SIM J0412+1833: ecc is 1; it must be from 0 to 0.999"},
	{"/sources/0/binary/ecc", unset, "", "SIM J0412+1833: ecc is missing; model kepler needs it"},
	{"/sources/0/binary/eps1", 0, "", "SIM J0412+1833: eps1 belongs to model ell1; this one is kepler"},
	{"/sources/1/binary/tasc_mjd", unset, "", "SIM J1130-2204: tasc_mjd is missing; model ell1 needs it"},
	{"/sources/1/binary/pb_d", 0, "",
		"SIM J1130-2204: pb_d is 0; it must be from 0.01 to 1000000 d (give days)"},
	{"/sources/0/binary/pbdot", -0.3, "",
		"SIM J0412+1833: pbdot is -0.3; it must be from -1e-06 to 1e-06 (s/s, without a factor 1e-12)"},
	{"/sources/0/binary/sini", 1.01, "", "SIM J0412+1833: sini is 1.01; it must be from 0 to 1"},
	{"/sources/1/binary", "none", "", `SIM J1130-2204: binary must be an object, not the string "none"`},
	{"/sources/1/name", "SIM J1902+0307",
		"/sources/2/name",
		`SIM J1902+0307: name "SIM J1902+0307" stands at /sources/1/name already; it must be unique`},
}

var brokenGoals = []broken{
	{"/cadence_targets/1/id", "c1",
		"", `goal c1: id "c1" stands at /cadence_targets/0/id already; it must be unique over all four lists`},
	{"/overlap_goals/0/id", "c1",
		"", `goal c1: id "c1" stands at /cadence_targets/0/id already; it must be unique over all four lists`},
	{"/cadence_targets/0/id", "c#1", "", `goal c#1: id is "c#1"; it must not hold # or @`},
	{"/phase_goals/0/id", "p@1", "", `goal p@1: id is "p@1"; it must not hold # or @`},
	{"/cadence_targets/0/source", "SIM J0412+1832",
		"", `goal c1: there is no source "SIM J0412+1832"; did you mean "SIM J0412+1833"?`},
	{"/cadence_targets/0/telescopes/1", "XYZ", "", `goal c1: there is no telescope "XYZ"`},
	{"/cadence_targets/0/telescopes", []any{}, "",
		"goal c1: telescopes is empty; it must hold at least one string"},
	{"/cadence_targets/0/priority", 0, "",
		"goal c1: priority is 0; it must be greater than 0 and at most 1000000"},
	{"/cadence_targets/0/every_d", 0, "", "goal c1: every_d is 0; it must be from 0.04 to 100000 d"},
	{"/cadence_targets/0/early_d", 3.6, "",
		"goal c1: early_d is 3.6; it must be at most half of every_d, 3.5 d"},
	{"/cadence_targets/0/toa_us", 0, "", "goal c1: toa_us is 0; it must be greater than 0 and at most 1e+09 us"},
	{"/phase_goals/0/source", "SIM J1902+0307",
		"", `goal p1: source "SIM J1902+0307" has no binary, so it has no orbital phase`},
	{"/phase_goals/0/reference", "apastron",
		"", `goal p1: reference is "apastron"; it must be periastron, node or conjunction`},
	{"/phase_goals/0/windows/0/from", 1, "", "goal p1: from is 1; it must be from 0 to less than 1 cycles"},
	{"/phase_goals/0/windows/0/to", 0.9, "",
		"goal p1: to is 0.9; it must be greater than from, 0.9, and at most 1.9"},
	{"/phase_goals/0/windows/1/to", 1.5, "",
		"goal p1: to is 1.5; it must be greater than from, 0.4, and at most 1.4"},
	{"/phase_goals/0/windows/1/need", 0, "", "goal p1: need is 0; it must be from 1 to 1000000 orbits"},
	{"/phase_goals/0/dwell_min", 0, "",
		"goal p1: dwell_min is 0; it must be greater than 0 and at most 1000000 minutes"},
	{"/phase_goals/0/per_horizon", 0, "", "goal p1: per_horizon is 0; it must be from 1 to 1000000"},
	{"/overlap_goals/0/count", 3, "",
		"goal o1: count is 3; it must be at most the number of telescopes that the goal names, 2"},
	{"/overlap_goals/0/count", 1, "", "goal o1: count is 1; it must be from 2 to 100 telescopes"},
	{"/band_pair_goals/0/bands", []any{"L"}, "", "goal b1: bands holds 1 bands; a band pair has exactly two"},
	{"/band_pair_goals/0/within_h", 168.5, "",
		"goal b1: within_h is 168.5; it must be at most half of every_d, 168 h"},
}

var brokenTimes = []broken{
	{"/blocks/0/telescope", "ALTA", "", `block A-0104: there is no telescope "ALTA"; did you mean "ALT"?`},
	{"/blocks/0/receivers/1", "S1", "", `block A-0104: telescope ALT has no receiver "S1"; it has L1, W1`},
	{"/blocks/0/end", "2027-01-04T17:00:00Z",
		"", "block A-0104: end is 2027-01-04T17:00:00Z, not after start, 2027-01-04T17:00:00Z"},
	{"/blocks/0/end", "2028-01-04T17:00:00Z",
		"", "block A-0104: the block lasts 365.0 days; at most 14 days are allowed, so give each awarded stretch as a block of its own"},
	{"/blocks/0/lost/0/1", "2027-01-05T02:30:00.001Z",
		"/blocks/0/lost/0",
		"block A-0104: lost[0] is 2027-01-04T20:00:00Z to 2027-01-05T02:30:00.001Z; it must be a stretch of time inside the block, 2027-01-04T17:00:00Z to 2027-01-05T02:30:00Z"},
	{"/blocks/0/lost/0/1", "2027-01-04T20:00:00Z",
		"/blocks/0/lost/0",
		"block A-0104: lost[0] is 2027-01-04T20:00:00Z to 2027-01-04T20:00:00Z; it must be a stretch of time inside the block, 2027-01-04T17:00:00Z to 2027-01-05T02:30:00Z"},
	{"/blocks/0/lost/0/0", "yesterday",
		"", `block A-0104: lost[0][0] is "yesterday"; it must be an instant in UTC such as 2027-01-18T06:30:00Z (RFC 3339, with Z)`},
	{"/blocks/0/lost/0", []any{}, "", "block A-0104: lost[0] must be a pair [start, end], not 0 values"},
	{"/blocks/0/label", "", "", "block A-0104: label is empty; it must hold at least one character"},
	{"/blocks/2/id", "A-0104",
		"", `block A-0104: id "A-0104" stands at /blocks/0/id already; it must be unique`},
	{"/history/0/source", "SIM", "", `there is no source "SIM"`},
	{"/history/0/telescope", "ALTI", "", `there is no telescope "ALTI"; did you mean "ALT"?`},
	{"/history/1/receiver", "L1", "", `telescope TRA has no receiver "L1"; it has U1`},
	{"/history/0/minutes", 0, "", "minutes is 0; it must be greater than 0 and at most 20160 minutes"},
	{"/history/0/counted", "yes", "", `counted must be true or false, not the string "yes"`},
	{"/pins/0/block", "A-0105", "", `there is no block "A-0105"; did you mean "A-0104"?`},
	{"/pins/0/source", "SIM J0412+18", "", `there is no source "SIM J0412+18"; did you mean "SIM J0412+1833"?`},
	{"/pins/0/receiver", "S1", "", `receiver "S1" is not one of block A-0104, which has L1, W1`},
	{"/pins/0/start", "2027-01-04T22:01:00Z",
		"", "start is 2027-01-04T22:01:00Z; it must lie on the grid of 5 minutes since 00:00 UTC"},
	{"/pins/0/start", "2027-01-04T22:00:00.001Z",
		"", "start is 2027-01-04T22:00:00.001Z; it must lie on the grid of 5 minutes since 00:00 UTC"},
	{"/pins/0/minutes", 24, "", "minutes is 24; it must be a multiple of the grid, 5 minutes"},
	{"/pins/0/start", "2027-01-05T02:10:00Z",
		"", "the pinned scan, 2027-01-05T02:10:00Z to 2027-01-05T02:35:00Z, does not lie inside block A-0104, 2027-01-04T17:00:00Z to 2027-01-05T02:30:00Z"},
}

// Each wrong value gives one problem, at its place, that names the field, the
// value and what is allowed.
func TestReadCampaignNamesWhatIsWrong(t *testing.T) {
	document := readTestFile(t, "every-field.json")
	for _, group := range [][]broken{brokenHead, brokenTelescopes, brokenSources, brokenGoals, brokenTimes} {
		for _, b := range group {
			_, err := ReadCampaign(edited(t, document, b.at, b.value))
			if b.pointer == "" {
				b.pointer = b.at
			}
			if err == nil {
				t.Errorf("%s = %v is accepted", b.at, b.value)
				continue
			}
			p := problemsOf(t, err)
			if len(p) != 1 || p[0] != (Problem{b.pointer, b.message}) {
				t.Errorf("%s = %v:\n got  %v\n want %s: %s", b.at, b.value, err, b.pointer, b.message)
			}
		}
	}
}

// onlyInFiles matches what a struct cannot show: values of a wrong type, keys
// absent or unknown, and an explicit 0 or empty list where absent means that.
var onlyInFiles = regexp.MustCompile(`must be (a|an|two|true)\b.* not |is missing|unknown key|belongs to|not an? instant|must be an instant` +
	`|whole number|(accel_az_deg_s2|toa_us) is 0|(telescopes|label|horizon) is empty|at most (2|24) are allowed|must be a pair`)

// Validate finds in a struct what ReadCampaign finds in a file.
func TestValidateFindsWhatReadCampaignFinds(t *testing.T) {
	document := readTestFile(t, "every-field.json")
	same := 0
	for _, group := range [][]broken{brokenHead, brokenTelescopes, brokenSources, brokenGoals, brokenTimes} {
		for _, b := range group {
			if onlyInFiles.MatchString(b.message) {
				continue
			}
			c := new(Campaign)
			if _, err := readFile(edited(t, document, b.at, b.value), &campaignFile, c); err != nil {
				t.Fatal(err)
			}
			if b.pointer == "" {
				b.pointer = b.at
			}
			want := Problems{{b.pointer, b.message}}
			if got := c.Validate(); !reflect.DeepEqual(got, error(want)) {
				t.Errorf("%s = %v:\n got  %v\n want %v", b.at, b.value, got, want)
			}
			same++
		}
	}
	if same < 70 {
		t.Errorf("only %d cases are common to files and structs", same)
	}
}
