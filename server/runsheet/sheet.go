// Package runsheet makes a telescope's run sheet for one night: everything an
// observer needs on one page, as one content in several formats. It plans
// nothing and reads no database; what it shows is computed from the campaign
// and the issued plan that it is handed.
package runsheet

import "time"

// Sheet is one night of one telescope. Instants are UTC; the local zone is the
// telescope's.
type Sheet struct {
	Campaign     string      `json:"campaign"`
	Telescope    Telescope   `json:"telescope"`
	Night        string      `json:"night"`               // local date on which the night begins
	From         time.Time   `json:"from"`                // local noon
	To           time.Time   `json:"to"`                  // the next local noon
	PlanWeek     string      `json:"plan_week,omitempty"` // 2027-W03; empty: no issued plan
	PlanRevision int         `json:"plan_revision"`
	IssuedAt     time.Time   `json:"issued_at"`
	IssuedBy     string      `json:"issued_by,omitempty"`
	Superseded   *Superseded `json:"superseded,omitempty"`
	Cautions     []string    `json:"cautions"`
	Reminders    []string    `json:"reminders"`
	Blocks       []Block     `json:"blocks"`

	zone *time.Location
}

// Telescope is the part of a telescope that stands on a sheet.
type Telescope struct {
	Code            string  `json:"code"`
	Name            string  `json:"name"`
	LongitudeDeg    float64 `json:"longitude_deg"` // east-positive
	LatitudeDeg     float64 `json:"latitude_deg"`
	HeightM         float64 `json:"height_m"`
	Timezone        string  `json:"timezone"`
	Mount           string  `json:"mount"`
	ElevationMinDeg float64 `json:"elevation_min_deg"`
	ElevationMaxDeg float64 `json:"elevation_max_deg"`
	SunMinDeg       float64 `json:"sun_min_deg"`
}

// Superseded says that a later revision of the plan has taken this one's place.
type Superseded struct {
	At         time.Time `json:"at"`
	ByRevision int       `json:"by_revision"`
}

// Block is a stretch of awarded time with its scans. A block that reaches past
// a noon stands on the sheet of the night in which it starts.
type Block struct {
	ID        string    `json:"id"`
	Label     string    `json:"label,omitempty"`
	Start     time.Time `json:"start"`
	End       time.Time `json:"end"`
	Receivers []string  `json:"receivers"`
	Lost      []Span    `json:"lost,omitempty"`
	Scans     []Scan    `json:"scans"`
}

// Span is a stretch of time that cannot be used.
type Span struct {
	Start time.Time `json:"start"`
	End   time.Time `json:"end"`
}

// Scan is one line of the sheet.
type Scan struct {
	Number       int       `json:"number"` // from 1 through the night
	ID           string    `json:"id"`     // what an outcome report names
	State        string    `json:"state"`
	Start        time.Time `json:"start"`
	End          time.Time `json:"end"`
	Minutes      int       `json:"minutes"`
	LSTStartH    float64   `json:"lst_start_h"` // local apparent sidereal time
	Source       string    `json:"source"`
	RAJ2000      string    `json:"ra_j2000"` // ICRS, moved by proper motion to the date
	DecJ2000     string    `json:"dec_j2000"`
	Receiver     string    `json:"receiver"`
	FreqMHz      float64   `json:"freq_mhz"`
	BandwidthMHz float64   `json:"bandwidth_mhz"`
	CalS         float64   `json:"cal_s"` // noise diode, before the start

	First Pointing `json:"first"` // at the start
	Last  Pointing `json:"last"`  // at the end
	// LowestElDeg and LeastSunDeg are over the whole scan.
	LowestElDeg float64 `json:"lowest_el_deg"`
	LeastSunDeg float64 `json:"least_sun_deg"`
	// SlewS is the drive time from the scan before it in the block, settling
	// included; 0 for one that begins.
	SlewS float64 `json:"slew_s"`
	// Begins is true of a block's first scan and of the first after lost time:
	// the telescope may come to it from anywhere.
	Begins bool `json:"begins"`

	SNR    float64  `json:"snr"`    // expected; 0: not detectable
	TOAUs  float64  `json:"toa_us"` // expected TOA uncertainty; 0: not detectable
	For    []string `json:"for"`    // goals that it serves
	Pinned bool     `json:"pinned"`
	// Orbital phase at start and end in cycles from periastron, binaries only.
	Phase *PhaseRange `json:"phase,omitempty"`
	Notes []string    `json:"notes,omitempty"`
}

// Pointing is where the telescope looks at one instant.
type Pointing struct {
	AzDeg float64 `json:"az_deg"`
	ElDeg float64 `json:"el_deg"`
	HAH   float64 `json:"ha_h"`
	// MotorAzDeg is the azimuth drive's own reading with whole turns, Turn the
	// number of turns; alt-azimuth mounts only.
	MotorAzDeg *float64 `json:"motor_az_deg,omitempty"`
	Turn       int      `json:"turn"`
}

// PhaseRange is orbital phase in cycles, [0, 1), from periastron, or from the
// ascending node for orbits too round to have one.
type PhaseRange struct {
	Reference string  `json:"reference"`
	From      float64 `json:"from"`
	To        float64 `json:"to"`
}

// Zone is the telescope's time zone.
func (s *Sheet) Zone() *time.Location { return s.zone }

// Local is an instant in the telescope's zone.
func (s *Sheet) Local(t time.Time) time.Time { return t.In(s.zone) }

// Scans counts the scans of all blocks.
func (s *Sheet) Scans() int {
	n := 0
	for _, b := range s.Blocks {
		n += len(b.Scans)
	}
	return n
}
