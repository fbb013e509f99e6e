package scheduler

import (
	"bytes"
	"errors"
	"fmt"
	"math"
	"reflect"
	"strings"
	"testing"
	"time"
)

// The campaigns kept for tests are read, and have the sizes their README says.
func TestReadCampaignReadsTheKeptCampaigns(t *testing.T) {
	for _, want := range []struct {
		name                                string
		grid, telescopes, sources, blocks   int
		cadence, phase, overlap, pair, hist int
	}{
		{"small-1", 10, 2, 12, 6, 13, 4, 3, 4, 127},
		{"small-2", 10, 2, 12, 6, 13, 4, 3, 4, 133},
		{"medium-1", 5, 4, 40, 20, 42, 12, 12, 14, 385},
		{"medium-2", 5, 4, 40, 20, 42, 12, 12, 14, 392},
		{"hard-1", 5, 5, 44, 20, 54, 26, 38, 36, 576},
		{"large-1", 1, 6, 90, 45, 98, 26, 26, 30, 924},
	} {
		c, err := ReadCampaign(readTestFile(t, want.name+".json"))
		if err != nil {
			t.Errorf("%s: %v", want.name, err)
			continue
		}
		got := fmt.Sprint(c.GridMin, len(c.Telescopes), len(c.Sources), len(c.Blocks))
		if w := fmt.Sprint(want.grid, want.telescopes, want.sources, want.blocks); got != w || c.Name != want.name {
			t.Errorf("%s: grid, telescopes, sources, blocks %s, want %s", c.Name, got, w)
		}
		got = fmt.Sprint(len(c.CadenceTargets), len(c.PhaseGoals), len(c.OverlapGoals), len(c.BandPairGoals),
			len(c.History))
		if w := fmt.Sprint(want.cadence, want.phase, want.overlap, want.pair, want.hist); got != w {
			t.Errorf("%s: goals and history %s, want %s", c.Name, got, w)
		}
		if err := c.Validate(); err != nil {
			t.Errorf("%s: read, but not valid: %v", c.Name, err)
		}
	}
}

// Every field lands where it belongs, and absent fields get their defaults.
func TestReadCampaignFillsEveryField(t *testing.T) {
	c := everyField(t)
	alt, equ, tra := c.TelescopeByCode("ALT"), c.TelescopeByCode("EQU"), c.TelescopeByCode("TRA")
	at := func(s string) time.Time {
		v, err := time.Parse(time.RFC3339Nano, s)
		if err != nil {
			t.Fatal(err)
		}
		return v
	}
	for _, x := range []struct {
		what      string
		got, want any
	}{
		{"head", []any{c.Name, c.Start, c.GridMin, c.DUT1S}, []any{"Every field", at("2027-01-04T00:00:00Z"), 5,
			-0.05}},
		{"altaz", []any{alt.Mount, alt.AzimuthRangeDeg, alt.RateAzDegS, alt.AccelElDegS2, alt.Horizon[2]},
			[]any{MountAltAz, [2]float64{-180, 360}, 0.5, 0.04, HorizonPoint{300.25, 7}}},
		{"equatorial", []any{equ.Mount, equ.HourAngleRangeH, equ.RateHADegS, equ.AccelDecDegS2},
			[]any{MountEquatorial, [2]float64{-6, 6.5}, 0.4, 0.06}},
		{"transit", []any{tra.Mount, tra.TrackHalfMin, tra.RateElDegS, tra.SunMinDeg},
			[]any{MountTransit, 45.0, 0.2, 0.0}},
		{"receiver defaults", []any{alt.Receivers[1].TatmK, alt.Receivers[1].Digitisation,
			len(alt.Receivers[0].RFILoss)}, []any{2.0, 1.0, 24}},
		{"kepler", *c.Sources[0].Binary, Binary{Model: BinaryKepler, PbD: 8.5, A1Ls: 9.25, Ecc: 0.3, OmDeg: 121.5,
			T0MJD: 58000.25, OmdotDegYr: 0.02, Pbdot: -3e-13, M2Msun: 0.28, Sini: 0.97}},
		{"ell1", *c.Sources[1].Binary, Binary{Model: BinaryELL1, PbD: 0.38, A1Ls: 1.4, TascMJD: 59000.5, Eps1: 0.00001,
			Eps2: -0.00002, Pbdot: 1e-13, M2Msun: 0.2, Sini: 0.5}},
		{"single", c.Sources[2].Binary == nil, true},
		{"source defaults", []any{c.Sources[2].PosEpochMJD, c.Sources[2].PMRAMasYr, c.Sources[2].SunMinDeg},
			[]any{51544.5, 0.0, 0.0}},
		{"early", []any{c.CadenceTargets[0].EarlyD, c.CadenceTargets[1].EarlyD}, []any{2.0, 3.5}},
		{"goal defaults", []any{c.CadenceTargets[1].Priority, c.CadenceTargets[1].TOAUs,
			len(c.CadenceTargets[1].Telescopes)}, []any{1.0, 0.0, 0}},
		{"windows", c.PhaseGoals[0].Windows, []PhaseWindow{{0.9, 1.1, 3}, {0.4, 0.6, 1}}},
		{"lost", c.Blocks[0].Lost, []Span{{at("2027-01-04T20:00:00Z"), at("2027-01-04T20:45:00.5Z")}}},
		{"history", c.History[1], HistoryScan{"SIM J1902+0307", "TRA", "U1", at("2026-12-20T04:00:00.125Z"), 30,
			false}},
		{"pin", c.Pins[0], Pin{"A-0104", "SIM J0412+1833", "L1", at("2027-01-04T22:00:00Z"), 25}},
	} {
		if !reflect.DeepEqual(x.got, x.want) {
			t.Errorf("%s: %v, want %v", x.what, x.got, x.want)
		}
	}
}

