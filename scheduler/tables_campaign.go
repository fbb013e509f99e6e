package scheduler

import (
	"math"
	"time"
)

// Ranges. Those that the planning model states are exact; the others only keep
// out what cannot be physical, which mostly is a value in another unit.
var (
	anyMJD      = within(15020, 88069, "").hinting("a modified Julian date of the years 1900 to 2099; MJD = JD - 2400000.5")
	seconds     = within(0, 86400, "s")
	rate        = above(0, 100, "degrees/s")
	accel       = above(0, 1000, "degrees/s²")
	megahertz   = within(10, 1e6, "MHz").hinting("give MHz, not Hz or GHz")
	sunDistance = within(0, 180, "degrees")
	days        = within(0.04, 1e5, "d")
	mostMinutes = above(0, 1e6, "minutes")
)

const (
	must = true
	may  = false

	altaz, equatorial, transit = string(MountAltAz), string(MountEquatorial), string(MountTransit)
	kepler, ell1               = string(BinaryKepler), string(BinaryELL1)
)

// campaignFile is the whole file.
var campaignFile = table{what: "a campaign file", lines: true, fields: []field{
	{key: "format", need: must, kind: literal(CampaignFormat), doc: "format of this file"},
	{key: "campaign", need: must, kind: nested{&campaignHead}, at: at(func(c *Campaign) *Campaign { return c }), doc: "the campaign itself"},
	{key: "telescopes", kind: list[Telescope]{&telescopeTable, 0, MaxTelescopes}, at: at(func(c *Campaign) *[]Telescope { return &c.Telescopes }), doc: "the telescopes"},
	{key: "sources", kind: list[Source]{&sourceTable, 0, MaxSources}, at: at(func(c *Campaign) *[]Source { return &c.Sources }), doc: "the pulsars"},
	{key: "cadence_targets", kind: list[CadenceTarget]{&cadenceTable, 0, MaxGoals}, at: at(func(c *Campaign) *[]CadenceTarget { return &c.CadenceTargets }), doc: "goals of one scan every so often"},
	{key: "phase_goals", kind: list[PhaseGoal]{&phaseTable, 0, MaxGoals}, at: at(func(c *Campaign) *[]PhaseGoal { return &c.PhaseGoals }), doc: "goals of scans at places of an orbit"},
	{key: "overlap_goals", kind: list[OverlapGoal]{&overlapTable, 0, MaxGoals}, at: at(func(c *Campaign) *[]OverlapGoal { return &c.OverlapGoals }), doc: "goals of several telescopes at once"},
	{key: "band_pair_goals", kind: list[BandPairGoal]{&pairTable, 0, MaxGoals}, at: at(func(c *Campaign) *[]BandPairGoal { return &c.BandPairGoals }), doc: "goals of two bands near in time"},
	{key: "blocks", kind: list[Block]{&blockTable, 0, MaxBlocks}, at: at(func(c *Campaign) *[]Block { return &c.Blocks }), doc: "awarded stretches of telescope time; those of one telescope do not overlap"},
	{key: "history", kind: list[HistoryScan]{&historyTable, 0, MaxHistory}, at: at(func(c *Campaign) *[]HistoryScan { return &c.History }), doc: "scans that were made"},
	{key: "pins", kind: list[Pin]{&pinTable, 0, MaxPins}, at: at(func(c *Campaign) *[]Pin { return &c.Pins }), doc: "scans that must stand in the plan as they are"},
}}

// campaignHead is the object "campaign".
var campaignHead = table{what: "the campaign", fields: []field{
	{key: "name", need: must, kind: text{}, at: at(func(c *Campaign) *string { return &c.Name }), doc: "name of the campaign; a plan names the campaign it is for"},
	{key: "start", need: must, kind: instant{}, at: at(func(c *Campaign) *time.Time { return &c.Start }), doc: "first instant of the campaign"},
	{key: "end", need: must, kind: instant{}, at: at(func(c *Campaign) *time.Time { return &c.End }), doc: "first instant after the campaign, at most 5 years after the start"},
	{key: "grid_min", kind: integer{unit: "minutes", standard: DefaultGridMin, one: []int{1, 2, 5, 10}}, at: at(func(c *Campaign) *int { return &c.GridMin }), doc: "planning grid: scans start and end at multiples of it since 00:00 UTC"},
	{key: "dut1_s", kind: within(-1, 1, "s"), at: at(func(c *Campaign) *float64 { return &c.DUT1S }), doc: "UT1-UTC, s"},
}}

