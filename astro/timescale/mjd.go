package timescale

import "math"

// MJD is a Modified Julian Date in two parts, so that a microsecond survives:
// a whole day and a fraction in [0, 1).
type MJD struct {
	Day  int
	Frac float64
}

// NewMJD brings a day and any fraction into the normal form.
func NewMJD(day int, frac float64) MJD {
	whole := math.Floor(frac)
	m := MJD{day + int(whole), frac - whole}
	if m.Frac >= 1 { // a tiny negative fraction rounds up to a whole day
		m.Day, m.Frac = m.Day+1, 0
	}
	return m
}

// Float is the date as one number, good to about a microsecond.
func (m MJD) Float() float64 { return float64(m.Day) + m.Frac }

// JD is the Julian Date as one number, good to about 40 microseconds.
func (m MJD) JD() float64 { return 2400000.5 + float64(m.Day) + m.Frac }

// AddS is the date some seconds later.
func (m MJD) AddS(s float64) MJD { return NewMJD(m.Day, m.Frac+s/86400) }

// DaysSince is the time in days since an epoch given as one number.
func (m MJD) DaysSince(epochMJD float64) float64 {
	whole := math.Floor(epochMJD)
	return float64(m.Day-int(whole)) + (m.Frac - (epochMJD - whole))
}
