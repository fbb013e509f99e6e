package astro_test

import (
	"errors"
	"math"
	"strings"
	"testing"

	"pgregory.net/rapid"

	"cadencewright/astro"
)

func TestAngleUnits(t *testing.T) {
	for _, c := range []struct {
		name string
		a    astro.Angle
		rad  float64
	}{
		{"degrees", astro.FromDeg(180), math.Pi},
		{"hours", astro.FromHours(6), math.Pi / 2},
		{"arcsec", astro.FromArcsec(3600 * 90), math.Pi / 2},
		{"negative degrees", astro.FromDeg(-90), -math.Pi / 2},
	} {
		if math.Abs(c.a.Rad()-c.rad) > 1e-15 {
			t.Errorf("%s: %g rad, want %g", c.name, c.a.Rad(), c.rad)
		}
	}
	a := astro.FromDeg(30)
	if math.Abs(a.Hours()-2) > 1e-14 || math.Abs(a.Arcsec()-108000) > 1e-9 || math.Abs(a.Sin()-0.5) > 1e-15 || math.Abs(a.Cos()-math.Sqrt(3)/2) > 1e-15 {
		t.Errorf("30 deg is %g h, %g arcsec, sine %g, cosine %g", a.Hours(), a.Arcsec(), a.Sin(), a.Cos())
	}
}

func TestAngleUnitsRoundTrip(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		x := rapid.Float64Range(-1e6, 1e6).Draw(t, "x")
		for name, y := range map[string]float64{
			"degrees": astro.FromDeg(x).Deg(), "hours": astro.FromHours(x).Hours(), "arcsec": astro.FromArcsec(x).Arcsec(),
		} {
			if math.Abs(y-x) > 1e-9 {
				t.Errorf("%s: %g came back as %g", name, x, y)
			}
		}
	})
}

func TestWrap(t *testing.T) {
	for _, c := range []struct{ deg, wrapped, signed float64 }{
		{0, 0, 0}, {180, 180, 180}, {-180, 180, 180}, {360, 0, 0}, {-360, 0, 0}, {359, 359, -1}, {-1, 359, -1}, {541, 181, -179}, {725, 5, 5},
	} {
		a := astro.FromDeg(c.deg)
		if math.Abs(a.Wrap().Deg()-c.wrapped) > 1e-9 || math.Abs(a.WrapSigned().Deg()-c.signed) > 1e-9 {
			t.Errorf("%g deg wraps to %g and %g, want %g and %g", c.deg, a.Wrap().Deg(), a.WrapSigned().Deg(), c.wrapped, c.signed)
		}
	}
}

// A tiny negative angle must not become a whole turn.
func TestWrapKeepsItsRange(t *testing.T) {
	check := func(t interface {
		Errorf(string, ...any)
	}, a astro.Angle) {
		if w := a.Wrap(); w < 0 || w >= 2*math.Pi {
			t.Errorf("%g wraps to %g, outside [0, 2π)", a, w)
		}
		if w := a.WrapSigned(); w <= -math.Pi || w > math.Pi {
			t.Errorf("%g wraps to %g, outside (-π, π]", a, w)
		}
	}
	for _, a := range []astro.Angle{-1e-300, -1e-17, -5e-324, 2 * math.Pi, -2 * math.Pi, -math.Pi, math.Pi, 1e15} {
		check(t, a)
	}
	rapid.Check(t, func(t *rapid.T) {
		a := astro.Angle(rapid.Float64Range(-1e9, 1e9).Draw(t, "a"))
		check(t, a)
		if d := a.Wrap() - a.WrapSigned(); math.Abs(d.WrapSigned().Rad()) > 1e-9 {
			t.Errorf("%g: the two ways of wrapping differ by %g", a, d)
		}
	})
}

func TestStarMovesByItsProperMotion(t *testing.T) {
	// Far faster than any pulsar, so that the division by the cosine shows.
	s := astro.Star{RA: astro.FromDeg(100), Dec: astro.FromDeg(60), PosEpochMJD: 51544.5, PMRAMasYr: 5000, PMDecMasYr: -10000}
	ra, dec := s.At(51544.5 + 10*365.25)
	if d := (ra - s.RA).Arcsec(); math.Abs(d-100) > 1e-6 { // 50 arcsec of arc over cos 60
		t.Errorf("right ascension moved by %g arcsec in ten years, want 100", d)
	}
	if d := (dec - s.Dec).Arcsec(); math.Abs(d+100) > 1e-6 {
		t.Errorf("declination moved by %g arcsec in ten years, want -100", d)
	}
	ra, dec = s.At(s.PosEpochMJD)
	if ra != s.RA || dec != s.Dec {
		t.Errorf("at its epoch the star stands at %g, %g", ra, dec)
	}
}

// On the sky the motion is the same wherever the star is, the last degree
// before the pole included.
func TestProperMotionIsOnTheSky(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		s := astro.Star{
			RA:          astro.FromDeg(rapid.Float64Range(0, 360).Draw(t, "ra")),
			Dec:         astro.FromDeg(rapid.Float64Range(-89, 89).Draw(t, "dec")),
			PosEpochMJD: rapid.Float64Range(45000, 62000).Draw(t, "epoch"),
			PMRAMasYr:   rapid.Float64Range(-200, 200).Draw(t, "pmra"),
			PMDecMasYr:  rapid.Float64Range(-200, 200).Draw(t, "pmdec"),
		}
		years := rapid.Float64Range(-30, 30).Draw(t, "years")
		moved := s.Direction(s.PosEpochMJD).AngleTo(s.Direction(s.PosEpochMJD+365.25*years)).Arcsec() * 1000
		want := math.Hypot(s.PMRAMasYr, s.PMDecMasYr) * math.Abs(years)
		if math.Abs(moved-want) > 1e-3*want+0.01 {
			t.Errorf("moved by %g mas in %g years, want %g", moved, years, want)
		}
	})
}

func TestStarAtThePoleStaysThere(t *testing.T) {
	for _, dec := range []float64{90, -90} {
		s := astro.Star{RA: 1, Dec: astro.FromDeg(dec), PosEpochMJD: 51544.5, PMRAMasYr: 100}
		d := s.Direction(61000)
		if math.Abs(math.Abs(d[2])-1) > 1e-12 || math.IsNaN(d[0]) || math.IsNaN(d[1]) {
			t.Errorf("a star at declination %g stands at %v", dec, d)
		}
	}
}

func TestRangeErrorNamesEverything(t *testing.T) {
	var err error = &astro.RangeError{Quantity: "latitude in degrees", Value: "91", Allowed: "-90 to 90"}
	for _, part := range []string{"latitude in degrees", "91", "-90 to 90"} {
		if !strings.Contains(err.Error(), part) {
			t.Errorf("%q does not say %q", err, part)
		}
	}
	var r *astro.RangeError
	if !errors.As(err, &r) || r.Value != "91" {
		t.Errorf("the error is no RangeError: %v", err)
	}
}
