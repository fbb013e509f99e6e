package timescale_test

import (
	"math"
	"testing"
	"time"

	"pgregory.net/rapid"

	"cadencewright/astro/timescale"
)

func drawInstant(t *rapid.T) time.Time {
	span := timescale.Last.Unix() - timescale.First.Unix()
	sec := rapid.Int64Range(0, span-1).Draw(t, "second")
	return timescale.First.Add(time.Duration(sec) * time.Second).Add(time.Duration(rapid.IntRange(0, 999_999).Draw(t, "us")) * time.Microsecond)
}

func TestNewMJDIsNormal(t *testing.T) {
	for _, frac := range []float64{0, 0.5, 1, -1, -1e-20, -1e-17, 1 - 1e-17, 2.25, -0.25} {
		m := timescale.NewMJD(61000, frac)
		if m.Frac < 0 || m.Frac >= 1 {
			t.Errorf("61000 and %g gives a fraction of %g", frac, m.Frac)
		}
		if math.Abs(m.Float()-61000-frac) > 1e-10 {
			t.Errorf("61000 and %g gives %.12f", frac, m.Float())
		}
	}
}

func TestMJDKeepsAMicrosecond(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		m := timescale.NewMJD(rapid.IntRange(41317, 88068).Draw(t, "day"), rapid.Float64Range(0, 1).Draw(t, "frac"))
		s := rapid.Float64Range(-1e6, 1e6).Draw(t, "seconds")
		later := m.AddS(s)
		if got := (float64(later.Day-m.Day) + later.Frac - m.Frac) * 86400; math.Abs(got-s) > 1e-8 {
			t.Errorf("%g s later is %.9f s later", s, got)
		}
		epoch := float64(rapid.IntRange(41317, 88068).Draw(t, "epoch"))
		if got := m.DaysSince(epoch) - (float64(m.Day) - epoch) - m.Frac; math.Abs(got) > 1e-11 {
			t.Errorf("days since %g are off by %g", epoch, got)
		}
		if math.Abs(m.JD()-m.Float()-2400000.5) > 1e-9 {
			t.Errorf("Julian Date %.9f of MJD %.9f", m.JD(), m.Float())
		}
	})
}

// Every instant comes back from TDB to the microsecond, the seconds about a
// leap second too.
func TestFromTDBTurnsBack(t *testing.T) {
	turns := func(t interface {
		Helper()
		Errorf(string, ...any)
	}, u time.Time) {
		t.Helper()
		tdb, err := timescale.TDB(u)
		if err != nil {
			t.Errorf("%s: %v", u, err)
			return
		}
		back, err := timescale.FromTDB(tdb)
		if err != nil || back.Sub(u).Abs() > 2*time.Microsecond {
			t.Errorf("%s came back as %s, %v", u.Format(time.RFC3339Nano), back.Format(time.RFC3339Nano), err)
		}
	}
	for _, s := range []string{"1972-01-01T00:00:00Z", "1972-06-30T23:59:59.9Z", "1972-07-01T00:00:00Z", "1998-12-31T23:58:30Z", "2016-12-31T23:59:59.5Z",
		"2017-01-01T00:00:00Z", "2017-01-01T00:00:30Z", "2099-12-31T23:59:59.9Z"} {
		turns(t, at(s))
	}
	rapid.Check(t, func(t *rapid.T) { turns(t, drawInstant(t)) })
}

// A TDB that falls into a leap second gives the second after it.
func TestFromTDBInALeapSecond(t *testing.T) {
	after, err := timescale.TDB(at("2017-01-01T00:00:00Z"))
	if err != nil {
		t.Fatal(err)
	}
	got, err := timescale.FromTDB(after.AddS(-0.25))
	if err != nil {
		t.Fatal(err)
	}
	if want := at("2017-01-01T00:00:00.75Z"); got.Sub(want).Abs() > 2*time.Microsecond {
		t.Errorf("a quarter second before 2017 TDB is %s, want %s", got.Format(time.RFC3339Nano), want.Format(time.RFC3339Nano))
	}
}

func TestFromTDBOutsideTheRange(t *testing.T) {
	for _, m := range []timescale.MJD{{Day: 40000}, {Day: 41317}, {Day: 88070}, {Day: 100000}} {
		if u, err := timescale.FromTDB(m); err == nil {
			t.Errorf("TDB %d is %s and no error", m.Day, u)
		}
	}
}

// TDB and TT never part by more than 2 ms, nor does either run backwards.
func TestTDBStaysByTT(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		u := drawInstant(t)
		if u.Add(2 * time.Second).After(timescale.Last) {
			return
		}
		tt, err := timescale.TT(u)
		if err != nil {
			t.Fatal(err)
		}
		if d := timescale.TDBMinusTTS(tt.Float()); math.Abs(d) > 0.0017 {
			t.Errorf("TDB-TT is %g s", d)
		}
		later, err := timescale.TDB(u.Add(time.Second))
		if err != nil {
			t.Fatal(err)
		}
		now, _ := timescale.TDB(u)
		if step := later.AddS(0).DaysSince(float64(now.Day))*86400 - now.Frac*86400; step < 0.999 || step > 2.001 {
			t.Errorf("a second of UTC is %g s of TDB", step)
		}
	})
}
