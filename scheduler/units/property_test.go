package units_test

import (
	"fmt"
	"math"
	"testing"

	"pgregory.net/rapid"

	"cadencewright/scheduler"
	"cadencewright/scheduler/units"
)

// near is equality to a millisecond, or to a part in a billion.
func near(a, b float64) bool { return math.Abs(a-b) <= units.MS+1e-9*math.Abs(b) }

// drawPast draws counted scans at whole minutes before the horizon, close
// enough together to overlap and to pair now and then.
func drawPast(t *rapid.T) []had {
	var past []had
	for range rapid.IntRange(0, 8).Draw(t, "scans") {
		past = append(past, had{tel: rapid.SampledFrom([]string{"A", "B", "C"}).Draw(t, "tel"), rx: rapid.SampledFrom([]string{"L", "S", "W"}).Draw(t, "rx"),
			day: -float64(rapid.IntRange(1, 240).Draw(t, "minutes ago")) / 1440, minutes: float64(rapid.IntRange(1, 90).Draw(t, "minutes"))})
	}
	return past
}

// three is the campaign with a third telescope.
func three(past ...had) *scheduler.Campaign {
	c := campaign(past...)
	third := c.Telescopes[0]
	third.Code = "C"
	c.Telescopes = append(c.Telescopes, third)
	return c
}

// bandsOf are the bands of the receivers of campaign.
var bandsOf = map[string]string{"L": "L", "S": "S", "W": "LS"}

// lastOf finds the last instant at which some scans satisfy a goal by trying
// all sets of them; ok tells whether a set does, and at which instant.
func lastOf(past []had, ok func(set []had) (float64, bool)) (float64, bool) {
	best, found := math.Inf(-1), false
	for mask := 1; mask < 1<<len(past); mask++ {
		var set []had
		for i := range past {
			if mask>>i&1 == 1 {
				set = append(set, past[i])
			}
		}
		if at, yes := ok(set); yes && at > best {
			best, found = at, true
		}
	}
	return best, found
}

// checkDue compares a goal's first unit with the last time it was satisfied,
// in days from the horizon's start.
func checkDue(t *rapid.T, s *units.Set, last float64, ok bool, everyD, priority float64) {
	u := s.Units[0]
	due, urgency := s.From, 3.0
	if ok {
		due = math.Max(s.From, s.From+(last+everyD)*1440)
		urgency = 1 + math.Min(2, math.Max(0, (-last-everyD)/everyD))
	}
	if !near(u.Due, due) || math.Abs(u.Weight-priority*urgency) > 1e-6 {
		t.Fatalf("last %.5f d (%t): due on day %.5f with weight %.6f, want %.5f and %.6f", last, ok, (u.Due-s.From)/1440, u.Weight, (due-s.From)/1440, priority*urgency)
	}
}

// The last overlap, by trying every set of scans: on different telescopes, in
// one common band, with a common time that is long enough; L is its start.
func TestLastOverlapByTryingAll(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		past, count, overlap := drawPast(t), rapid.IntRange(2, 3).Draw(t, "count"), float64(rapid.IntRange(1, 40).Draw(t, "overlap"))
		bands := rapid.SampledFrom([]string{"L", "S", "LS"}).Draw(t, "bands")
		last, ok := lastOf(past, func(set []had) (float64, bool) {
			tels, common := map[string]bool{}, bands
			from, to := math.Inf(-1), math.Inf(1)
			for _, h := range set {
				tels[h.tel] = true
				kept := ""
				for _, b := range common {
					for _, own := range bandsOf[h.rx] {
						if own == b {
							kept += string(b)
						}
					}
				}
				common = kept
				from, to = math.Max(from, h.day*1440), math.Min(to, h.day*1440+h.minutes)
			}
			return from / 1440, len(set) == count && len(tels) == count && common != "" && to-from >= overlap-1e-6
		})
		c := three(past...)
		c.OverlapGoals = []scheduler.OverlapGoal{{Goal: goal(labels(bands)...), Count: count, OverlapMin: overlap, EveryD: 0.05}}
		s, err := units.Build(c, horizon(1))
		if err != nil {
			t.Fatal(err)
		}
		checkDue(t, s, last, ok, 0.05, 2)
		if s.Units[0].Cap != count {
			t.Fatalf("cap %d", s.Units[0].Cap)
		}
	})
}

