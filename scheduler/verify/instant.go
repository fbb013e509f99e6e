package verify

import (
	"math"
	"time"
)

// msec is an instant as milliseconds since 1970-01-01 UTC, in days of 86400 s,
// or a length of time in milliseconds.
type msec int64

const (
	second msec = 1000
	minute msec = 60 * second
	hour   msec = 60 * minute
	day    msec = 24 * hour
)

// instantOf is a time to the nearest millisecond.
func instantOf(t time.Time) msec { return msec(t.Round(time.Millisecond).UnixMilli()) }

// lengthOf is a number of units of time to the nearest millisecond. What is
// longer than ten thousand years counts as that.
func lengthOf(n float64, unit msec) msec {
	const most = 3e14
	return msec(math.Round(min(max(n*float64(unit), -most), most)))
}

func (t msec) time() time.Time { return time.UnixMilli(int64(t)).UTC() }

func (t msec) seconds() float64 { return float64(t) / float64(second) }
func (t msec) minutes() float64 { return float64(t) / float64(minute) }
func (t msec) hours() float64   { return float64(t) / float64(hour) }
func (t msec) days() float64    { return float64(t) / float64(day) }

// at is an instant in words.
func at(t msec) string {
	layout := "2006-01-02 15:04"
	if t%minute != 0 {
		layout = "2006-01-02 15:04:05"
	}
	if t%second != 0 {
		layout = "2006-01-02 15:04:05.000"
	}
	return t.time().Format(layout) + " UTC"
}

// floorDiv and ceilDiv are a/b to the integer below and above, b > 0.
func floorDiv(a, b msec) int64 {
	q := int64(a / b)
	if a%b < 0 {
		q--
	}
	return q
}

func ceilDiv(a, b msec) int64 { return -floorDiv(-a, b) }