var telescopeTable = table{what: "a telescope", selector: "mount", choices: []string{altaz, equatorial, transit}, fields: []field{
	{key: "code", need: must, kind: text{}, at: at(func(t *Telescope) *string { return &t.Code }), doc: "short name, unique in the campaign"},
	{key: "name", need: must, kind: text{}, at: at(func(t *Telescope) *string { return &t.Name }), doc: "full name"},
	{key: "longitude_deg", need: must, kind: within(-180, 360, "degrees, east-positive"), at: at(func(t *Telescope) *float64 { return &t.LongitudeDeg }), doc: "longitude, east-positive, degrees"},
	{key: "latitude_deg", need: must, kind: within(-90, 90, "degrees"), at: at(func(t *Telescope) *float64 { return &t.LatitudeDeg }), doc: "geodetic latitude (WGS84), degrees"},
	{key: "height_m", need: must, kind: within(-500, 9000, "m"), at: at(func(t *Telescope) *float64 { return &t.HeightM }), doc: "height above the ellipsoid, m"},
	{key: "timezone", need: must, kind: text{}, at: at(func(t *Telescope) *string { return &t.Timezone }), doc: "IANA time zone"},
	{key: "mount", need: must, kind: choice{altaz, equatorial, transit}, at: at(func(t *Telescope) *string { return (*string)(&t.Mount) }), doc: "how the telescope moves"},
	{key: "elevation_min_deg", need: must, kind: within(0, 90, "degrees"), at: at(func(t *Telescope) *float64 { return &t.ElevationMinDeg }), doc: "lowest elevation, degrees"},
	{key: "elevation_max_deg", need: must, kind: within(0, 90, "degrees"), at: at(func(t *Telescope) *float64 { return &t.ElevationMaxDeg }), doc: "highest elevation, degrees"},
	{key: "horizon", kind: corners{}, at: at(func(t *Telescope) *[]HorizonPoint { return &t.Horizon }), doc: "horizon mask, piecewise linear in azimuth, wrapping at 360 degrees"},
	{key: "sun_min_deg", kind: sunDistance, at: at(func(t *Telescope) *float64 { return &t.SunMinDeg }), doc: "least separation from the Sun, degrees"},
	{key: "setup_s", need: must, kind: seconds, at: at(func(t *Telescope) *float64 { return &t.SetupS }), doc: "before the first scan of a block, s"},
	{key: "cal_s", need: must, kind: seconds, at: at(func(t *Telescope) *float64 { return &t.CalS }), doc: "calibration before every scan, s"},
	{key: "switch_s", need: must, kind: seconds, at: at(func(t *Telescope) *float64 { return &t.SwitchS }), doc: "receiver change, s"},
	{key: "settle_s", need: must, kind: seconds, at: at(func(t *Telescope) *float64 { return &t.SettleS }), doc: "at the end of every slew, s"},
	{key: "azimuth_range_deg", need: must, only: altaz, kind: span{-720, 720, "degrees"}, at: at(func(t *Telescope) *[2]float64 { return &t.AzimuthRangeDeg }), doc: "range of the azimuth motor, degrees; may span more than 360"},
	{key: "rate_az_deg_s", need: must, only: altaz, kind: rate, at: at(func(t *Telescope) *float64 { return &t.RateAzDegS }), doc: "azimuth rate, degrees/s"},
	{key: "rate_el_deg_s", need: must, only: altaz + " " + transit, kind: rate, at: at(func(t *Telescope) *float64 { return &t.RateElDegS }), doc: "elevation rate, degrees/s; on a transit mount it moves in declination"},
	{key: "accel_az_deg_s2", only: altaz, kind: accel, at: at(func(t *Telescope) *float64 { return &t.AccelAzDegS2 }), doc: "azimuth acceleration, degrees/s²"},
	{key: "accel_el_deg_s2", only: altaz + " " + transit, kind: accel, at: at(func(t *Telescope) *float64 { return &t.AccelElDegS2 }), doc: "elevation acceleration, degrees/s²"},
	{key: "hour_angle_range_h", need: must, only: equatorial, kind: span{-12, 12, "hours"}, at: at(func(t *Telescope) *[2]float64 { return &t.HourAngleRangeH }), doc: "range of hour angle, hours, west-positive"},
	{key: "rate_ha_deg_s", need: must, only: equatorial, kind: rate, at: at(func(t *Telescope) *float64 { return &t.RateHADegS }), doc: "hour-angle rate, degrees/s"},
	{key: "rate_dec_deg_s", need: must, only: equatorial, kind: rate, at: at(func(t *Telescope) *float64 { return &t.RateDecDegS }), doc: "declination rate, degrees/s"},
	{key: "accel_ha_deg_s2", only: equatorial, kind: accel, at: at(func(t *Telescope) *float64 { return &t.AccelHADegS2 }), doc: "hour-angle acceleration, degrees/s²"},
	{key: "accel_dec_deg_s2", only: equatorial, kind: accel, at: at(func(t *Telescope) *float64 { return &t.AccelDecDegS2 }), doc: "declination acceleration, degrees/s²"},
	{key: "track_half_min", need: must, only: transit, kind: above(0, 1440, "minutes"), at: at(func(t *Telescope) *float64 { return &t.TrackHalfMin }), doc: "half of the tracking time about upper transit at the equator, minutes"},
	{key: "receivers", need: must, kind: list[Receiver]{&receiverTable, 1, MaxReceivers}, at: at(func(t *Telescope) *[]Receiver { return &t.Receivers }), doc: "receivers"},
}}