// Everything wrong with a file is told at once, NaN and keys that stand twice
// included.
func TestReadCampaignTellsAllAtOnce(t *testing.T) {
	text := string(readTestFile(t, "every-field.json"))
	for _, r := range [][2]string{
		{`"dut1_s": -0.05`, `"dut1_s": NaN`},
		{`"height_m": 210`, `"height_m": -Infinity`},
		{`"period_s": 0.00284`, `"period_s": 1e999`},
		{`"gain_k_per_jy": 2.1`, `"gain_k_per_jy": 2.1, "gain_k_per_jy": 2.2`},
		{`"id": "c2"`, `"id": "c1"`},
		{`"receivers": ["U1"]`, `"receivers": ["U7"]`},
		{`"start": "2027-01-05T00:00:00Z"`, `"start": "2027-01-05T00:00:00Z", "colour": "red"`},
		{`"pins": [`, `"pins": [7, `},
	} {
		if !strings.Contains(text, r[0]) {
			t.Fatalf("the test file has no %s", r[0])
		}
		text = strings.Replace(text, r[0], r[1], 1)
	}
	_, err := ReadCampaign([]byte(text))
	want := []string{"/campaign/dut1_s", "/telescopes/0/height_m", "/telescopes/2/receivers/0/gain_k_per_jy",
		"/sources/1/period_s",
		"/blocks/1/colour", "/pins/0", "/cadence_targets/1/id", "/blocks/2/receivers/0"}
	if got := pointers(problemsOf(t, err)); !reflect.DeepEqual(got, want) {
		t.Errorf("problems at\n %v, want\n %v\n%v", got, want, err)
	}
	if !errors.Is(err, ErrInvalid) || !errors.Is(KindOf(err), ErrInvalid) {
		t.Error("problems are not of the kind invalid")
	}
}

