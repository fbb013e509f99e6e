package main

import (
	"fmt"
	"math"
	"strconv"
	"strings"
	"time"

	"cadencewright/scheduler"
)

// instantLayouts are the ways to write an instant; those without a zone are
// UTC.
var instantLayouts = []string{time.RFC3339Nano, "2006-01-02T15:04Z07:00", "2006-01-02T15:04:05", "2006-01-02T15:04", "2006-01-02 15:04:05",
	"2006-01-02 15:04", time.DateOnly}

// parseInstant reads the instant of a flag: "now", a date or a date and time.
func parseInstant(flagName, text string, now time.Time) (time.Time, error) {
	if text == "now" {
		// A whole minute, so that tables do not begin at an odd second.
		return now.UTC().Truncate(time.Minute), nil
	}
	for _, layout := range instantLayouts {
		t, err := time.Parse(layout, text)
		if err != nil {
			continue
		}
		// Outside of these years time scales are not tabulated.
		if t = t.UTC(); t.Before(scheduler.FirstInstant) || !t.Before(scheduler.EndInstant) {
			return time.Time{}, usagef("--%s %s is outside the years %d to %d", flagName, text,
				scheduler.FirstInstant.Year(), scheduler.EndInstant.Year()-1)
		}
		return t, nil
	}
	return time.Time{}, usagef("--%s %q is no instant; write now, 2027-01-18 or 2027-01-18T20:30Z (UTC)", flagName, text)
}

// parseSpan reads the duration of a flag: "90m", "36h" or "7d".
func parseSpan(flagName, text string) (time.Duration, error) {
	d, err := time.ParseDuration(text)
	// Go's own durations end with hours.
	if days, ok := strings.CutSuffix(text, "d"); ok && err != nil {
		var n float64
		if n, err = strconv.ParseFloat(days, 64); err == nil && math.Abs(n) < 1e5 {
			d = time.Duration(n * 24 * float64(time.Hour))
		}
	}
	if err != nil || d <= 0 {
		return 0, usagef("--%s %q is no length of time; write 90m, 36h or 7d", flagName, text)
	}
	return d, nil
}

// parseAngle reads degrees ("-30.72") or, with colons, units, minutes and
// seconds ("-30:43:12"); where the units are hours, the colons mean hours.
func parseAngle(flagName, text string, hours bool, least, most float64) (float64, error) {
	bad := usagef("--%s %q is no angle; write degrees (63.0625) or %s", flagName, text, map[bool]string{
		true: "hours:minutes:seconds (04:12:15)", false: "degrees:minutes:seconds (-30:43:12)"}[hours])
	// The sign belongs to the whole: -00:30 is half a degree south.
	sign, body := 1.0, text
	if rest, negative := strings.CutPrefix(body, "-"); negative {
		sign, body = -1, rest
	} else {
		body = strings.TrimPrefix(body, "+")
	}
	value, unit := 0.0, 1.0
	parts := strings.Split(body, ":")
	if len(parts) > 3 {
		return 0, bad
	}
	// Only the first part may be 60 or more, and none has a sign of its own.
	for i, p := range parts {
		v, err := strconv.ParseFloat(p, 64)
		if err != nil || !(v >= 0 && v <= 1e4) || (i > 0 && v >= 60) || strings.HasPrefix(p, "+") {
			return 0, bad
		}
		value += v * unit
		unit /= 60
	}
	if value *= sign; hours && len(parts) > 1 {
		value *= 15
	}
	if !(value >= least && value <= most) {
		return 0, usagef("--%s is %s, %.6g degrees; allowed is %g to %g", flagName, text, value, least, most)
	}
	return value, nil
}

// sexagesimal writes an angle as units:minutes:seconds with some decimals of
// the seconds; signed ones always with their sign.
func sexagesimal(value float64, decimals int, signed bool) string {
	sign := ""
	if signed {
		sign = "+"
		if value < 0 {
			sign, value = "-", -value
		}
	}
	scale := math.Pow10(decimals)
	ticks := int64(math.Round(value * 3600 * scale)) // rounded once, so that 60 never shows
	perSecond := int64(scale)
	seconds, part := ticks/perSecond, ticks%perSecond
	text := fmt.Sprintf("%s%02d:%02d:%02d", sign, seconds/3600, seconds/60%60, seconds%60)
	if decimals > 0 {
		text += fmt.Sprintf(".%0*d", decimals, part)
	}
	return text
}

// clockOf writes an angle in degrees as hours and minutes, 00:00 to 23:59.
func clockOf(deg float64) string {
	// Four minutes to the degree.
	minutes := int(math.Round(deg*4)) % 1440
	if minutes < 0 {
		minutes += 1440
	}
	return fmt.Sprintf("%02d:%02d", minutes/60, minutes%60)
}

// rounded keeps some decimals of a number, for JSON.
func rounded(x float64, decimals int) float64 {
	scale := math.Pow10(decimals)
	return math.Round(x*scale) / scale
}
