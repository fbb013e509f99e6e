// Package scheduler is the vocabulary of observing plans for a pulsar timing
// array: what a campaign wants and has (telescopes, blocks, sources, goals,
// history, pins), what a plan is, and the reading, checking and writing of the
// two files that carry them.
//
// ReadCampaign and ReadPlan read files strictly: everything wrong with a file
// is reported at once, each problem with its JSON Pointer and with a message
// that names the thing, the field, the value and what is allowed (Problems).
// Campaign.Validate applies the same rules to a campaign made in memory.
// WriteCampaign and WritePlan write one canonical form, the same bytes for the
// same meaning. CampaignSchema and PlanSchema describe the files as JSON
// Schema. All of them follow one table of fields for each sort of object
// (tables_campaign.go, tables_plan.go); a field is added to the format by adding
// it to the struct and to its table, and a test fails where one is forgotten.
//
// Errors that callers must tell apart are of one of the kinds in errors.go.
//
// The package is pure: it reads no clock, file or database and keeps no
// globals that change. Units stand in the names: degrees unless a name says
// otherwise, longitudes east-positive, every instant UTC with a resolution of
// one millisecond.
package scheduler

import "time"

// CampaignFormat is the value of "format" in a campaign file.
const CampaignFormat = "campaign/1"

// Campaign is everything a plan is made from. A Campaign that came out of
// ReadCampaign is valid and has every default filled in; the zero value is not
// a valid campaign.
type Campaign struct {
	Name    string
	Start   time.Time // inclusive
	End     time.Time // exclusive, after Start
	GridMin int       // planning grid in minutes: 1, 2, 5 or 10
	DUT1S   float64   // UT1-UTC in seconds, within ±1

	Telescopes     []Telescope
	Sources        []Source
	CadenceTargets []CadenceTarget
	PhaseGoals     []PhaseGoal
	OverlapGoals   []OverlapGoal
	BandPairGoals  []BandPairGoal
	Blocks         []Block
	History        []HistoryScan
	Pins           []Pin
}

// MountKind names how a telescope moves.
type MountKind string

// The three kinds of mount.
const (
	MountAltAz      MountKind = "altaz"      // azimuth and elevation, with a cable wrap
	MountEquatorial MountKind = "equatorial" // hour angle and declination
	MountTransit    MountKind = "transit"    // declination only, near upper transit
)

// Telescope is a site, a mount with its limits, and receivers.
type Telescope struct {
	Code         string // unique in the campaign
	Name         string
	LongitudeDeg float64 // east-positive, [-180, 360]
	LatitudeDeg  float64 // geodetic (WGS84), [-90, 90]
	HeightM      float64 // above the ellipsoid
	Timezone     string  // IANA name
	Mount        MountKind

	ElevationMinDeg float64
	ElevationMaxDeg float64
	Horizon         []HorizonPoint // ascending azimuth; empty: no mask
	SunMinDeg       float64        // least separation from the Sun

	SetupS  float64 // before the first scan of a block
	CalS    float64 // noise-diode calibration before every scan
	SwitchS float64 // receiver change
	SettleS float64 // at the end of every slew

	// Alt-azimuth. The motor range may span more than 360 degrees.
	AzimuthRangeDeg [2]float64
	RateAzDegS      float64
	RateElDegS      float64 // also the transit mount's declination drive
	AccelAzDegS2    float64 // 0: reaches its rate at once
	AccelElDegS2    float64

	// Equatorial.
	HourAngleRangeH [2]float64
	RateHADegS      float64
	RateDecDegS     float64
	AccelHADegS2    float64
	AccelDecDegS2   float64

	// Transit: within ± TrackHalfMin / cos(declination) of upper transit.
	TrackHalfMin float64

	Receivers []Receiver
}

// HorizonPoint is one corner of a horizon mask, which is piecewise linear in
// azimuth and wraps at 360 degrees.
type HorizonPoint struct {
	AzimuthDeg   float64 // [0, 360)
	ElevationDeg float64 // [-90, 90]
}

// Receiver is one front end of a telescope.
type Receiver struct {
	Code         string
	Bands        []string // labels; a wide-band receiver lists several
	FreqMHz      float64  // centre
	BandwidthMHz float64
	NPol         int     // 1 or 2
	TrecK        float64 // receiver temperature
	TatmK        float64 // atmosphere and spill-over at the zenith, default 2
	GainKPerJy   float64
	Digitisation float64   // loss factor beta >= 1, default 1
	RFILoss      []float64 // empty, or the part of the band lost in each of 24 local hours
}

