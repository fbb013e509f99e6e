package scheduler

import (
	"math"
	"time"
)

// Ranges that several fields share, or that need a word. Where the planning
// model states a range it is that range, here and below. Where the model states
// none, the range keeps out what cannot be, which mostly is a value in another
// unit, and what would make a plan endless work; each lies far from anything
// an array has.
var (
	// Epochs. A Julian date (2 460 000) or a year (2027) is the usual mistake.
	anyMJD = within(15020, 88069, "").hinting("a modified Julian date of the years 1900 to 2099; MJD = JD - 2400000.5")
	// Overheads; a day is the model's own limit.
	seconds = within(0, 86400, "s")
	// Drives. The fastest dishes turn a few degrees a second.
	rate  = above(0, 100, "degrees/s")
	accel = above(0, 1000, "degrees/s²")
	// Radio, from the ionosphere's edge to a millimetre and beyond. 1.4 and
	// 1.4e9 are 1400 MHz in other units.
	megahertz   = within(10, 1e6, "MHz").hinting("give MHz, not Hz or GHz")
	sunDistance = within(0, 180, "degrees")
	// Intervals. One goal every hour makes 168 units a week; below that a
	// wrong unit would make millions.
	days = within(0.04, 1e5, "d")
	// Times inside a scan, as a goal asks for them.
	mostMinutes = above(0, 1e6, "minutes")
	// The slowest known pulsar turns in some 76 s.
	period = above(0, 100, "s").hinting("give seconds, not milliseconds")
	// Two neutron stars closer than a quarter of an hour do not stay so.
	orbitDays = within(0.01, 1e6, "d").hinting("give days")
	// The fastest decay known is some 1e-12; tables often leave that factor out.
	decay = within(-1e-6, 1e-6, "").hinting("s/s, without a factor 1e-12")
	// Barnard's star, the fastest of all, moves 1e4 mas/yr.
	properMotion = within(-1e5, 1e5, "mas/yr")
	// anyNumber is a finite number without limits.
	anyNumber = within(math.Inf(-1), math.Inf(1), "")
)

const (
	altaz, equatorial, transit = string(MountAltAz), string(MountEquatorial), string(MountTransit)
	kepler, ell1               = string(BinaryKepler), string(BinaryELL1)
)

// campaignFile is the whole file. Its keys stand on lines of their own, and so
// do the items of its lists, so that two versions of a file compare well line
// by line.
var campaignFile = table{what: "a campaign file", lines: true, fields: []field{
	{key: "format", need: true, kind: literal(CampaignFormat), doc: "format of this file"},
	req("campaign", nested{&campaignHead}, func(c *Campaign) *Campaign { return c }, "the campaign itself"),
	opt("telescopes", list[Telescope]{&telescopeTable, 0, MaxTelescopes}, func(c *Campaign) *[]Telescope { return &c.Telescopes },
		"the telescopes"),
	opt("sources", list[Source]{&sourceTable, 0, MaxSources}, func(c *Campaign) *[]Source { return &c.Sources }, "the pulsars"),
	opt("cadence_targets", list[CadenceTarget]{&cadenceTable, 0, MaxGoals}, func(c *Campaign) *[]CadenceTarget { return &c.CadenceTargets },
		"goals of one scan every so often"),
	opt("phase_goals", list[PhaseGoal]{&phaseTable, 0, MaxGoals}, func(c *Campaign) *[]PhaseGoal { return &c.PhaseGoals },
		"goals of scans at places of an orbit"),
	opt("overlap_goals", list[OverlapGoal]{&overlapTable, 0, MaxGoals}, func(c *Campaign) *[]OverlapGoal { return &c.OverlapGoals },
		"goals of several telescopes at once"),
	opt("band_pair_goals", list[BandPairGoal]{&pairTable, 0, MaxGoals}, func(c *Campaign) *[]BandPairGoal { return &c.BandPairGoals },
		"goals of two bands near in time"),
	opt("blocks", list[Block]{&blockTable, 0, MaxBlocks}, func(c *Campaign) *[]Block { return &c.Blocks },
		"awarded stretches of telescope time; those of one telescope do not overlap"),
	opt("history", list[HistoryScan]{&historyTable, 0, MaxHistory}, func(c *Campaign) *[]HistoryScan { return &c.History },
		"scans that were made"),
	opt("pins", list[Pin]{&pinTable, 0, MaxPins}, func(c *Campaign) *[]Pin { return &c.Pins },
		"scans that must stand in the plan as they are"),
}}