// A document that is no JSON is refused with line, column and place.
func TestReadCampaignRefusesWhatIsNoJSON(t *testing.T) {
	for _, x := range []struct{ text, want string }{
		{"", "/: the file is empty"},
		{" \n\t", "/: the file is empty"},
		{"{", "/: not valid JSON at line 1, column 2: a key in double quotes is expected here, not the end of the file"},
		{"{\n \"format\": \"campaign/1\",\n \"campaign\": {\"name\": 'x'}}",
			"/campaign/name: not valid JSON at line 3, column 23: a value is expected here, not '\\''"},
		{`{"format": "campaign/1", "blocks": [{"id": "a"} {"id": "b"}]}`,
			"/blocks: not valid JSON at line 1, column 49: a comma or ']' is expected here, not '{'"},
		{`[1, 2]`, "/: the file must be an object, not a list"},
		{`"campaign/1"`, `/: the file must be an object, not the string "campaign/1"`},
		{`{"format": "campaign/1"} {}`,
			"/: not valid JSON at line 1, column 26: the document is over, but '{' follows"},
		{"\x1f\x8b\x08\x00", "/: not valid JSON at line 1, column 1: a value is expected here, not byte 0x1F"},
		{`{"format": "campaign/1", "x": ` + strings.Repeat("[", 100) + `}`,
			"/x: not valid JSON at line 1, column 94: nested more than 64 deep"},
		{"{\"format\": \"campaign/1\", \"pins\": \"\xff\"}",
			"/pins: not valid JSON at line 1, column 35: text that is not valid UTF-8"},
	} {
		_, err := ReadCampaign([]byte(x.text))
		got := problemsOf(t, err)
		found := false
		for _, line := range strings.Split(got.Error(), "\n") {
			found = found || line == x.want
		}
		if !found {
			t.Errorf("%.60q:\n got  %v\n want %v", x.text, got, x.want)
		}
	}
}

// A file of another format says so, and nothing else.
func TestReadCampaignTellsAnotherFormat(t *testing.T) {
	for _, x := range []struct{ text, want string }{
		{`{"format": "plan/1", "scans": []}`,
			`/format: format is "plan/1"; it must be "campaign/1": this file is a plan`},
		{`{"scans": [], "format": "campaign/2"}`, `/format: format is "campaign/2"; it must be "campaign/1"`},
		{`{"format": 1}`, `/format: format must be "campaign/1"`},
	} {
		_, err := ReadCampaign([]byte(x.text))
		if got := problemsOf(t, err); got.Error() != x.want {
			t.Errorf("%s: %v, want %s", x.text, got, x.want)
		}
	}
	_, err := ReadPlan([]byte(`{"format": "campaign/1"}`))
	if want := `/format: format is "campaign/1"; it must be "plan/1": this file is a campaign`; err == nil ||
		err.Error() != want {
		t.Errorf("a campaign read as a plan: %v, want %s", err, want)
	}
	_, err = ReadCampaign([]byte(`{"campaign": {}}`))
	if got := problemsOf(t, err); !strings.Contains(got.Error(), "/format: format is missing") {
		t.Errorf("no format: %v", got)
	}
}

// A byte-order mark, escapes and other ways of writing the same are accepted.
func TestReadCampaignAcceptsOtherSpellings(t *testing.T) {
	want := everyField(t)
	text := string(readTestFile(t, "every-field.json"))
	for _, x := range []string{
		"\xef\xbb\xbf" + text,
		strings.ReplaceAll(text, "\n", "\r\n\t"),
		strings.Replace(text, `"Equeville"`, `"\u0045queville"`, 1),
		strings.Replace(text, `"grid_min": 5`, `"grid_min": 5.0`, 1),
		strings.Replace(text, `"setup_s": 600`, `"setup_s": 6e2`, 1),
		strings.Replace(text, `2027-01-04T00:00:00Z`, `2027-01-04T00:00:00.0000Z`, 1),
		strings.Replace(text, `2027-01-04T00:00:00Z`, `2027-01-04T00:00:00.00049999999999Z`, 1),
		strings.Replace(text, `"priority": 0.5`, `"priority": 5e-1`, 1),
		strings.Replace(text, `"mount": "transit"`, `"mount": "transit", "horizon": [[0, -90]]`, 1),
	} {
		got, err := ReadCampaign([]byte(x))
		if err != nil {
			t.Errorf("%.200s…: %v", x, err)
			continue
		}
		got.Telescopes[2].Horizon = nil // the one that says nothing
		if !reflect.DeepEqual(got, want) {
			t.Errorf("%.200s… means something else", x)
		}
	}
}