// Source is a pulsar.
type Source struct {
	Name         string  // unique in the campaign
	RADeg        float64 // ICRS at PosEpochMJD
	DecDeg       float64
	PosEpochMJD  float64 // default 51544.5
	PMRAMasYr    float64 // times cos(dec)
	PMDecMasYr   float64
	PeriodS      float64
	DMPcCm3      float64
	FluxMJy      float64 // at FluxFreqMHz
	FluxFreqMHz  float64
	SpectralIdx  float64
	WidthS       float64 // W50, the same in all bands
	Scatter1GHzS float64 // scattering time at 1 GHz
	JitterUs1h   float64 // pulse jitter left after one hour, microseconds
	SunMinDeg    float64 // least separation from the Sun
	ScanMinutes  []int   // allowed scan lengths: multiples of the grid, ascending
	Binary       *Binary // nil: single
}

// BinaryModel names the parameters an orbit is given in.
type BinaryModel string

// The two binary models.
const (
	BinaryKepler BinaryModel = "kepler"
	BinaryELL1   BinaryModel = "ell1"
)

// Binary is an orbit. Epochs are TDB at the solar-system barycentre.
type Binary struct {
	Model BinaryModel
	PbD   float64 // period, days
	A1Ls  float64 // projected semi-major axis, light-seconds

	// Kepler.
	Ecc        float64 // [0, 0.999]
	OmDeg      float64 // longitude of periastron at T0
	T0MJD      float64
	OmdotDegYr float64

	// ELL1.
	TascMJD float64
	Eps1    float64 // e sin(omega)
	Eps2    float64 // e cos(omega)

	Pbdot  float64
	M2Msun float64 // 0: unknown
	Sini   float64 // 0: unknown
}

// Goal is what all four kinds of goal have in common.
type Goal struct {
	ID         string // unique over all four lists, without # and @
	Source     string
	Bands      []string // any of these serves
	Telescopes []string // any of these may be used; empty: all
	Priority   float64  // > 0, default 1
}

// CadenceTarget asks for one scan every EveryD days.
type CadenceTarget struct {
	Goal
	EveryD float64
	EarlyD float64 // how early still counts; default EveryD/4, at most EveryD/2
	TOAUs  float64 // wanted TOA uncertainty in microseconds; 0: none stated
}

// PhaseReference is the point of the orbit that phases count from.
type PhaseReference string

// The three reference points.
const (
	RefPeriastron  PhaseReference = "periastron"
	RefNode        PhaseReference = "node"        // ascending node
	RefConjunction PhaseReference = "conjunction" // superior: the pulsar behind its companion
)

// PhaseGoal asks for orbital phases to be observed.
type PhaseGoal struct {
	Goal
	Reference  PhaseReference
	Windows    []PhaseWindow
	DwellMin   float64 // least time in the window in one stretch
	PerHorizon int     // most units of a window in one horizon, default 1
}

// PhaseWindow is a stretch of orbital phase in cycles.
type PhaseWindow struct {
	From float64 // [0, 1)
	To   float64 // (From, From+1]; may pass 1
	Need int     // different orbits wanted in the campaign
}

// OverlapGoal asks for the source on several telescopes at the same time.
type OverlapGoal struct {
	Goal
	Count      int // telescopes at once, default 2
	OverlapMin float64
	EveryD     float64
}

// BandPairGoal asks for the source in two bands near in time.
type BandPairGoal struct {
	Goal            // Bands are exactly two
	WithinH float64 // between the two starts, at most half of EveryD
	EveryD  float64
}

// Block is a stretch of awarded time at one telescope, [Start, End).
type Block struct {
	ID        string
	Telescope string
	Start     time.Time
	End       time.Time
	Receivers []string
	Label     string
	Lost      []Span // parts that cannot be used
}

// Span is a stretch of time [Start, End).
type Span struct {
	Start, End time.Time
}

// HistoryScan is a scan that was made.
type HistoryScan struct {
	Source    string
	Telescope string
	Receiver  string
	Start     time.Time
	Minutes   float64
	Counted   bool // good enough to serve goals
}

// Pin is a scan that must stand in the plan as it is.
type Pin struct {
	Block    string
	Source   string
	Receiver string
	Start    time.Time
	Minutes  int
}