// campaignHead is the object "campaign".
var campaignHead = table{what: "the campaign", fields: []field{
	req("name", text{}, func(c *Campaign) *string { return &c.Name }, "name of the campaign; a plan names the campaign it is for"),
	req("start", instant{}, func(c *Campaign) *time.Time { return &c.Start }, "first instant of the campaign"),
	req("end", instant{}, func(c *Campaign) *time.Time { return &c.End },
		"first instant after the campaign, at most 5 years after the start"),
	opt("grid_min", integer{unit: "minutes", standard: DefaultGridMin, one: []int{1, 2, 5, 10}},
		func(c *Campaign) *int { return &c.GridMin }, "planning grid: scans start and end at multiples of it since 00:00 UTC"),
	opt("dut1_s", within(-1, 1, "s"), func(c *Campaign) *float64 { return &c.DUT1S }, "UT1-UTC, s"),
}}

// telescopeTable has the fields of all mounts; "mount" says which belong. The
// overheads are the model's: setup before the first scan of a block, calibration
// before every scan, switch where the receiver differs, settle after a slew.
var telescopeTable = table{what: "a telescope", selector: "mount", choices: []string{altaz, equatorial, transit}, fields: []field{
	req("code", text{}, func(t *Telescope) *string { return &t.Code }, "short name, unique in the campaign"),
	req("name", text{}, func(t *Telescope) *string { return &t.Name }, "full name"),
	req("longitude_deg", within(-180, 360, "degrees, east-positive"), func(t *Telescope) *float64 { return &t.LongitudeDeg },
		"longitude, east-positive, degrees"),
	req("latitude_deg", within(-90, 90, "degrees"), func(t *Telescope) *float64 { return &t.LatitudeDeg },
		"geodetic latitude (WGS84), degrees"),
	req("height_m", within(-500, 9000, "m"), func(t *Telescope) *float64 { return &t.HeightM }, "height above the ellipsoid, m"),
	req("timezone", text{}, func(t *Telescope) *string { return &t.Timezone }, "IANA time zone"),
	req("mount", choice{altaz, equatorial, transit}, func(t *Telescope) *string { return (*string)(&t.Mount) }, "how the telescope moves"),
	req("elevation_min_deg", within(0, 90, "degrees"), func(t *Telescope) *float64 { return &t.ElevationMinDeg },
		"lowest elevation, degrees"),
	req("elevation_max_deg", within(0, 90, "degrees"), func(t *Telescope) *float64 { return &t.ElevationMaxDeg },
		"highest elevation, degrees"),
	opt("horizon", corners{}, func(t *Telescope) *[]HorizonPoint { return &t.Horizon },
		"horizon mask, piecewise linear in azimuth, wrapping at 360 degrees"),
	opt("sun_min_deg", sunDistance, func(t *Telescope) *float64 { return &t.SunMinDeg }, "least separation from the Sun, degrees"),
	req("setup_s", seconds, func(t *Telescope) *float64 { return &t.SetupS }, "before the first scan of a block, s"),
	req("cal_s", seconds, func(t *Telescope) *float64 { return &t.CalS }, "calibration before every scan, s"),
	req("switch_s", seconds, func(t *Telescope) *float64 { return &t.SwitchS }, "receiver change, s"),
	req("settle_s", seconds, func(t *Telescope) *float64 { return &t.SettleS }, "at the end of every slew, s"),
	req("azimuth_range_deg", span{-720, 720, "degrees"}, func(t *Telescope) *[2]float64 { return &t.AzimuthRangeDeg },
		"range of the azimuth motor, degrees; may span more than 360").onlyFor(altaz),
	req("rate_az_deg_s", rate, func(t *Telescope) *float64 { return &t.RateAzDegS }, "azimuth rate, degrees/s").onlyFor(altaz),
	req("rate_el_deg_s", rate, func(t *Telescope) *float64 { return &t.RateElDegS },
		"elevation rate, degrees/s; on a transit mount it moves in declination").onlyFor(altaz + " " + transit),
	opt("accel_az_deg_s2", accel, func(t *Telescope) *float64 { return &t.AccelAzDegS2 },
		"azimuth acceleration, degrees/s²").onlyFor(altaz),
	opt("accel_el_deg_s2", accel, func(t *Telescope) *float64 { return &t.AccelElDegS2 },
		"elevation acceleration, degrees/s²").onlyFor(altaz + " " + transit),
	req("hour_angle_range_h", span{-12, 12, "hours"}, func(t *Telescope) *[2]float64 { return &t.HourAngleRangeH },
		"range of hour angle, hours, west-positive").onlyFor(equatorial),
	req("rate_ha_deg_s", rate, func(t *Telescope) *float64 { return &t.RateHADegS }, "hour-angle rate, degrees/s").onlyFor(equatorial),
	req("rate_dec_deg_s", rate, func(t *Telescope) *float64 { return &t.RateDecDegS }, "declination rate, degrees/s").onlyFor(equatorial),
	opt("accel_ha_deg_s2", accel, func(t *Telescope) *float64 { return &t.AccelHADegS2 },
		"hour-angle acceleration, degrees/s²").onlyFor(equatorial),
	opt("accel_dec_deg_s2", accel, func(t *Telescope) *float64 { return &t.AccelDecDegS2 },
		"declination acceleration, degrees/s²").onlyFor(equatorial),
	req("track_half_min", above(0, 1440, "minutes"), func(t *Telescope) *float64 { return &t.TrackHalfMin },
		"half of the tracking time about upper transit at the equator, minutes").onlyFor(transit),
	req("receivers", list[Receiver]{&receiverTable, 1, MaxReceivers}, func(t *Telescope) *[]Receiver { return &t.Receivers }, "receivers"),
}}