// The last pair likewise: one scan with both bands, or two within reach; L is
// the later start.
func TestLastPairByTryingAll(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		past, within := drawPast(t), float64(rapid.IntRange(1, 100).Draw(t, "within"))
		last, ok := lastOf(past, func(set []had) (float64, bool) {
			first, later, all := math.Inf(1), math.Inf(-1), ""
			for _, h := range set {
				first, later = math.Min(first, h.day), math.Max(later, h.day)
				all += bandsOf[h.rx]
			}
			both := func() bool {
				l, s := false, false
				for _, b := range all {
					l, s = l || b == 'L', s || b == 'S'
				}
				return l && s
			}
			return later, len(set) <= 2 && both() && (later-first)*1440 <= within+1e-6
		})
		c := three(past...)
		c.BandPairGoals = []scheduler.BandPairGoal{{Goal: goal("L", "S"), WithinH: within / 60, EveryD: 0.2}}
		s, err := units.Build(c, horizon(1))
		if err != nil {
			t.Fatal(err)
		}
		checkDue(t, s, last, ok, 0.2, 2)
	})
}

func labels(bands string) []string {
	var list []string
	for _, b := range bands {
		list = append(list, string(b))
	}
	return list
}

// Due windows, for any interval and horizon: the first by the history, the
// others at equal distances up to the horizon's end, urgent only once.
func TestDueWindowsOfAnyInterval(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		every, days := rapid.Float64Range(0.05, 40).Draw(t, "every"), rapid.Float64Range(0.5, 30).Draw(t, "days")
		priority, early := rapid.Float64Range(0.01, 10).Draw(t, "priority"), every*rapid.Float64Range(0, 0.5).Draw(t, "early")
		var past []had
		last, ok := 0.0, rapid.Bool().Draw(t, "observed")
		if ok {
			// A history instant is a whole millisecond.
			last = -float64(rapid.Int64Range(1, 90*86400_000).Draw(t, "ago")) / 86400_000
			past = []had{{"A", "L", last, 20}}
		}
		c := campaign(past...)
		g := goal("L")
		g.Priority = priority
		c.CadenceTargets = []scheduler.CadenceTarget{{Goal: g, EveryD: every, EarlyD: early}}
		s, err := units.Build(c, horizon(days))
		if err != nil {
			t.Fatal(err)
		}
		sum, end := 0.0, s.From
		if ok {
			end = math.Max(s.From, s.From+(last+every)*1440)
		}
		for i, u := range s.Units {
			if u.Name != fmt.Sprintf("g#%d", i+1) || u.Group != s.Units[0].Group || u.N != 1 || u.Cap != 1 || u.Value != u.Weight || u.Due >= s.To {
				t.Fatalf("unit %+v", u)
			}
			if !near(u.Due, end) || i > 0 && math.Abs(u.Weight-priority) > 1e-12 || u.Weight > 3*priority+1e-9 || u.Weight < priority-1e-9 {
				t.Fatalf("unit %d: due %.6f, want %.6f; weight %g of priority %g", i, u.Due, end, u.Weight, priority)
			}
			sum, end = sum+u.Weight, end+every*1440
		}
		if len(s.Units) > 0 {
			checkDue(t, s, last, ok, every, priority)
		}
		if end < s.To-1 || math.Abs(sum-s.Possible) > 1e-9*(1+sum) {
			t.Fatalf("the next window would be due %.3f min before the horizon's end; possible %g, sum %g", s.To-end, s.Possible, sum)
		}
	})
}