// Two blocks of one telescope may touch but not overlap; of a pair the later
// in the file is named.
func TestReadCampaignFindsOverlappingBlocks(t *testing.T) {
	document := readTestFile(t, "every-field.json")
	block := func(id, start, end string) map[string]any {
		return map[string]any{"id": id, "telescope": "ALT", "start": start, "end": end, "receivers": []any{"L1"}}
	}
	for _, x := range []struct {
		start, end string
		bad        bool
	}{
		{"2027-01-05T02:30:00Z", "2027-01-05T06:00:00Z", false},
		{"2027-01-04T10:00:00Z", "2027-01-04T17:00:00Z", false},
		{"2027-01-05T02:29:59.999Z", "2027-01-05T06:00:00Z", true},
		{"2027-01-04T10:00:00Z", "2027-01-04T17:00:00.001Z", true},
		{"2027-01-04T18:00:00Z", "2027-01-04T19:00:00Z", true},
		{"2027-01-04T10:00:00Z", "2027-01-06T10:00:00Z", true},
		{"2027-01-04T17:00:00Z", "2027-01-05T02:30:00Z", true},
	} {
		_, err := ReadCampaign(edited(t, document, "/blocks/-", block("extra", x.start, x.end)))
		if !x.bad {
			if err != nil {
				t.Errorf("%s to %s: %v", x.start, x.end, err)
			}
			continue
		}
		p := problemsOf(t, err)
		if len(p) != 1 || p[0].Pointer != "/blocks/3/start" ||
			!strings.Contains(p[0].Message, "overlaps block A-0104 of the same telescope") {
			t.Errorf("%s to %s: %v", x.start, x.end, p)
		}
	}
	// A long block that overlaps two others, which do not overlap each other.
	c := everyField(t)
	c.Blocks[1].Telescope, c.Blocks[1].Receivers = "ALT", []string{"L1"}
	c.Blocks[1].Start, c.Blocks[1].End = c.Blocks[0].End, c.Blocks[0].End.Add(time.Hour)
	c.Blocks[2].Telescope, c.Blocks[2].Receivers = "ALT", []string{"L1"}
	c.Blocks[2].Start, c.Blocks[2].End = c.Blocks[0].Start.Add(-time.Hour), c.Blocks[1].End
	if got := pointers(problemsOf(t, c.Validate())); !reflect.DeepEqual(got,
		[]string{"/blocks/2/start", "/blocks/2/start"}) {
		t.Errorf("one block over two: problems at %v", got)
	}
}

// Lists beyond their limits are refused at once, without listing what follows
// from cutting them.
func TestReadCampaignKeepsLimits(t *testing.T) {
	document := string(readTestFile(t, "every-field.json"))
	repeated := func(list, item string, n int) []byte {
		items := make([]string, n)
		for i := range items {
			items[i] = strings.ReplaceAll(item, "#", fmt.Sprint(i))
		}
		at := strings.Index(document, `"`+list+`": [`) + len(list) + 5
		return []byte(document[:at] + strings.Join(items, ",") + "," + document[at:])
	}
	source := `{"name": "X#", "ra_deg": 1, "dec_deg": 1, "period_s": 1, "dm_pc_cm3": 1, "flux_mjy": 1, "flux_freq_mhz": 1400, "spectral_index": 0, "width_s": 0.1, "scan_minutes": [30]}`
	for _, x := range []struct {
		list, item string
		n          int
		want       string
	}{
		{"sources", source, 9997, "/sources: sources holds 10000 items; at most 5000 are allowed"},
		{"blocks", `{"id": "b#", "telescope": "EQU", "start": "2027-01-01T00:00:00Z", "end": "2027-01-01T00:00:00.001Z", "receivers": ["L1"]}`, 1998, "/blocks: blocks holds 2001 items; at most 2000 are allowed"},
		{"cadence_targets", `{"id": "x#", "source": "SIM J1902+0307", "bands": ["L"], "every_d": 7}`, 20000,
			"/cadence_targets: cadence_targets holds 20002 items; at most 20000 are allowed"},
	} {
		_, err := ReadCampaign(repeated(x.list, x.item, x.n))
		p := problemsOf(t, err)
		if !strings.Contains(p.Error(), x.want) {
			t.Errorf("%d more %s:\n got  %.300v\n want %v", x.n, x.list, p, x.want)
		}
		if x.list == "sources" && len(p) != 1 {
			t.Errorf("%d problems for one list that is too long: %.500v", len(p), p)
		}
	}
	if _, err := ReadCampaign(repeated("sources", source, 4997)); err != nil {
		t.Errorf("5000 sources: %v", err)
	}
	_, err := ReadCampaign(make([]byte, MaxFileBytes+1))
	if p := problemsOf(t, err); p[0].Message != "the file is 64.0 MiB; at most 64 MiB are allowed" {
		t.Errorf("a file that is too large: %v", p)
	}
}

