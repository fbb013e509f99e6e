package meeus

import (
	"encoding/csv"
	"math"
	"os"
	"strconv"
	"testing"

	"cadencewright/astro"
)

// lightTimeS is the light time of one astronomical unit in seconds.
const lightTimeS = 499.0047838362

type almanacRow map[string]float64

func (r almanacRow) vec(name, unit string) astro.Vec3 {
	return astro.Vec3{r[name+"_x"+unit], r[name+"_y"+unit], r[name+"_z"+unit]}
}

// almanac reads testdata/almanac.csv, made with ERFA.
func almanac(t *testing.T) []almanacRow {
	f, err := os.Open("testdata/almanac.csv")
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	lines, err := csv.NewReader(f).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	if len(lines) < 2 {
		t.Fatal("testdata/almanac.csv holds no rows")
	}
	rows := make([]almanacRow, len(lines)-1)
	for i, line := range lines[1:] {
		rows[i] = almanacRow{}
		for j, cell := range line {
			v, err := strconv.ParseFloat(cell, 64)
			if err != nil {
				t.Fatalf("row %d: %s: %v", i+1, lines[0][j], err)
			}
			rows[i][lines[0][j]] = v
		}
	}
	return rows
}

// TestAlmanacOverAllItsDates holds what the package promises against ERFA from
// 1972 to 2099.
func TestAlmanacOverAllItsDates(t *testing.T) {
	rows := almanac(t)
	check := func(what, unit string, allowed float64, off func(r almanacRow, jde float64) float64) {
		worst := 0.0
		for _, r := range rows {
			d := off(r, 2400000.5+r["mjd_tt"])
			if !(d <= allowed) {
				t.Errorf("%s at MJD %.4f: off by %.4g %s, %g allowed", what, r["mjd_tt"], d, unit, allowed)
			}
			worst = max(worst, d)
		}
		t.Logf("%s: rows %d, largest error %.3g %s (allowed %g)", what, len(rows), worst, unit, allowed)
	}
	check("Earth from the barycentre", "light seconds", 0.08, func(r almanacRow, jde float64) float64 {
		return EarthBarycentric(jde).Add(r.vec("bary", "_au").Scale(-1)).Norm() * lightTimeS
	})
	check("Sun's direction", "arcsec", 15, func(r almanacRow, jde float64) float64 {
		return EarthHeliocentric(jde).AngleTo(r.vec("helio", "_au")).Arcsec()
	})
	check("Sun's distance", "au", 2e-5, func(r almanacRow, jde float64) float64 {
		return math.Abs(EarthHeliocentric(jde).Norm() - r.vec("helio", "_au").Norm())
	})
	check("Earth's velocity, as aberration", "arcsec", 0.002, func(r almanacRow, jde float64) float64 {
		return astro.Angle(EarthVelocity(jde).Add(r.vec("beta", "").Scale(-1)).Norm()).Arcsec()
	})
	check("true pole", "arcsec", 0.2, func(r almanacRow, jde float64) float64 {
		return TrueOfDate(jde)[2].AngleTo(r.vec("pole", "")).Arcsec()
	})
	// The precession of 1976 runs 0.3 arcsec a century ahead, in longitude, and
	// sidereal time with it: what is left in hour angle is what counts.
	check("equinox", "arcsec", 0.4, func(r almanacRow, jde float64) float64 {
		return TrueOfDate(jde)[0].AngleTo(r.vec("equinox", "")).Arcsec()
	})
	check("sidereal time", "s", 0.02, func(r almanacRow, jde float64) float64 {
		return math.Abs((ApparentSidereal(jde) - astro.Angle(r["gast_rad"])).WrapSigned().Arcsec()) / 15
	})
	check("direction of the Greenwich meridian", "arcsec", 0.2, func(r almanacRow, jde float64) float64 {
		mine := greenwich(TrueOfDate(jde), ApparentSidereal(jde))
		// ERFA's matrix from its pole and equinox.
		z, x := r.vec("pole", ""), r.vec("equinox", "")
		return mine.AngleTo(greenwich(astro.Mat3{x, z.Cross(x), z}, astro.Angle(r["gast_rad"]))).Arcsec()
	})
}

// greenwich is the ICRS direction of the point where the meridian of Greenwich
// meets the equator.
func greenwich(trueOfDate astro.Mat3, gast astro.Angle) astro.Vec3 {
	return trueOfDate.Transpose().Apply(astro.Spherical(gast, 0))
}

// TestGiantsMoveTheSun says what the four giant planets are for: without them
// the Earth's place is the Sun's, and up to 5 light seconds off.
func TestGiantsMoveTheSun(t *testing.T) {
	largest := 0.0
	for _, r := range almanac(t) {
		jde := 2400000.5 + r["mjd_tt"]
		sun := EarthBarycentric(jde).Add(EarthHeliocentric(jde).Scale(-1))
		want := r.vec("bary", "_au").Add(r.vec("helio", "_au").Scale(-1))
		if d := sun.Add(want.Scale(-1)).Norm() * lightTimeS; d > 0.03 {
			t.Errorf("the Sun at MJD %.4f is off by %.3f light seconds", r["mjd_tt"], d)
		}
		largest = max(largest, want.Norm()*lightTimeS)
	}
	if largest < 3 {
		t.Errorf("the Sun is never further than %.2f light seconds from the barycentre: these dates test nothing", largest)
	}
}

// TestRotationsAreRotations: lengths and angles survive.
func TestRotationsAreRotations(t *testing.T) {
	for _, r := range almanac(t) {
		m := TrueOfDate(2400000.5 + r["mjd_tt"])
		p := m.Mul(m.Transpose())
		for i := range 3 {
			for j := range 3 {
				want := 0.0
				if i == j {
					want = 1
				}
				if math.Abs(p[i][j]-want) > 1e-14 {
					t.Fatalf("MJD %.4f: the rotation times its transpose has %g at [%d][%d]", r["mjd_tt"], p[i][j], i, j)
				}
			}
		}
	}
}