// receiverTable says what the radiometer equation needs. A receiver with
// several bands serves a goal in any of them, at the one centre frequency.
var receiverTable = table{what: "a receiver", fields: []field{
	req("code", text{}, func(r *Receiver) *string { return &r.Code }, "short name, unique in the telescope"),
	req("bands", names{1, MaxBands}, func(r *Receiver) *[]string { return &r.Bands }, "labels of its bands"),
	req("freq_mhz", megahertz, func(r *Receiver) *float64 { return &r.FreqMHz }, "centre frequency, MHz"),
	req("bandwidth_mhz", above(0, 1e6, "MHz").hinting("give MHz, not Hz"), func(r *Receiver) *float64 { return &r.BandwidthMHz },
		"bandwidth, MHz"),
	req("npol", integer{lo: 1, hi: 2, unit: "polarisations"}, func(r *Receiver) *int { return &r.NPol }, "polarisations summed"),
	req("trec_k", above(0, 1e5, "K"), func(r *Receiver) *float64 { return &r.TrecK }, "receiver temperature, K"),
	opt("tatm_k", within(0, 1000, "K").or(DefaultTatmK), func(r *Receiver) *float64 { return &r.TatmK },
		"atmosphere and spill-over at the zenith, K"),
	req("gain_k_per_jy", above(0, 1e4, "K/Jy"), func(r *Receiver) *float64 { return &r.GainKPerJy }, "gain, K/Jy"),
	opt("digitisation", within(1, 10, "").or(DefaultDigitisation), func(r *Receiver) *float64 { return &r.Digitisation },
		"digitisation loss factor"),
	opt("rfi_loss", losses{}, func(r *Receiver) *[]float64 { return &r.RFILoss }, "part of the band lost in each local hour"),
}}