var receiverTable = table{what: "a receiver", fields: []field{
	{key: "code", need: must, kind: text{}, at: at(func(r *Receiver) *string { return &r.Code }), doc: "short name, unique in the telescope"},
	{key: "bands", need: must, kind: names{1, MaxBands}, at: at(func(r *Receiver) *[]string { return &r.Bands }), doc: "labels of its bands"},
	{key: "freq_mhz", need: must, kind: megahertz, at: at(func(r *Receiver) *float64 { return &r.FreqMHz }), doc: "centre frequency, MHz"},
	{key: "bandwidth_mhz", need: must, kind: above(0, 1e6, "MHz").hinting("give MHz, not Hz"), at: at(func(r *Receiver) *float64 { return &r.BandwidthMHz }), doc: "bandwidth, MHz"},
	{key: "npol", need: must, kind: integer{lo: 1, hi: 2, unit: "polarisations"}, at: at(func(r *Receiver) *int { return &r.NPol }), doc: "polarisations summed"},
	{key: "trec_k", need: must, kind: above(0, 1e5, "K"), at: at(func(r *Receiver) *float64 { return &r.TrecK }), doc: "receiver temperature, K"},
	{key: "tatm_k", kind: within(0, 1000, "K").or(DefaultTatmK), at: at(func(r *Receiver) *float64 { return &r.TatmK }), doc: "atmosphere and spill-over at the zenith, K"},
	{key: "gain_k_per_jy", need: must, kind: above(0, 1e4, "K/Jy"), at: at(func(r *Receiver) *float64 { return &r.GainKPerJy }), doc: "gain, K/Jy"},
	{key: "digitisation", kind: within(1, 10, "").or(DefaultDigitisation), at: at(func(r *Receiver) *float64 { return &r.Digitisation }), doc: "digitisation loss factor"},
	{key: "rfi_loss", kind: losses{}, at: at(func(r *Receiver) *[]float64 { return &r.RFILoss }), doc: "part of the band lost in each local hour"},
}}

