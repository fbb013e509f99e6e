package view

import "time"

// Sources is the list of sources.
type Sources struct {
	Page
	Query string
	Total int // before search
	Rows  []SourceRow
}

// SourceState says how a source stands against what is wanted.
type SourceState string

// The states of a source.
const (
	SourceFine    SourceState = "fine"    // nothing due before the end of the week
	SourceDue     SourceState = "due"     // due this week
	SourceLate    SourceState = "late"    // overdue
	SourcePlanned SourceState = "planned" // due, and the current plan serves it
	SourceIdle    SourceState = "idle"    // no goal names it
)

// SourceRow is a line of the list.
type SourceRow struct {
	Name     string
	PeriodMs float64
	DMPcCm3  float64
	PbD      float64   // orbital period in days; 0: single
	Last     time.Time // start of the last counted scan; zero: never
	LastAt   string    // telescope and receiver of it
	NextDue  time.Time // past: overdue since then; zero: nothing due in sight
	State    SourceState
	Goals    int
}

// Source is the page of one source.
type Source struct {
	Page
	Name              string
	RA, Dec           string // sexagesimal, ICRS
	RADeg, DecDeg     float64
	PMRAMasYr         float64 // times cos dec
	PMDecMasYr        float64
	PeriodMs, DMPcCm3 float64
	FluxMJy           float64
	FluxFreqMHz       float64
	SpectralIdx       float64
	WidthUs           float64 // W50
	JitterUs1h        float64
	SunMinDeg         float64
	ScanMinutes       []int
	State             SourceState
	Last              time.Time

	Week     string // of the elevation plots
	From, To time.Time
	Sky      []SkyPanel // one a telescope
	Orbit    *Orbit     // nil: single
	Cadence  Cadence
	Goals    []GoalRow
}

// SkyPanel is the source's week at one telescope.
type SkyPanel struct {
	Telescope string // code
	Name      string
	Points    []Point // elevation, equal steps, at most some 700
	LimitDeg  float64
	MaxDeg    float64 // greatest allowed elevation; 90: no limit
	Up        []Span  // above the limits
	NearSun   []Span  // inside the Sun limit
	Blocks    []Span
	Scans     []Span // planned or made
	Verdict   string // "up 9.4 h a day, best 67.2°", or why it never is
	SunMinDeg float64
	SunDeg    float64 // separation in the middle of the week
}

// Orbit is what the orbit ring shows. Phases are cycles from Reference.
type Orbit struct {
	Reference    string // periastron, ascending node or superior conjunction
	PbD          float64
	Ecc          float64
	A1Ls         float64
	M2Msun, Sini float64 // 0: unknown
	Windows      []PhaseWindow
	Marks        []PhaseMark
	// Phases of the two points, in cycles; negative: not marked.
	ConjunctionPhase float64
	PeriastronPhase  float64
	Next             []PhaseEvent // coming passages
}

// PhaseWindow is a wanted stretch of orbital phase.
type PhaseWindow struct {
	Goal     string
	From, To float64 // cycles; To may pass 1
	Need     int     // orbits wanted
	Had      int
	Planned  int
}

// PhaseMark is a scan on the ring.
type PhaseMark struct {
	From, To float64 // cycles
	At       time.Time
	Planned  bool // else had
}

// PhaseEvent is a coming passage of a point or window.
type PhaseEvent struct {
	What string
	Span // End zero: an instant
}

// Cadence is the strip of past weeks and the coming ones, by band.
type Cadence struct {
	From, To time.Time
	Now      time.Time
	Bands    []CadenceBand
}

// CadenceBand is the row of one band.
type CadenceBand struct {
	Band   string
	EveryD float64 // shortest interval wanted in the band; 0: none
	Marks  []CadenceMark
}

// CadenceMark is a scan in the strip.
type CadenceMark struct {
	At        time.Time
	Telescope string
	Kind      CadenceKind
}

// CadenceKind is what became of a scan.
type CadenceKind string

// The kinds.
const (
	ScanCounted CadenceKind = "counted"
	ScanFailed  CadenceKind = "failed" // made, but does not count, or lost
	ScanPlanned CadenceKind = "planned"
)

// GoalRow is one goal of a source.
type GoalRow struct {
	ID         string
	Kind       string // cadence, phase, overlap or band pair
	Bands      []string
	Telescopes []string // empty: all
	Priority   float64
	Wants      string // in words
	State      GoalState
	Standing   string    // what it has had, in words
	Due        time.Time // next, or since when it is overdue; zero: not in sight
}

// GoalState says whether a goal wants something now.
type GoalState string

// The states of a goal.
const (
	GoalMet  GoalState = "met"  // nothing due before the end of the week
	GoalDue  GoalState = "due"  // due this week
	GoalLate GoalState = "late" // overdue, or never had
	GoalOpen GoalState = "open" // orbits are still wanted, but none this week
)
