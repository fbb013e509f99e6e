// Package feasible finds where each source can be observed: for every block of
// a horizon and every source with something to earn, the starts that each scan
// length may have on each receiver, where the telescope points then and how
// much information a scan gathers, and counted reasons for what is not
// possible.
//
// It is sections 2 to 4 of the planning model for one scan at a time; what two
// scans ask of each other is the solver's.
package feasible

import (
	"cadencewright/astro/sky"
	"cadencewright/scheduler"
	"cadencewright/scheduler/units"
)

// Problem is everything a solver needs to know of a campaign over a horizon.
// Nothing in it changes after Build; several goroutines may read it.
type Problem struct {
	Campaign *scheduler.Campaign
	Horizon  scheduler.Horizon
	Units    *units.Set
	GridMin  int
	Blocks   []Block // in the campaign's order
}

// Block is one block of the horizon on the planning grid. A step is a grid
// instant counted from First.
type Block struct {
	Index     int // into Campaign.Blocks
	Telescope int // into Campaign.Telescopes
	FirstMin  int // minutes since 1970 of step 0
	Steps     int // the last step at which a scan may end
	Receivers []int
	Mount     Mount
	MinGap    int // steps: settle and calibration, travel left out
	Places    []Place
	Pins      []Pin
	Rejects   []Reject // one a source with units, in the order of sources

	at []int // source -> index into Places, or -1
}

// Place is a source as it can be observed in a block. Steps outside
// [Lo, Lo+len(Axis1)) are never up.
type Place struct {
	Source int
	Lo     int
	// Where the mount points at each step from Lo on: azimuth unwrapped and
	// elevation, hour angle and declination, or 0 and declination, degrees.
	Axis1, Axis2 []float64
	// Info is the information gathered from Lo up to each step in 1/s², by the
	// position of the receiver in Block.Receivers; nil where the pulsar is not
	// detectable or no goal of the source can use the receiver.
	Info    [][]float64
	Lengths []Length

	rising []int32 // how many steps up to here the azimuth did not fall
}

// Length is one allowed scan length with its allowed starts.
type Length struct {
	Minutes int
	Steps   int
	Runs    []Run // ascending, apart
}

// Run is a stretch of allowed starts, steps [From, To).
type Run struct{ From, To int }

// Pin is a pinned scan in its block.
type Pin struct {
	Index    int // into Campaign.Pins
	Source   int
	Receiver int // position in Block.Receivers
	Start    int // step
	Steps    int
	Minutes  int
}

// PlaceOf is the place of a source in the block, or nil.
func (b *Block) PlaceOf(source int) *Place {
	if i := b.at[source]; i >= 0 {
		return &b.Places[i]
	}
	return nil
}

// Minute is the instant of a step.
func (b *Block) Minute(step, gridMin int) float64 { return float64(b.FirstMin + step*gridMin) }

// InfoOf is the information of a scan in 1/s².
func (p *Place) InfoOf(receiver, start, steps int) float64 {
	in := p.Info[receiver]
	if in == nil {
		return 0
	}
	return in[start+steps-p.Lo] - in[start-p.Lo]
}

// Mount is what a telescope's drives need.
type Mount struct {
	Kind         scheduler.MountKind
	Axis1, Axis2 sky.Axis
	AzRange      [2]float64
	SettleS      float64
	CalS         float64
	SwitchS      float64
	SetupS       float64
}

// SlewS is the time from one pointing to another in seconds, settling
// included; a and b are pairs of axis positions, the azimuth that of the motor.
func (m *Mount) SlewS(a1, a2, b1, b2 float64) float64 {
	t := m.Axis2.Seconds(b2 - a2)
	if m.Kind != scheduler.MountTransit {
		t = max(t, m.Axis1.Seconds(b1-a1))
	}
	return m.SettleS + t
}

// Reject counts, over the grid instants of a block, why a source is not up.
type Reject struct {
	Source   int
	Samples  int // grid instants looked at
	Up       int
	TooLow   int // below elevation_min
	Masked   int // above that, behind the horizon mask
	TooHigh  int
	NearSun  int // where elevation would do
	OffMount int // hour angle or transit range, where elevation and Sun would do

	MaxElDeg  float64 // the highest it stands in the block
	NeedElDeg float64 // the limit there
	SunDeg    float64 // least separation from the Sun
	Longest   int     // steps of the longest stretch that is up
}

// PlaceIndex is the index of a source's place in Places, or -1.
func (b *Block) PlaceIndex(source int) int { return b.at[source] }