var sourceTable = table{what: "a source", fields: []field{
	{key: "name", need: must, kind: text{}, at: at(func(s *Source) *string { return &s.Name }), doc: "name, unique in the campaign"},
	{key: "ra_deg", need: must, kind: within(0, 360, "degrees"), at: at(func(s *Source) *float64 { return &s.RADeg }), doc: "right ascension (ICRS), degrees"},
	{key: "dec_deg", need: must, kind: within(-90, 90, "degrees"), at: at(func(s *Source) *float64 { return &s.DecDeg }), doc: "declination (ICRS), degrees"},
	{key: "pos_epoch_mjd", kind: anyMJD.or(DefaultPosEpochMJD), at: at(func(s *Source) *float64 { return &s.PosEpochMJD }), doc: "epoch of the position, MJD"},
	{key: "pm_ra_mas_yr", kind: within(-1e5, 1e5, "mas/yr"), at: at(func(s *Source) *float64 { return &s.PMRAMasYr }), doc: "proper motion in right ascension times cos(declination), mas/yr"},
	{key: "pm_dec_mas_yr", kind: within(-1e5, 1e5, "mas/yr"), at: at(func(s *Source) *float64 { return &s.PMDecMasYr }), doc: "proper motion in declination, mas/yr"},
	{key: "period_s", need: must, kind: above(0, 100, "s").hinting("give seconds, not milliseconds"), at: at(func(s *Source) *float64 { return &s.PeriodS }), doc: "pulse period, s"},
	{key: "dm_pc_cm3", need: must, kind: within(0, 1e5, "pc/cm³"), at: at(func(s *Source) *float64 { return &s.DMPcCm3 }), doc: "dispersion measure, pc/cm³"},
	{key: "flux_mjy", need: must, kind: above(0, 1e6, "mJy"), at: at(func(s *Source) *float64 { return &s.FluxMJy }), doc: "mean flux density, mJy"},
	{key: "flux_freq_mhz", need: must, kind: megahertz, at: at(func(s *Source) *float64 { return &s.FluxFreqMHz }), doc: "frequency of the flux density, MHz"},
	{key: "spectral_index", need: must, kind: within(-10, 10, ""), at: at(func(s *Source) *float64 { return &s.SpectralIdx }), doc: "spectral index: flux goes as frequency to this power"},
	{key: "width_s", need: must, kind: above(0, 100, "s").hinting("give seconds"), at: at(func(s *Source) *float64 { return &s.WidthS }), doc: "pulse width at half height (W50), s; less than the period"},
	{key: "scatter_1ghz_s", kind: within(0, 1000, "s"), at: at(func(s *Source) *float64 { return &s.Scatter1GHzS }), doc: "scattering time at 1 GHz, s"},
	{key: "jitter_us_1h", kind: within(0, 1e9, "us"), at: at(func(s *Source) *float64 { return &s.JitterUs1h }), doc: "pulse jitter left after one hour, us"},
	{key: "sun_min_deg", kind: sunDistance, at: at(func(s *Source) *float64 { return &s.SunMinDeg }), doc: "least separation from the Sun, degrees"},
	{key: "scan_minutes", need: must, kind: lengths{}, at: at(func(s *Source) *[]int { return &s.ScanMinutes }), doc: "allowed scan lengths, minutes: multiples of the grid, ascending"},
	{key: "binary", kind: optional[Binary]{&binaryTable}, at: at(func(s *Source) **Binary { return &s.Binary }), doc: "orbit; absent for a single pulsar"},
}}

var binaryTable = table{what: "a binary", selector: "model", choices: []string{kepler, ell1}, fields: []field{
	{key: "model", need: must, kind: choice{kepler, ell1}, at: at(func(b *Binary) *string { return (*string)(&b.Model) }), doc: "binary model"},
	{key: "pb_d", need: must, kind: within(0.01, 1e6, "d").hinting("give days"), at: at(func(b *Binary) *float64 { return &b.PbD }), doc: "orbital period, d"},
	{key: "a1_ls", need: must, kind: within(0, 1e6, "light-seconds"), at: at(func(b *Binary) *float64 { return &b.A1Ls }), doc: "projected semi-major axis, light-seconds"},
	{key: "ecc", need: must, only: kepler, kind: within(0, 0.999, ""), at: at(func(b *Binary) *float64 { return &b.Ecc }), doc: "eccentricity"},
	{key: "om_deg", need: must, only: kepler, kind: within(-360, 360, "degrees"), at: at(func(b *Binary) *float64 { return &b.OmDeg }), doc: "longitude of periastron at t0_mjd, degrees"},
	{key: "t0_mjd", need: must, only: kepler, kind: anyMJD, at: at(func(b *Binary) *float64 { return &b.T0MJD }), doc: "periastron passage, MJD (TDB)"},
	{key: "omdot_deg_yr", only: kepler, kind: within(-3600, 3600, "degrees/yr"), at: at(func(b *Binary) *float64 { return &b.OmdotDegYr }), doc: "advance of periastron, degrees/yr"},
	{key: "tasc_mjd", need: must, only: ell1, kind: anyMJD, at: at(func(b *Binary) *float64 { return &b.TascMJD }), doc: "ascending node, MJD (TDB)"},
	{key: "eps1", need: must, only: ell1, kind: within(-0.7, 0.7, ""), at: at(func(b *Binary) *float64 { return &b.Eps1 }), doc: "e sin(omega)"},
	{key: "eps2", need: must, only: ell1, kind: within(-0.7, 0.7, ""), at: at(func(b *Binary) *float64 { return &b.Eps2 }), doc: "e cos(omega)"},
	{key: "pbdot", kind: within(-1e-6, 1e-6, "").hinting("s/s, without a factor 1e-12"), at: at(func(b *Binary) *float64 { return &b.Pbdot }), doc: "change of the orbital period, s/s"},
	{key: "m2_msun", kind: within(0, 1000, "solar masses"), at: at(func(b *Binary) *float64 { return &b.M2Msun }), doc: "mass of the companion, solar masses; 0 or absent: unknown"},
	{key: "sini", kind: within(0, 1, ""), at: at(func(b *Binary) *float64 { return &b.Sini }), doc: "sine of the inclination; 0 or absent: unknown"},
}}