// sourceTable describes a pulsar. The pulse width is less than the period; from
// nine tenths of it on (scattering included) the model takes the pulsar as not
// detectable, which is a plan's business and no error.
var sourceTable = table{what: "a source", fields: []field{
	req("name", text{}, func(s *Source) *string { return &s.Name }, "name, unique in the campaign"),
	req("ra_deg", within(0, 360, "degrees"), func(s *Source) *float64 { return &s.RADeg }, "right ascension (ICRS), degrees"),
	req("dec_deg", within(-90, 90, "degrees"), func(s *Source) *float64 { return &s.DecDeg }, "declination (ICRS), degrees"),
	opt("pos_epoch_mjd", anyMJD.or(DefaultPosEpochMJD), func(s *Source) *float64 { return &s.PosEpochMJD }, "epoch of the position, MJD"),
	opt("pm_ra_mas_yr", properMotion, func(s *Source) *float64 { return &s.PMRAMasYr },
		"proper motion in right ascension times cos(declination), mas/yr"),
	opt("pm_dec_mas_yr", properMotion, func(s *Source) *float64 { return &s.PMDecMasYr }, "proper motion in declination, mas/yr"),
	req("period_s", period, func(s *Source) *float64 { return &s.PeriodS }, "pulse period, s"),
	req("dm_pc_cm3", within(0, 1e5, "pc/cm³"), func(s *Source) *float64 { return &s.DMPcCm3 }, "dispersion measure, pc/cm³"),
	req("flux_mjy", above(0, 1e6, "mJy"), func(s *Source) *float64 { return &s.FluxMJy }, "mean flux density, mJy"),
	req("flux_freq_mhz", megahertz, func(s *Source) *float64 { return &s.FluxFreqMHz }, "frequency of the flux density, MHz"),
	req("spectral_index", within(-10, 10, ""), func(s *Source) *float64 { return &s.SpectralIdx },
		"spectral index: flux goes as frequency to this power"),
	req("width_s", above(0, 100, "s").hinting("give seconds"), func(s *Source) *float64 { return &s.WidthS },
		"pulse width at half height (W50), s; less than the period"),
	opt("scatter_1ghz_s", within(0, 1000, "s"), func(s *Source) *float64 { return &s.Scatter1GHzS }, "scattering time at 1 GHz, s"),
	opt("jitter_us_1h", within(0, 1e9, "us"), func(s *Source) *float64 { return &s.JitterUs1h }, "pulse jitter left after one hour, us"),
	opt("sun_min_deg", sunDistance, func(s *Source) *float64 { return &s.SunMinDeg }, "least separation from the Sun, degrees"),
	req("scan_minutes", lengths{}, func(s *Source) *[]int { return &s.ScanMinutes },
		"allowed scan lengths, minutes: multiples of the grid, ascending"),
	opt("binary", optional[Binary]{&binaryTable}, func(s *Source) **Binary { return &s.Binary }, "orbit; absent for a single pulsar"),
}}

// binaryTable has the fields of both models; "model" says which belong. Epochs
// are TDB at the solar-system barycentre.
var binaryTable = table{what: "a binary", selector: "model", choices: []string{kepler, ell1}, fields: []field{
	req("model", choice{kepler, ell1}, func(b *Binary) *string { return (*string)(&b.Model) }, "binary model"),
	req("pb_d", orbitDays, func(b *Binary) *float64 { return &b.PbD }, "orbital period, d"),
	req("a1_ls", within(0, 1e6, "light-seconds"), func(b *Binary) *float64 { return &b.A1Ls }, "projected semi-major axis, light-seconds"),
	req("ecc", within(0, 0.999, ""), func(b *Binary) *float64 { return &b.Ecc }, "eccentricity").onlyFor(kepler),
	req("om_deg", within(-360, 360, "degrees"), func(b *Binary) *float64 { return &b.OmDeg },
		"longitude of periastron at t0_mjd, degrees").onlyFor(kepler),
	req("t0_mjd", anyMJD, func(b *Binary) *float64 { return &b.T0MJD }, "periastron passage, MJD (TDB)").onlyFor(kepler),
	opt("omdot_deg_yr", within(-3600, 3600, "degrees/yr"), func(b *Binary) *float64 { return &b.OmdotDegYr },
		"advance of periastron, degrees/yr").onlyFor(kepler),
	req("tasc_mjd", anyMJD, func(b *Binary) *float64 { return &b.TascMJD }, "ascending node, MJD (TDB)").onlyFor(ell1),
	req("eps1", within(-0.7, 0.7, ""), func(b *Binary) *float64 { return &b.Eps1 }, "e sin(omega)").onlyFor(ell1),
	req("eps2", within(-0.7, 0.7, ""), func(b *Binary) *float64 { return &b.Eps2 }, "e cos(omega)").onlyFor(ell1),
	opt("pbdot", decay, func(b *Binary) *float64 { return &b.Pbdot }, "change of the orbital period, s/s"),
	opt("m2_msun", within(0, 1000, "solar masses"), func(b *Binary) *float64 { return &b.M2Msun },
		"mass of the companion, solar masses; 0 or absent: unknown"),
	opt("sini", within(0, 1, ""), func(b *Binary) *float64 { return &b.Sini }, "sine of the inclination; 0 or absent: unknown"),
}}

