package view

import "time"

// Telescopes is the list of telescopes.
type Telescopes struct {
	Page
	Week string
	Rows []TelescopeRow
}

// TelescopeRow is a line of the list.
type TelescopeRow struct {
	Code, Name   string
	LongitudeDeg float64 // east-positive
	LatitudeDeg  float64
	Mount        string
	Receivers    []string
	WeekBlocks   int
	WeekHours    float64 // awarded this week
	UsedHours    float64 // under scans of the current plan
	Next         time.Time
}

// Telescope is the page of one telescope.
type Telescope struct {
	Page
	Code, Name      string
	LongitudeDeg    float64
	LatitudeDeg     float64
	HeightM         float64
	Zone            *time.Location
	Mount           string // altaz, equatorial or transit
	ElevationMinDeg float64
	ElevationMaxDeg float64
	SunMinDeg       float64
	Horizon         []HorizonPoint // ascending azimuth; empty: none
	// Limits are the mount's other limits and rates, each with unit.
	Limits    []Fact
	Overheads []Fact
	Receivers []ReceiverRow
	Blocks    []TelescopeBlock // coming weeks, by start
	Hours     Hours
	Recent    []NightLink // run sheets, soonest first
}

// Fact is a name with a figure in words.
type Fact struct{ Name, Value string }

// HorizonPoint is a corner of the horizon mask.
type HorizonPoint struct{ AzDeg, ElDeg float64 }

// ReceiverRow is a line of the receivers table.
type ReceiverRow struct {
	Code         string
	Bands        []string
	FreqMHz      float64
	BandwidthMHz float64
	NPol         int
	TrecK        float64
	GainKPerJy   float64
	Digitisation float64
	WorstRFI     float64 // greatest part of the band lost in an hour of the day, [0, 1]
}

// TelescopeBlock is a line of the blocks table.
type TelescopeBlock struct {
	ID, Label string
	Week      string
	Span
	Receivers []string
	LostMin   int
	Scans     int
	UsedMin   int
	Night     string // date of the run sheet; empty: none yet
}

// Hours is awarded time and what became of it, from the start of the campaign.
type Hours struct {
	Given, Planned, Observed, Lost, Free float64
}

// NightLink is a run sheet that can be opened.
type NightLink struct {
	Night string // local date
	Scans int
}

// RunSheet is one night of one telescope.
type RunSheet struct {
	Page
	Campaign     string
	Telescope    SheetTelescope
	Night        string    // local date on which the night begins
	From, To     time.Time // local noon to local noon
	Zone         *time.Location
	PlanWeek     string
	PlanRevision int // 0: no issued plan covers the night
	IssuedAt     time.Time
	IssuedBy     string
	Superseded   *SheetSuperseded
	Cautions     []string
	Reminders    []string
	Blocks       []SheetBlock
	CSV          string // path of the same content as CSV; empty: none
	PrevNight    string // dates; empty: none
	NextNight    string
}

// SheetTelescope is the part of a telescope that stands on a sheet.
type SheetTelescope struct {
	Code, Name      string
	LongitudeDeg    float64
	LatitudeDeg     float64
	HeightM         float64
	Timezone        string
	Mount           string
	ElevationMinDeg float64
	ElevationMaxDeg float64
	SunMinDeg       float64
}

// SheetSuperseded says that a later revision has taken this one's place.
type SheetSuperseded struct {
	At         time.Time
	ByRevision int
}

// SheetBlock is a block with its scans.
type SheetBlock struct {
	ID, Label string
	Span
	Receivers []string
	Lost      []Span
	Scans     []SheetScan
}

// SheetScan is one line of the sheet.
type SheetScan struct {
	Number int
	ID     string
	State  string
	Span
	Minutes           int
	LSTStartH         float64
	Source            string
	RAJ2000, DecJ2000 string
	Receiver          string
	FreqMHz           float64
	BandwidthMHz      float64
	CalS              float64
	First, Last       Pointing
	LowestElDeg       float64
	LeastSunDeg       float64
	SlewS             float64
	Begins            bool    // nothing stands before it in the block, or lost time
	Extra             bool    // it earns nothing this week
	SNR, TOAUs        float64 // 0: not detectable
	For               []string
	Pinned            bool
	Phase             *SheetPhase
	Notes             []string
}

// Pointing is where the telescope looks at one instant.
type Pointing struct {
	AzDeg, ElDeg, HAH float64
	MotorAzDeg        *float64 // nil: no azimuth drive
	Turn              int
}

// SheetPhase is orbital phase in cycles, [0, 1).
type SheetPhase struct {
	Reference string
	From, To  float64
}
