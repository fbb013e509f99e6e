package verify

import (
	"math"
	"testing"
	"time"

	"cadencewright/scheduler"

	"pgregory.net/rapid"
)

// The stretches that a block leaves free, in steps from its start at midnight.
func TestFreeStretches(t *testing.T) {
	span := func(from, to float64) scheduler.Span { return scheduler.Span{Start: after(from), End: after(to)} }
	for _, x := range []struct {
		name string
		lost []scheduler.Span
		pins []scheduler.Pin
		want []run // block t1: 6 h of 72 steps, 11 min of setup and calibration, a gap of one step
	}{
		{"all", nil, nil, []run{{3, 72}}},
		{"a lost part", []scheduler.Span{span(1, 2)}, nil, []run{{3, 12}, {27, 72}}},
		{"lost from the start", []scheduler.Span{span(0, 2)}, nil, []run{{27, 72}}},
		{"lost to the end", []scheduler.Span{span(2, 6)}, nil, []run{{3, 24}}},
		{"all lost", []scheduler.Span{span(0, 6)}, nil, nil},
		{"lost parts one after the other", []scheduler.Span{span(1, 2), span(2, 3), span(3.1, 4)}, nil, []run{{3, 12}, {51, 72}}},
		{"a lost part off the grid", []scheduler.Span{span(1.01, 2.01)}, nil, []run{{3, 12}, {27, 72}}},
		{"a pin", nil, []scheduler.Pin{{Minutes: 20, Start: after(3)}}, []run{{3, 35}, {41, 72}}},
		{"a pin beside a lost part", []scheduler.Span{span(2, 2.8)}, []scheduler.Pin{{Minutes: 20, Start: after(3)}}, []run{{3, 24}, {41, 72}}},
	} {
		t.Run(x.name, func(t *testing.T) {
			c := tiny(t)
			c.Blocks[2].Lost, c.Pins = x.lost, nil
			for _, p := range x.pins {
				p.Block, p.Source, p.Receiver = "t1", c.Sources[6].Name, "L"
				c.Pins = append(c.Pins, p)
			}
			m := unitsOf(t, c)
			f, err := m.newField(m.blockByID["t1"])
			if err != nil {
				t.Fatal(err)
			}
			var got []run
			for _, r := range f.free {
				got = append(got, run{r.lo - f.first, r.hi - f.first})
			}
			if len(got) != len(x.want) {
				t.Fatalf("free are %v, want %v", got, x.want)
			}
			for i := range got {
				if got[i] != x.want[i] {
					t.Errorf("free are %v, want %v", got, x.want)
				}
			}
		})
	}
}

// A block without room for a single step has no field, and is no failure.
func TestBlocksWithoutAStep(t *testing.T) {
	for _, minutes := range []int{1, 4, 5, 9} {
		c := tiny(t)
		c.Blocks[2].Start = after(0).Add(time.Minute)
		c.Blocks[2].End = c.Blocks[2].Start.Add(time.Duration(minutes) * time.Minute)
		m := unitsOf(t, c)
		f, err := m.newField(m.blockByID["t1"])
		if err != nil {
			t.Fatal(err)
		}
		if has := f != nil; has != (minutes == 9) { // from 00:05 to 00:10
			t.Errorf("%d min: %v", minutes, f)
		}
		if _, err := m.bound(make([]float64, len(m.units)), Options{}); err != nil {
			t.Error(err)
		}
	}
}

// Parts that the azimuth drive can follow, against trying every scan with every
// whole number of turns.
func TestFollowedAgainstTrying(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		n := rapid.IntRange(2, 24).Draw(t, "instants")
		az := make([]float64, 2*n-1) // only every second is a grid instant
		at := rapid.Float64Range(0, 360).Draw(t, "azimuth")
		for i := range az {
			az[i] = math.Mod(at+3600, 360)
			at += rapid.Float64Range(-30, 30).Draw(t, "step")
		}
		lo := rapid.Float64Range(-720, 300).Draw(t, "lo")
		allowed := [2]float64{lo, lo + rapid.Float64Range(5, 700).Draw(t, "width")}
		tel := &telescope{Telescope: &scheduler.Telescope{Mount: scheduler.MountAltAz, AzimuthRangeDeg: allowed}}
		v := &view{field: &field{block: &block{telescope: tel}}}
		v.track.AzDeg = az
		v.addFollowed(run{0, int64(n - 1)})
		for from := range n {
			lo, hi, path := az[2*from], az[2*from], az[2*from]
			for to := from + 1; to < n; to++ {
				path += math.Remainder(az[2*to]-path, 360)
				lo, hi = min(lo, path), max(hi, path)
				surely, perhaps := false, false // at the very end of the range rounding decides
				for turn := -4.0; turn <= 4; turn++ {
					spare := min(lo+360*turn-allowed[0], allowed[1]-hi-360*turn)
					surely, perhaps = surely || spare >= 0, perhaps || spare >= -2e-9
				}
				got := false
				for _, s := range v.stretches {
					got = got || s.lo <= int64(from) && s.hi >= int64(to)
				}
				if surely && !got || got && !perhaps {
					t.Fatalf("from %d to %d, azimuth %g to %g in %v: %v", from, to, lo, hi, allowed, got)
				}
			}
		}
	})
}
