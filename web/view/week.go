package view

import "time"

// Week is the page of one week: its blocks, its plan and what is due.
type Week struct {
	Page
	Week       string // "2027-W03"
	From, To   time.Time
	Prev, Next string // weeks; empty: out of the campaign

	Plan   *Plan  // the plan shown; nil: there is none
	InUse  *Plan  // the issued plan in force when Plan is a draft after it; else nil
	Others []Plan // other plans of the week, latest first; may be empty
	Job    *Job   // latest planning job, if it runs or its end is news; else nil

	MayPlan bool // the person may plan and issue

	Source  string   // whose elevation stands behind the scans; empty: none
	Sources []string // to choose from

	Telescopes []StripRow // the strip of seven days
	Blocks     []BlockRow // by start; the coordinator's order is kept

	Query      string // search typed into the needs list
	Show       string // "", "unmet" or "met"
	Needs      []Need // those that match, most urgent first
	NeedsTotal int    // before search
	NeedsMet   int    // of the total
}

// PlanState says where a plan stands.
type PlanState string

// The states of a plan.
const (
	Draft      PlanState = "draft"
	Issued     PlanState = "issued"
	Superseded PlanState = "superseded"
)

// Plan is the state and the figures of a plan.
type Plan struct {
	ID       int64
	Version  int64 // sent back with an issue, so that nobody overwrites another's change
	State    PlanState
	Revision int       // of an issued plan; 0: draft
	MadeAt   time.Time // when the draft was made
	MadeBy   string
	IssuedAt time.Time // zero: never
	IssuedBy string
	// SupersededBy is the revision that took its place; 0: none.
	SupersededBy int

	Score    float64 // what the plan earns
	Possible float64 // weights of all that is due
	Bound    float64 // no plan can earn more
	Scans    int
	Minutes  int    // under scans
	Free     int    // minutes of blocks left free
	Status   string // how the search ended, a few words without full stop; may be empty
	// Stale says why the plan no longer fits the campaign; empty: it fits.
	Stale string
}

// Gap is how much of the bound the score lacks at most, [0, 1].
func (p *Plan) Gap() float64 {
	if p.Bound <= 0 || p.Score >= p.Bound {
		return 0
	}
	return (p.Bound - p.Score) / p.Bound
}

// JobState says where a planning job stands.
type JobState string

// The states of a job.
const (
	JobQueued  JobState = "queued"
	JobRunning JobState = "running"
	JobDone    JobState = "done"
	JobStopped JobState = "stopped"
	JobFailed  JobState = "failed"
)

// Job is the progress of planning.
type Job struct {
	ID       int64
	Week     string
	State    JobState
	Done     float64 // part of the effort done, [0, 1]
	Score    float64 // best so far
	Bound    float64 // 0: none yet
	AskedBy  string
	Started  time.Time
	Problem  string // of a failed job
	MayStop  bool
	Stopping bool // stop has been asked
}

// Active says whether the job may still change.
func (j *Job) Active() bool { return j.State == JobQueued || j.State == JobRunning }

// StripRow is a telescope's line in the strip of seven days.
type StripRow struct {
	Code, Name string
	Blocks     []StripBlock
}

// StripBlock is a block in the strip.
type StripBlock struct {
	ID string
	Span
	UsedMin int // minutes under scans
	Lost    bool
}

// BlockRow is one block with its scans.
type BlockRow struct {
	ID        string
	Label     string
	Telescope string // code
	Name      string // of the telescope
	Zone      *time.Location
	Receivers []string
	Span
	LSTStartH float64 // local apparent sidereal time at Start, hours
	Lost      []Span
	Night     []Span // Sun more than 6 degrees below the horizon
	Scans     []Scan
	FreeMin   int
	NightDate string // local date of its run sheet, "2027-01-18"; empty: no sheet yet

	// Of the chosen source; empty when none is chosen or it never rises here.
	Curve    []Point // elevation, equal steps
	LimitDeg float64 // least elevation of the telescope
	Allowed  []Span  // where the source may be observed, all limits counted
}

// Scan is a bar in a block row.
type Scan struct {
	ID       int64
	Source   string
	Receiver string
	Bands    []string
	Span
	State  string // planned, observing, done, partial, lost, dropped
	Pinned bool
	Extra  bool    // it earns nothing this week: it uses time that was left
	Value  float64 // earned by all units together
	TOAUs  float64 // predicted TOA uncertainty, microseconds; 0: not detectable
}

// Need is a unit that is due in the week, and what the plan gives it.
type Need struct {
	Goal   string
	Unit   string
	Kind   string // cadence, phase, overlap or band pair
	Source string
	Bands  []string
	What   string    // "every 7 days; last scan 9.2 days ago", in the server's words
	Due    time.Time // zero: the whole week
	Weight float64   // most that it can earn
	Value  float64   // what this plan earns from it
	State  NeedState
	Scans  []NeedScan
	// Reasons why it is unmet or earns less than it could, in words with their
	// figures.
	Reasons []string
}

// NeedState is a need's standing in the plan shown.
type NeedState string

// The standings.
const (
	NeedMet    NeedState = "met"
	NeedPartly NeedState = "partly" // it earns, but less often or less than it could
	NeedUnmet  NeedState = "unmet"
	NeedOpen   NeedState = "open" // no plan yet
)

// NeedScan is a scan that serves a need.
type NeedScan struct {
	ID        int64
	Telescope string
	Receiver  string
	Start     time.Time
	Minutes   int
	Value     float64
	State     string
}

// ScanCard is the page of one scan.
type ScanCard struct {
	Page
	Week      string
	Plan      Plan
	Scan      Scan
	Telescope string // code
	Name      string // of the telescope
	Block     string
	Zone      *time.Location
	LSTStartH float64
	LSTEndH   float64
	FreqMHz   float64
	BandMHz   float64
	CalS      float64
	SNR       float64 // predicted; 0: not detectable
	WantedUs  float64 // TOA uncertainty wanted; 0: none stated
	First     Place
	Last      Place
	MotorDeg  *float64 // azimuth drive at the start, turns counted; nil: no such drive
	Track     []Point  // elevation from before to after the scan
	BlockSpan Span
	LimitDeg  float64
	Allowed   []Span
	Phase     string // orbital phase in words; empty: single
	Earns     []Earning
	Outcome   *Outcome // nil: nothing reported yet
	Prev      int64    // scan before in the block; 0: none
	Next      int64
}

// Earning is what a scan gets for one unit.
type Earning struct {
	Goal, Unit string
	What       string // in words
	Value      float64
}

// Outcome is what was reported of a scan.
type Outcome struct {
	State      string
	At         time.Time
	By         string
	Start      time.Time // actual; zero: as planned
	Minutes    float64   // actual; 0: as planned
	Cause      string    // of a loss
	SNR, TOAUs float64   // measured; 0: not reported
	Note       string
}
