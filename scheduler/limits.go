package scheduler

import "time"

// Upper limits of what the two files may hold. They are far above any real
// array and keep a wrong or hostile file from costing more than its reading.
// Ranges of single values stand with the fields (tables_campaign.go).
const (
	MaxFileBytes = 64 << 20 // of a campaign or plan file; callers need read no more

	MaxTelescopes = 100
	MaxReceivers  = 50 // of one telescope
	MaxSources    = 5000
	MaxGoals      = 20000 // in each of the four lists
	MaxBlocks     = 2000
	MaxHistory    = 1_000_000
	MaxPins       = 20000

	MaxBands       = 20   // of one receiver or goal
	MaxWindows     = 100  // of one phase goal
	MaxHorizon     = 3600 // corners of one horizon mask
	MaxLost        = 1000 // lost parts of one block
	MaxScanLengths = 100  // of one source
	MaxTextLength  = 500  // characters of a name, code, id or label

	MaxPlanScans   = 200_000
	MaxPlanUnits   = 1_000_000 // unmet units and prices
	MaxScanEarns   = 1000      // earnings of one scan
	MaxReasons     = 1000      // of one unmet unit
	MaxReasonChars = 5000      // of one reason's text

	// MaxBlock is the longest block: one awarded stretch, not a year of them.
	MaxBlock = 14 * 24 * time.Hour
	// MaxCampaign is the longest campaign, from its start to its end.
	MaxCampaign = 5*365*24*time.Hour + 2*24*time.Hour

	// MaxProblems is how many problems are listed before "and N more".
	MaxProblems = 200

	// maxDepth is how deep a file may nest; the formats need 6.
	maxDepth = 64
)

// FirstInstant and EndInstant bound every instant, [first, end): the years in
// which UTC, with leap seconds, is defined and time scales are tabulated.
var (
	FirstInstant = time.Date(1972, 1, 1, 0, 0, 0, 0, time.UTC)
	EndInstant   = time.Date(2100, 1, 1, 0, 0, 0, 0, time.UTC)
)

// Defaults of optional fields that are not zero.
const (
	DefaultGridMin      = 1
	DefaultTatmK        = 2.0
	DefaultDigitisation = 1.0
	DefaultPosEpochMJD  = 51544.5 // J2000.0
	DefaultPriority     = 1.0
	DefaultPerHorizon   = 1
	DefaultOverlapCount = 2
)
