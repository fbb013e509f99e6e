package timescale

import (
	"fmt"
	"math"
	"time"

	"cadencewright/astro"
	"cadencewright/astro/internal/meeus"
)

// MaxDUT1S bounds UT1-UTC, in seconds either way. Leap seconds keep it below
// 0.9 (ITU-R TF.460-6); a larger number is some other difference of clocks.
const MaxDUT1S = 1.0

// UT1 is the Earth's rotation as a time; dut1S is UT1-UTC in seconds.
func UT1(t time.Time, dut1S float64) (MJD, error) {
	if _, err := TAIMinusUTCS(t); err != nil {
		return MJD{}, err
	}
	if !(math.Abs(dut1S) <= MaxDUT1S) { // NaN too
		return MJD{}, &astro.RangeError{Quantity: "UT1-UTC in seconds", Value: fmt.Sprint(dut1S), Allowed: fmt.Sprintf("-%g to %g", MaxDUT1S, MaxDUT1S)}
	}
	return UTC(t).AddS(dut1S), nil
}

// GAST is Greenwich apparent sidereal time, [0, 2π), within 6 ms of the IAU
// 2006/2000A value in 2026 to 2030 and 20 ms over all dates (IAU 1982 mean
// sidereal time with IAU 1980 nutation: it belongs with the precession of 1976,
// with which most of the difference cancels in hour angles); dut1S is UT1-UTC in
// seconds.
func GAST(t time.Time, dut1S float64) (astro.Angle, error) {
	ut1, err := UT1(t, dut1S)
	if err != nil {
		return 0, err
	}
	return meeus.ApparentSidereal(ut1.JD()), nil
}

// LST is local apparent sidereal time at an east-positive longitude, [0, 2π).
func LST(t time.Time, dut1S float64, lon astro.Angle) (astro.Angle, error) {
	g, err := GAST(t, dut1S)
	return (g + lon).Wrap(), err
}
