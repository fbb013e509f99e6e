package main

import (
	"context"
	"flag"
	"time"

	"cadencewright/scheduler"
	"cadencewright/scheduler/almanac"
)

// skyCommand answers when a source can be observed, by the same limits that
// planning keeps to: a source that it never shows as up is planned nowhere, but
// for pins.
var skyCommand = command{
	name:  "sky",
	args:  "[CAMPAIGN.json]",
	short: "when a source is up: elevation track, up intervals, LST",
	long: `Says when a source is up at a telescope, what keeps it down otherwise, and where
it stands. Source and telescope are those of a campaign file, with all limits of
the telescope (elevation, horizon, mount, Sun), or are given by their
coordinates. With a campaign file and no --telescope, all its telescopes are
compared, without tracks. Times are UTC; edges are good to half a second.`,
	examples: []string{
		`cadencewright sky campaign.json --source "SIM J0412+1833" --telescope ALT`,
		`cadencewright sky campaign.json --source "SIM J0412+1833" --from 2027-01-18 --for 7d --up`,
		`cadencewright sky --ra 04:12:15 --dec +18:33:45 --lon 9.5 --lat 51.25 --min-el 10 --format csv`,
	},
	setup: func(flags *flag.FlagSet) action {
		q := &skyQuestion{}
		flags.StringVar(&q.source, "source", "", "`NAME` of the source in the campaign file")
		flags.StringVar(&q.telescope, "telescope", "", "`CODE` of the telescope in the campaign file, or several with commas; all if left out")
		q.place.declare(flags)
		flags.StringVar(&q.lon, "lon", "", "site without a campaign file: longitude, `DEGREES` east")
		flags.StringVar(&q.lat, "lat", "", "site: geodetic latitude, `DEGREES`")
		flags.Float64Var(&q.heightM, "height", 0, "site: height in `METRES`")
		flags.Float64Var(&q.minElDeg, "min-el", 0, "site: least elevation, `DEGREES`")
		flags.Float64Var(&q.sunMinDeg, "sun-min", 0, "site: least separation from the Sun, `DEGREES`")
		q.span.declare(flags, "24h")
		flags.StringVar(&q.step, "step", "30m", "`STEP` of the track")
		flags.BoolVar(&q.upOnly, "up", false, "only when it is up, no track")
		flags.StringVar(&q.format, "format", formTable, "`FORM` of the answer: table, csv or json")
		return q.answer
	},
}

// skyQuestion is what was asked, as it stood on the command line. Source and
// telescope come from a campaign file, by their names, or from coordinates.
type skyQuestion struct {
	source, telescope string
	place             placeFlags
	// As they were typed, degrees or with colons; checked when they are used.
	lon, lat                     string
	heightM, minElDeg, sunMinDeg float64
	span                         spanFlags
	step, format                 string
	upOnly                       bool
}

// answer checks all flags before it reads a file, then asks the almanac about
// each telescope in turn. Tracks are for one telescope: several would be a
// long list that nobody reads.
func (q *skyQuestion) answer(_ context.Context, std stdio, args []string) error {
	if err := oneOf("format", q.format, formTable, formCSV, formJSON); err != nil {
		return err
	}
	// The only clock of the answer: "now" on the command line.
	from, to, err := q.span.parse(time.Now(), 24*time.Hour)
	if err != nil {
		return err
	}
	step, err := parseSpan("step", q.step)
	if err != nil {
		return err
	}
	src, telescopes, dut1S, err := q.subjects(std, args)
	if err != nil {
		return err
	}
	a := &skyAnswer{source: src, from: from, to: to}
	for _, tel := range telescopes {
		v, err := almanac.When(tel, src, dut1S, from, to)
		if err != nil {
			return err
		}
		site := skySite{telescope: tel, visible: v, sunNeeded: max(tel.SunMinDeg, src.SunMinDeg)}
		if !q.upOnly && len(telescopes) == 1 {
			if site.track, err = almanac.Track(tel, src, dut1S, from, to, step); err != nil {
				return err
			}
		}
		a.sites = append(a.sites, site)
	}
	return a.write(std.out, q.format)
}

// subjects finds the source and the telescopes, and UT1-UTC.
func (q *skyQuestion) subjects(std stdio, args []string) (*scheduler.Source, []*scheduler.Telescope, float64, error) {
	if len(args) == 0 {
		src, tel, err := q.byCoordinates()
		return src, []*scheduler.Telescope{tel}, 0, err
	}
	if err := exactly(args, "CAMPAIGN.json"); err != nil {
		return nil, nil, 0, err
	}
	if q.place.given() || q.lon != "" || q.lat != "" {
		return nil, nil, 0, usagef("give a campaign file or coordinates, not both")
	}
	if q.source == "" {
		return nil, nil, 0, usagef("--source is missing: which source of the campaign?")
	}
	c, err := readCampaign(std, args[0])
	if err != nil {
		return nil, nil, 0, err
	}
	src, err := pickSource(c, q.source)
	if err != nil {
		return nil, nil, 0, err
	}
	// UT1-UTC is the campaign's: it moves the sky by 15 arcsec a second.
	telescopes, err := pickTelescopes(c, q.telescope)
	return src, telescopes, c.DUT1S, err
}

// byCoordinates makes a source and a telescope, free to turn everywhere, of
// the coordinates given.
func (q *skyQuestion) byCoordinates() (*scheduler.Source, *scheduler.Telescope, error) {
	if q.source != "" || q.telescope != "" {
		return nil, nil, usagef("--source and --telescope name things of a campaign file, and none is given")
	}
	src, err := q.place.source()
	if err != nil {
		return nil, nil, err
	}
	if q.lon == "" || q.lat == "" {
		return nil, nil, usagef("name a campaign file, or give the site by --lon and --lat")
	}
	// No range of the mount: whoever gives coordinates asks about the sky.
	tel := &scheduler.Telescope{Code: "site", Name: "the site given", HeightM: q.heightM, Mount: scheduler.MountAltAz,
		ElevationMinDeg: q.minElDeg, ElevationMaxDeg: 90, SunMinDeg: q.sunMinDeg, AzimuthRangeDeg: [2]float64{-360, 720}}
	if tel.LongitudeDeg, err = parseAngle("lon", q.lon, false, -180, 360); err != nil {
		return nil, nil, err
	}
	if tel.LatitudeDeg, err = parseAngle("lat", q.lat, false, -90, 90); err != nil {
		return nil, nil, err
	}
	// The ranges of a campaign file, since no file's reader has checked them.
	for name, v := range map[string][3]float64{"height": {q.heightM, -500, 9000}, "min-el": {q.minElDeg, 0, 90}, "sun-min": {q.sunMinDeg, 0, 180}} {
		if !(v[0] >= v[1] && v[0] <= v[2]) {
			return nil, nil, usagef("--%s is %g; allowed is %g to %g", name, v[0], v[1], v[2])
		}
	}
	return src, tel, nil
}