// goalFields are the fields that all four kinds of goal begin with; more
// follow. get finds the common part.
func goalFields[T any](get func(*T) *Goal, more ...field) []field {
	return append([]field{
		req("id", text{}, func(g *T) *string { return &get(g).ID }, "name, unique over all goals, without # and @"),
		req("source", text{}, func(g *T) *string { return &get(g).Source }, "name of the source"),
		req("bands", names{1, MaxBands}, func(g *T) *[]string { return &get(g).Bands }, "bands, any of which serves"),
		opt("telescopes", names{1, MaxTelescopes}, func(g *T) *[]string { return &get(g).Telescopes },
			"codes of the telescopes allowed; absent: all"),
		opt("priority", above(0, 1e6, "").or(DefaultPriority), func(g *T) *float64 { return &get(g).Priority },
			"what one unit is worth before urgency"),
	}, more...)
}

// cadenceTable: an early_d of 0 is meant (no scan counts early) and differs from
// an absent one.
var cadenceTable = table{what: "a cadence target", fields: goalFields(func(g *CadenceTarget) *Goal { return &g.Goal },
	req("every_d", days, func(g *CadenceTarget) *float64 { return &g.EveryD }, "wanted interval, d"),
	opt("early_d", within(0, 1e5, "d"), func(g *CadenceTarget) *float64 { return &g.EarlyD },
		"how early a scan still counts, d; default a quarter of every_d, at most half").
		orElse(func(g any) float64 { return g.(*CadenceTarget).EveryD / 4 }),
	opt("toa_us", above(0, 1e9, "us"), func(g *CadenceTarget) *float64 { return &g.TOAUs }, "wanted TOA uncertainty, us"),
)}

// phaseTable: windows are numbered by their order in the list, from 0, so the
// order is part of the meaning. A list without windows is allowed and asks for
// nothing.
var phaseTable = table{what: "a phase goal", fields: goalFields(func(g *PhaseGoal) *Goal { return &g.Goal },
	req("reference", choice{string(RefPeriastron), string(RefNode), string(RefConjunction)},
		func(g *PhaseGoal) *string { return (*string)(&g.Reference) }, "point of the orbit that phases count from"),
	req("windows", list[PhaseWindow]{&windowTable, 0, MaxWindows}, func(g *PhaseGoal) *[]PhaseWindow { return &g.Windows },
		"stretches of orbital phase"),
	req("dwell_min", mostMinutes, func(g *PhaseGoal) *float64 { return &g.DwellMin }, "least time in the window in one stretch, minutes"),
	opt("per_horizon", integer{lo: 1, hi: 1e6, standard: DefaultPerHorizon}, func(g *PhaseGoal) *int { return &g.PerHorizon },
		"most units of a window in one horizon"),
)}