// Of very many problems the first are listed and the rest counted.
func TestReadCampaignCountsTheRest(t *testing.T) {
	text := `{"format": "campaign/1", "campaign": {"name": "x", "start": "2027-01-01T00:00:00Z", "end": "2027-02-01T00:00:00Z"}, "history": [` +
		strings.Repeat(`{"source": "A", "telescope": "B", "receiver": "C", "start": "x", "minutes": -1, "counted": 0},`,
			1000) + `7]}`
	_, err := ReadCampaign([]byte(text))
	p := problemsOf(t, err)
	if len(p) != MaxProblems+1 {
		t.Fatalf("%d problems listed, want %d and a count", len(p), MaxProblems)
	}
	// Three wrong values and two dangling references in each, and the last.
	if want := "and 4801 more problems"; p[MaxProblems].Message != want || p[MaxProblems].Pointer != "" {
		t.Errorf("the last line is %v, want %q", p[MaxProblems], want)
	}
}

// Validate refuses what only a struct can hold.
func TestValidateRefusesNaNAndZeroTimes(t *testing.T) {
	for _, x := range []struct {
		change func(*Campaign)
		want   string
	}{
		{func(c *Campaign) { c.DUT1S = math.NaN() }, "/campaign/dut1_s: dut1_s must be a finite number, not NaN"},
		{func(c *Campaign) { c.Sources[0].RADeg = math.Inf(1) },
			"/sources/0/ra_deg: SIM J0412+1833: ra_deg must be a finite number, not +Inf"},
		{func(c *Campaign) { c.Telescopes[0].Horizon[1].AzimuthDeg = math.NaN() },
			"/telescopes/0/horizon/1: telescope ALT: horizon[1]: azimuth is NaN; it must be from 0 to less than 360 degrees"},
		{func(c *Campaign) { c.Telescopes[0].AzimuthRangeDeg[1] = math.NaN() },
			"/telescopes/0/azimuth_range_deg/1: telescope ALT: azimuth_range_deg[1] must be a finite number, not NaN"},
		{func(c *Campaign) { c.Telescopes[0].Receivers[0].RFILoss[2] = math.NaN() },
			"/telescopes/0/receivers/0/rfi_loss/2: telescope ALT, receiver L1: rfi_loss[2] must be a finite number, not NaN"},
		{func(c *Campaign) { c.Blocks[0].Lost[0].End = time.Time{} },
			"/blocks/0/lost/0/1: block A-0104: lost[0][1] is not set; it must be an instant in UTC such as 2027-01-18T06:30:00Z (RFC 3339, with Z)"},
		{func(c *Campaign) { c.Sources[0].Name = "a\xff" }, "/sources/0/name: a\uFFFD: name is not valid UTF-8"},
		{func(c *Campaign) { c.Sources[2].Name = strings.Repeat("é", 501) },
			"name is 501 characters long; at most 500 are allowed"},
		{func(c *Campaign) { c.Telescopes[2].AccelHADegS2 = 1 },
			"/telescopes/2/accel_ha_deg_s2: telescope TRA: accel_ha_deg_s2 belongs to mount equatorial; this one is transit"},
		{func(c *Campaign) { c.Pins = make([]Pin, MaxPins+1) },
			"/pins: pins holds 20001 items; at most 20000 are allowed"},
	} {
		c := everyField(t)
		x.change(c)
		err := c.Validate()
		if err == nil || !strings.Contains(strings.ReplaceAll(err.Error(), `\xff`, "\uFFFD"), x.want) {
			t.Errorf("got  %.400v\nwant %v", err, x.want)
		}
	}
}

// Reading depends on nothing but the bytes.
func TestReadCampaignRepeats(t *testing.T) {
	data := readTestFile(t, "medium-1.json")
	before := bytes.Clone(data)
	a, err1 := ReadCampaign(data)
	b, err2 := ReadCampaign(data)
	if err1 != nil || err2 != nil || !reflect.DeepEqual(a, b) {
		t.Error("the same bytes give two campaigns")
	}
	if !bytes.Equal(data, before) {
		t.Error("reading changed its input")
	}
}