// goalFields are the fields that all four kinds of goal begin with; more
// follow. get finds the common part.
func goalFields[T any](get func(*T) *Goal, more ...field) []field {
	return append([]field{
		{key: "id", need: must, kind: text{}, at: at(func(g *T) *string { return &get(g).ID }), doc: "name, unique over all goals, without # and @"},
		{key: "source", need: must, kind: text{}, at: at(func(g *T) *string { return &get(g).Source }), doc: "name of the source"},
		{key: "bands", need: must, kind: names{1, MaxBands}, at: at(func(g *T) *[]string { return &get(g).Bands }), doc: "bands, any of which serves"},
		{key: "telescopes", kind: names{1, MaxTelescopes}, at: at(func(g *T) *[]string { return &get(g).Telescopes }), doc: "codes of the telescopes allowed; absent: all"},
		{key: "priority", kind: above(0, 1e6, "").or(DefaultPriority), at: at(func(g *T) *float64 { return &get(g).Priority }), doc: "what one unit is worth before urgency"},
	}, more...)
}

var cadenceTable = table{what: "a cadence target", fields: goalFields(func(g *CadenceTarget) *Goal { return &g.Goal },
	field{key: "every_d", need: must, kind: days, at: at(func(g *CadenceTarget) *float64 { return &g.EveryD }), doc: "wanted interval, d"},
	field{key: "early_d", kind: within(0, 1e5, "d"), at: at(func(g *CadenceTarget) *float64 { return &g.EarlyD }),
		derived: func(g any) float64 { return g.(*CadenceTarget).EveryD / 4 }, doc: "how early a scan still counts, d; default a quarter of every_d, at most half"},
	field{key: "toa_us", kind: above(0, 1e9, "us"), at: at(func(g *CadenceTarget) *float64 { return &g.TOAUs }), doc: "wanted TOA uncertainty, us"},
)}

var phaseTable = table{what: "a phase goal", fields: goalFields(func(g *PhaseGoal) *Goal { return &g.Goal },
	field{key: "reference", need: must, kind: choice{string(RefPeriastron), string(RefNode), string(RefConjunction)}, at: at(func(g *PhaseGoal) *string { return (*string)(&g.Reference) }), doc: "point of the orbit that phases count from"},
	field{key: "windows", need: must, kind: list[PhaseWindow]{&windowTable, 0, MaxWindows}, at: at(func(g *PhaseGoal) *[]PhaseWindow { return &g.Windows }), doc: "stretches of orbital phase"},
	field{key: "dwell_min", need: must, kind: mostMinutes, at: at(func(g *PhaseGoal) *float64 { return &g.DwellMin }), doc: "least time in the window in one stretch, minutes"},
	field{key: "per_horizon", kind: integer{lo: 1, hi: 1e6, standard: DefaultPerHorizon}, at: at(func(g *PhaseGoal) *int { return &g.PerHorizon }), doc: "most units of a window in one horizon"},
)}

var windowTable = table{what: "a phase window", fields: []field{
	{key: "from", need: must, kind: number{lo: 0, hi: 1, below: true, unit: "cycles"}, at: at(func(w *PhaseWindow) *float64 { return &w.From }), doc: "start of the window, cycles"},
	{key: "to", need: must, kind: within(0, 2, "cycles"), at: at(func(w *PhaseWindow) *float64 { return &w.To }), doc: "end of the window, cycles: after from, at most from + 1"},
	{key: "need", need: must, kind: integer{lo: 1, hi: 1e6, unit: "orbits"}, at: at(func(w *PhaseWindow) *int { return &w.Need }), doc: "different orbits wanted in the campaign"},
}}

