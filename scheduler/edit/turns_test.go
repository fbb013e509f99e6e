package edit

import (
	"math"
	"testing"

	"pgregory.net/rapid"

	"cadencewright/scheduler"
)

// The turns chosen are the best of all, by trying all of them.
func TestBestTurns(t *testing.T) {
	several := 0
	rapid.Check(t, func(t *rapid.T) {
		c := invented()
		lo := float64(rapid.IntRange(-400, 0).Draw(t, "from"))
		c.Telescopes[0].AzimuthRangeDeg = [2]float64{lo, lo + float64(rapid.IntRange(360, 700).Draw(t, "range"))}
		c.Telescopes[0].RateAzDegS = rapid.SampledFrom([]float64{0.1, 0.5, 2}).Draw(t, "rate")
		s := sessionFor(t, c)
		r := &row{}
		minute := 15
		for range rapid.IntRange(1, 5).Draw(t, "scans") {
			x, err := s.read(&scheduler.Scan{Block: "b1", Source: rapid.SampledFrom([]string{high, other}).Draw(t, "source"), Receiver: "L",
				Start: after(float64(minute)), Minutes: 20})
			if err != nil {
				t.Fatal(err)
			}
			if rapid.Bool().Draw(t, "planned") {
				x.wanted = rapid.IntRange(-1, 1).Draw(t, "turn")
			}
			r.scans = append(r.scans, x)
			minute += 20 + 5*rapid.IntRange(0, 3).Draw(t, "gap")
		}
		s.turn(r)
		got := s.burdenOf(r, r.turns)
		turns := make([]int, len(r.scans))
		ways := 0
		var all func(i int)
		all = func(i int) {
			if i == len(turns) {
				ways++
				if b := s.burdenOf(r, turns); lighter(b, got) {
					t.Errorf("turns %v weigh %+v, and %v only %+v", r.turns, got, turns, b)
				}
				return
			}
			for k := r.scans[i].turnLo; k <= r.scans[i].turnHi; k++ {
				turns[i] = k
				all(i + 1)
			}
		}
		all(0)
		if ways > 1 {
			several++
		}
	})
	if several < 10 {
		t.Errorf("only %d blocks with a choice", several)
	}
}

// burdenOf adds up what given turns cost.
func (s *Session) burdenOf(r *row, turns []int) burden {
	var b burden
	for i, x := range r.scans {
		if x.wanted != noTurn && turns[i] != x.wanted || x.wanted == noTurn && turns[i] != 0 {
			b.moved++
		}
		if i == 0 {
			continue
		}
		a := r.scans[i-1]
		need, slew := s.needS(a, turns[i-1], x, turns[i])
		b.travel += slew
		if lack := need - 60*(x.startMin-a.endMin); lack > roomS {
			b.short, b.lackMs = b.short+1, b.lackMs+int(math.Round(1000*lack))
		}
	}
	return b
}

// lighter is less, but for errors of rounding.
func lighter(a, b burden) bool {
	if math.Abs(a.travel-b.travel) < 1e-6 {
		a.travel = b.travel
	}
	return a.less(b)
}

func sessionFor(t *rapid.T, c *scheduler.Campaign) *Session {
	s, err := newSession(c)
	if err != nil {
		t.Fatal(err)
	}
	return s
}

// A scan that needs its neighbour on another turn gets it: the motor comes from
// just beyond north the short way instead of all the way round.
func TestTheNeighbourTurnsToo(t *testing.T) {
	c := invented()
	tel := &c.Telescopes[0]
	tel.RateAzDegS = 0.2
	tel.AzimuthRangeDeg = [2]float64{-180, 465}
	c.Sources[0].RADeg, c.Sources[0].DecDeg = 117, 80 // near north, a little to the west
	c.Sources[1].RADeg, c.Sources[1].DecDeg = 177, 20 // in the south-east, where there is one turn
	x := at(high, 20, 20)
	first := started(t, c, x).scans[0]
	if first.turnLo != -1 || first.turnHi != 0 {
		t.Fatalf("turns %d to %d", first.turnLo, first.turnHi)
	}
	az := first.from1
	x.MotorAzDeg = &az
	s := started(t, c, x)
	add := Add("b1", other, "L", after(55), 20)
	o, err := s.Try(add)
	if err != nil || !o.Legal() {
		t.Fatal(o, err)
	}
	plan, _, err := s.Apply(add)
	if err != nil {
		t.Fatal(err)
	}
	// 15 min at 0.2 deg/s are 180 deg at most: not the way from 345 deg to 115.
	if turned := *plan.Scans[0].MotorAzDeg - az; math.Abs(turned+360) > 1e-9 {
		t.Errorf("the motor stands at %.2f deg, before at %.2f", *plan.Scans[0].MotorAzDeg, az)
	}
	if same, _, err := s.Apply(); err != nil || math.Abs(*same.Scans[0].MotorAzDeg-az) > 1e-9 {
		t.Errorf("the turn of a plan without changes is %.3f, was %.3f", *same.Scans[0].MotorAzDeg, az)
	}
}