// Timeliness lies in [0, 1], is 1 when due, rises to that and falls from it,
// and is 0 outside the window; the best of a stretch is the largest in it.
func TestTimelinessOfAnyWindow(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		every := rapid.Float64Range(10, 1e5).Draw(t, "every")
		u := units.Unit{Due: 3e7, Every: every, Early: every * rapid.Float64Range(0, 0.5).Draw(t, "early")}
		if u.Timeliness(u.Due) != 1 {
			t.Fatalf("v = %g when due", u.Timeliness(u.Due))
		}
		at := u.Due + every*rapid.Float64Range(-1, 2).Draw(t, "at")
		later := at + every*rapid.Float64Range(0, 1).Draw(t, "later")
		v, w := u.Timeliness(at), u.Timeliness(later)
		if v < 0 || v > 1 || v > 0 && v < 0.4-1e-9 {
			t.Fatalf("v = %g", v)
		}
		if later <= u.Due && at >= u.Due-u.Early && v > w+1e-12 || at >= u.Due && w > v+1e-12 {
			t.Fatalf("v goes from %g to %g over [%g, %g] after the due time", v, w, at-u.Due, later-u.Due)
		}
		from, to := u.Window()
		if (at < from || at >= to) != (v == 0) {
			t.Fatalf("v = %g, window [%g, %g), at %g", v, from, to, at)
		}
		best := 0.0
		for i := range 1001 {
			best = math.Max(best, u.Timeliness(at+(later-at)*float64(i)/1000))
		}
		// Between samples it rises by a thousandth of the stretch at most.
		slack := 0.5*(later-at)/1000/math.Max(u.Early, units.MS) + 1e-12
		if got := u.BestTimeliness(at, later); got < best-1e-12 || got > best+slack && u.Early > 1 {
			t.Fatalf("best on [%g, %g] after the due time is %g, sampled %g", at-u.Due, later-u.Due, got, best)
		}
	})
}

// Quality rises with information, is never between 0 and a half, and 1 once the
// wanted uncertainty is reached.
func TestQualityOfAnyScan(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		wanted := rapid.Float64Range(0.01, 100).Draw(t, "wanted us")
		reached := wanted * rapid.Float64Range(0.2, 3).Draw(t, "reached of wanted")
		q := units.Quality(1e12/(reached*reached), wanted)
		want := (wanted / reached) * (wanted / reached)
		switch {
		case reached <= wanted:
			want = 1
		case reached > wanted*math.Sqrt2:
			want = 0
		}
		if math.Abs(q-want) > 1e-9 && math.Abs(reached-wanted*math.Sqrt2) > 1e-9*wanted {
			t.Fatalf("%g us reached of %g wanted: quality %g, want %g", reached, wanted, q, want)
		}
		if more := units.Quality(1.1e12/(reached*reached), wanted); more < q {
			t.Fatalf("more information is worth less: %g after %g", more, q)
		}
	})
}

// A scan covers a passage when it spends the dwell time in it, or all of it;
// stepping through the scan minute by minute says the same.
func TestCoversMinuteByMinute(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		enter, long := rapid.IntRange(0, 100).Draw(t, "enter"), rapid.IntRange(1, 100).Draw(t, "long")
		start, minutes := rapid.IntRange(-50, 200).Draw(t, "start"), rapid.IntRange(1, 100).Draw(t, "minutes")
		dwell := rapid.IntRange(1, 60).Draw(t, "dwell")
		inside := 0
		for m := start; m < start+minutes; m++ {
			if m >= enter && m < enter+long {
				inside++
			}
		}
		p := units.Passage{Enter: float64(enter), Leave: float64(enter + long)}
		want := inside >= min(dwell, long)
		if got := p.Covers(float64(start), float64(start+minutes), float64(dwell)); got != want {
			t.Fatalf("[%d, %d) in a passage [%d, %d): %d min inside, dwell %d: %t", start, start+minutes, enter, enter+long, inside, dwell, got)
		}
	})
}

// An instant in minutes keeps its millisecond.
func TestMinutesKeepMilliseconds(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		from, to := scheduler.FirstInstant.UnixMilli(), scheduler.EndInstant.UnixMilli()
		at := units.Instant(float64(rapid.Int64Range(from, to).Draw(t, "ms")) / 60000)
		if back := units.Instant(units.Minutes(at)); !back.Equal(at) || back.Location().String() != "UTC" {
			t.Fatalf("%s becomes %s", at, back)
		}
	})
}
