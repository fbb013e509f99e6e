package view

import (
	"fmt"
	"math"
	"strconv"
	"strings"
	"time"
)

// None stands where there is nothing to show.
const None = "–"

// Clock is the time of day, "03:20".
func Clock(t time.Time) string { return t.UTC().Format("15:04") }

// Day is a date in the middle of a sentence, "Mon 18 Jan".
func Day(t time.Time) string { return t.UTC().Format("Mon 2 Jan") }

// Moment is a date with its time, "Mon 18 Jan 03:20"; None for the zero time.
// The page says that it is UTC.
func Moment(t time.Time) string {
	if t.IsZero() {
		return None
	}
	return t.UTC().Format("Mon 2 Jan 15:04")
}

// Date is a whole date, "18 January 2027".
func Date(t time.Time) string { return t.UTC().Format("2 January 2006") }

// ISO is an instant for machines.
func ISO(t time.Time) string { return t.UTC().Format(time.RFC3339) }

// Range is a stretch of time, "Mon 18 Jan 20:00–02:00": the second day is left
// out where the stretch is shorter than a day.
func Range(s Span) string {
	if s.End.Sub(s.Start) >= 24*time.Hour {
		return Moment(s.Start) + " – " + Moment(s.End)
	}
	return Moment(s.Start) + "–" + Clock(s.End)
}

// DateRange is the dates of [from, to), "18–24 January 2027".
func DateRange(from, to time.Time) string {
	last := to.UTC().Add(-time.Second)
	from = from.UTC()
	switch {
	case from.Year() != last.Year():
		return Date(from) + " – " + Date(last)
	case from.Month() != last.Month():
		return from.Format("2 January") + " – " + Date(last)
	case from.Day() != last.Day():
		return strconv.Itoa(from.Day()) + "–" + Date(last)
	}
	return Date(from)
}

// LocalClock is the time of day in a zone, "14:50"; UTC where zone is nil.
func LocalClock(t time.Time, zone *time.Location) string {
	if zone == nil {
		zone = time.UTC
	}
	return t.In(zone).Format("15:04")
}

// LocalMoment is a date with its time in a zone, and the zone's offset.
func LocalMoment(t time.Time, zone *time.Location) string {
	if zone == nil {
		zone = time.UTC
	}
	return t.In(zone).Format("Mon 2 Jan 15:04 (UTC-07:00)")
}

// SiderealRate is sidereal hours in an hour of UTC.
const SiderealRate = 1.00273790935

// LST is a sidereal time from hours, "04:12".
func LST(h float64) string {
	m := int(math.Round(math.Mod(math.Mod(h, 24)+24, 24)*60)) % (24 * 60)
	return fmt.Sprintf("%02d:%02d", m/60, m%60)
}

// Duration is a stretch in minutes, "3 h 20 min".
func Duration(minutes int) string {
	switch h, m := minutes/60, minutes%60; {
	case h == 0:
		return fmt.Sprintf("%d min", m)
	case m == 0:
		return fmt.Sprintf("%d h", h)
	default:
		return fmt.Sprintf("%d h %d min", h, m)
	}
}

// Minutes is a span's length in whole minutes.
func (s Span) Minutes() int { return int(s.End.Sub(s.Start).Round(time.Minute) / time.Minute) }

// Fixed is a number with some decimals and a true minus sign; None for what is
// not a number.
func Fixed(x float64, decimals int) string {
	if math.IsNaN(x) || math.IsInf(x, 0) {
		return None
	}
	s := strconv.FormatFloat(x, 'f', decimals, 64)
	if strings.Trim(s, "-0.") == "" {
		s = strings.TrimPrefix(s, "-")
	}
	return strings.Replace(s, "-", "−", 1)
}

// Figure is a number with three significant digits at most and no exponent for
// what people plan with, "0.316", "1420", "12.4".
func Figure(x float64) string {
	a := math.Abs(x)
	switch {
	case a == 0:
		return "0"
	case a >= 100:
		return Fixed(x, 0)
	case a >= 10:
		return trimZeros(Fixed(x, 1))
	case a >= 1:
		return trimZeros(Fixed(x, 2))
	case a >= 0.001:
		return trimZeros(Fixed(x, 3))
	}
	return strings.Replace(strconv.FormatFloat(x, 'g', 3, 64), "-", "−", -1)
}

func trimZeros(s string) string {
	if !strings.Contains(s, ".") {
		return s
	}
	return strings.TrimSuffix(strings.TrimRight(s, "0"), ".")
}

// Degrees is an angle with a decimal, "67.2°".
func Degrees(x float64) string { return Fixed(x, 1) + "°" }

// Percent is a part of one, "97.3 %".
func Percent(x float64) string { return trimZeros(Fixed(100*x, 1)) + " %" }

// Micros is a TOA uncertainty, "1.32 µs"; 0 is not detectable.
func Micros(us float64) string {
	if us <= 0 {
		return "not detectable"
	}
	return Figure(us) + " µs"
}

// Or gives s, or None where it is empty.
func Or(s string) string {
	if s == "" {
		return None
	}
	return s
}

// Position is a site, "52.10° N, 6.40° E".
func Position(latDeg, lonDeg float64) string {
	ns, ew := "N", "E"
	if latDeg < 0 {
		ns, latDeg = "S", -latDeg
	}
	lonDeg = math.Mod(lonDeg, 360)
	if lonDeg > 180 {
		lonDeg -= 360
	} else if lonDeg <= -180 {
		lonDeg += 360
	}
	if lonDeg < 0 {
		ew, lonDeg = "W", -lonDeg
	}
	return fmt.Sprintf("%.2f° %s, %.2f° %s", latDeg, ns, lonDeg, ew)
}

// Plural is a count with its noun: "1 scan", "3 scans".
func Plural(n int, noun string) string {
	if n == 1 {
		return "1 " + noun
	}
	return strconv.Itoa(n) + " " + noun + "s"
}

// Days is how long before now something was, "9.2 days ago", or how long
// until, "in 3.1 days", or "now"; None for the zero time.
func Days(t, now time.Time) string {
	if t.IsZero() {
		return None
	}
	d := now.Sub(t).Hours() / 24
	if d > -0.05 && d < 0.05 {
		return "now"
	}
	if d >= 0 {
		return Fixed(d, 1) + " days ago"
	}
	return "in " + Fixed(-d, 1) + " days"
}

// List joins words for a sentence: "L, S and C".
func List(words []string) string {
	if len(words) < 2 {
		return strings.Join(words, "")
	}
	return strings.Join(words[:len(words)-1], ", ") + " and " + words[len(words)-1]
}

// MountName is a mount in words.
func MountName(mount string) string {
	switch mount {
	case "altaz":
		return "alt-azimuth"
	case "":
		return None
	}
	return mount
}

// ShortName leaves a source's catalogue prefix out, "0412+1833" for
// "SIM J0412+1833", where bars are narrow.
func ShortName(source string) string {
	for i, r := range source {
		if r >= '0' && r <= '9' {
			return source[i:]
		}
	}
	return source
}