// windowTable: a window may pass phase 1, as 0.9 to 1.1 does.
var windowTable = table{what: "a phase window", fields: []field{
	req("from", number{lo: 0, hi: 1, below: true, unit: "cycles"}, func(w *PhaseWindow) *float64 { return &w.From },
		"start of the window, cycles"),
	req("to", within(0, 2, "cycles"), func(w *PhaseWindow) *float64 { return &w.To },
		"end of the window, cycles: after from, at most from + 1"),
	req("need", integer{lo: 1, hi: 1e6, unit: "orbits"}, func(w *PhaseWindow) *int { return &w.Need },
		"different orbits wanted in the campaign"),
}}

// overlapTable: the scans of one overlap share a band of the goal.
var overlapTable = table{what: "an overlap goal", fields: goalFields(func(g *OverlapGoal) *Goal { return &g.Goal },
	opt("count", integer{lo: 2, hi: MaxTelescopes, unit: "telescopes", standard: DefaultOverlapCount},
		func(g *OverlapGoal) *int { return &g.Count }, "telescopes at once"),
	req("overlap_min", mostMinutes, func(g *OverlapGoal) *float64 { return &g.OverlapMin }, "least common time, minutes"),
	req("every_d", days, func(g *OverlapGoal) *float64 { return &g.EveryD }, "wanted interval, d"),
)}

// pairTable: a receiver that has both bands serves a pair by one scan.
var pairTable = table{what: "a band-pair goal", fields: goalFields(func(g *BandPairGoal) *Goal { return &g.Goal },
	req("within_h", within(0, 1e5, "h"), func(g *BandPairGoal) *float64 { return &g.WithinH },
		"most hours between the two starts, at most half of every_d"),
	req("every_d", days, func(g *BandPairGoal) *float64 { return &g.EveryD }, "wanted interval, d"),
)}

// blockTable: blocks may lie outside the campaign's own dates, as time awarded
// before or after it does.
var blockTable = table{what: "a block", fields: []field{
	req("id", text{}, func(b *Block) *string { return &b.ID }, "name, unique in the campaign"),
	req("telescope", text{}, func(b *Block) *string { return &b.Telescope }, "code of the telescope"),
	req("start", instant{}, func(b *Block) *time.Time { return &b.Start }, "first instant of the block"),
	req("end", instant{}, func(b *Block) *time.Time { return &b.End }, "first instant after the block, at most 14 days after the start"),
	req("receivers", names{1, MaxReceivers}, func(b *Block) *[]string { return &b.Receivers }, "codes of the receivers that may be used"),
	opt("label", text{}, func(b *Block) *string { return &b.Label }, "what people call it"),
	opt("lost", spans{}, func(b *Block) *[]Span { return &b.Lost }, "parts that cannot be used"),
}}

// historyTable: what was observed need not fit the grid, a block or the scan
// lengths of today; it need only name things that exist.
var historyTable = table{what: "a history scan", fields: []field{
	req("source", text{}, func(h *HistoryScan) *string { return &h.Source }, "name of the source"),
	req("telescope", text{}, func(h *HistoryScan) *string { return &h.Telescope }, "code of the telescope"),
	req("receiver", text{}, func(h *HistoryScan) *string { return &h.Receiver }, "code of the receiver"),
	req("start", instant{}, func(h *HistoryScan) *time.Time { return &h.Start }, "start of the scan"),
	req("minutes", above(0, MaxBlock.Minutes(), "minutes"), func(h *HistoryScan) *float64 { return &h.Minutes }, "length, minutes"),
	req("counted", truth{}, func(h *HistoryScan) *bool { return &h.Counted }, "whether it is good enough to serve goals"),
}}

// pinTable: the length of a pin need not be one of the source's scan lengths.
var pinTable = table{what: "a pin", fields: []field{
	req("block", text{}, func(p *Pin) *string { return &p.Block }, "id of the block"),
	req("source", text{}, func(p *Pin) *string { return &p.Source }, "name of the source"),
	req("receiver", text{}, func(p *Pin) *string { return &p.Receiver }, "code of the receiver"),
	req("start", instant{}, func(p *Pin) *time.Time { return &p.Start }, "start of the scan, on the grid"),
	req("minutes", integer{lo: 1, hi: int(MaxBlock.Minutes()), unit: "minutes"}, func(p *Pin) *int { return &p.Minutes },
		"length, minutes, on the grid"),
}}