var overlapTable = table{what: "an overlap goal", fields: goalFields(func(g *OverlapGoal) *Goal { return &g.Goal },
	field{key: "count", kind: integer{lo: 2, hi: MaxTelescopes, unit: "telescopes", standard: DefaultOverlapCount}, at: at(func(g *OverlapGoal) *int { return &g.Count }), doc: "telescopes at once"},
	field{key: "overlap_min", need: must, kind: mostMinutes, at: at(func(g *OverlapGoal) *float64 { return &g.OverlapMin }), doc: "least common time, minutes"},
	field{key: "every_d", need: must, kind: days, at: at(func(g *OverlapGoal) *float64 { return &g.EveryD }), doc: "wanted interval, d"},
)}

var pairTable = table{what: "a band-pair goal", fields: goalFields(func(g *BandPairGoal) *Goal { return &g.Goal },
	field{key: "within_h", need: must, kind: within(0, 1e5, "h"), at: at(func(g *BandPairGoal) *float64 { return &g.WithinH }), doc: "most hours between the two starts, at most half of every_d"},
	field{key: "every_d", need: must, kind: days, at: at(func(g *BandPairGoal) *float64 { return &g.EveryD }), doc: "wanted interval, d"},
)}

var blockTable = table{what: "a block", fields: []field{
	{key: "id", need: must, kind: text{}, at: at(func(b *Block) *string { return &b.ID }), doc: "name, unique in the campaign"},
	{key: "telescope", need: must, kind: text{}, at: at(func(b *Block) *string { return &b.Telescope }), doc: "code of the telescope"},
	{key: "start", need: must, kind: instant{}, at: at(func(b *Block) *time.Time { return &b.Start }), doc: "first instant of the block"},
	{key: "end", need: must, kind: instant{}, at: at(func(b *Block) *time.Time { return &b.End }), doc: "first instant after the block, at most 14 days after the start"},
	{key: "receivers", need: must, kind: names{1, MaxReceivers}, at: at(func(b *Block) *[]string { return &b.Receivers }), doc: "codes of the receivers that may be used"},
	{key: "label", kind: text{}, at: at(func(b *Block) *string { return &b.Label }), doc: "what people call it"},
	{key: "lost", kind: spans{}, at: at(func(b *Block) *[]Span { return &b.Lost }), doc: "parts that cannot be used"},
}}

var historyTable = table{what: "a history scan", fields: []field{
	{key: "source", need: must, kind: text{}, at: at(func(h *HistoryScan) *string { return &h.Source }), doc: "name of the source"},
	{key: "telescope", need: must, kind: text{}, at: at(func(h *HistoryScan) *string { return &h.Telescope }), doc: "code of the telescope"},
	{key: "receiver", need: must, kind: text{}, at: at(func(h *HistoryScan) *string { return &h.Receiver }), doc: "code of the receiver"},
	{key: "start", need: must, kind: instant{}, at: at(func(h *HistoryScan) *time.Time { return &h.Start }), doc: "start of the scan"},
	{key: "minutes", need: must, kind: above(0, MaxBlock.Minutes(), "minutes"), at: at(func(h *HistoryScan) *float64 { return &h.Minutes }), doc: "length, minutes"},
	{key: "counted", need: must, kind: truth{}, at: at(func(h *HistoryScan) *bool { return &h.Counted }), doc: "whether it is good enough to serve goals"},
}}

var pinTable = table{what: "a pin", fields: []field{
	{key: "block", need: must, kind: text{}, at: at(func(p *Pin) *string { return &p.Block }), doc: "id of the block"},
	{key: "source", need: must, kind: text{}, at: at(func(p *Pin) *string { return &p.Source }), doc: "name of the source"},
	{key: "receiver", need: must, kind: text{}, at: at(func(p *Pin) *string { return &p.Receiver }), doc: "code of the receiver"},
	{key: "start", need: must, kind: instant{}, at: at(func(p *Pin) *time.Time { return &p.Start }), doc: "start of the scan, on the grid"},
	{key: "minutes", need: must, kind: integer{lo: 1, hi: int(MaxBlock.Minutes()), unit: "minutes"}, at: at(func(p *Pin) *int { return &p.Minutes }), doc: "length, minutes, on the grid"},
}}

// anyNumber is a finite number without limits.
var anyNumber = within(math.Inf(-1), math.Inf(1), "")
