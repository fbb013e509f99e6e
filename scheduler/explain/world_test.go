package explain

import (
	"math"
	"reflect"
	"slices"
	"testing"
	"time"

	"cadencewright/astro/sky"
	"cadencewright/scheduler"
	"cadencewright/scheduler/edit"
	"cadencewright/scheduler/feasible"
)

// asking is a question about the first unit of a campaign of this package, and
// an adviser for it, under an empty plan.
func asking(t *testing.T, c *scheduler.Campaign, unit string) (*adviser, *question) {
	t.Helper()
	if err := c.Validate(); err != nil {
		t.Fatal(err)
	}
	p, err := feasible.Build(c, scheduler.Horizon{From: c.Start, To: c.End})
	if err != nil {
		t.Fatal(err)
	}
	e := newExplainer(p, &scheduler.Plan{Campaign: c.Name, From: c.Start, To: c.End})
	q := e.question(p.Units.ByName(unit))
	q.look()
	return e.newAdviser(), q
}

// A suggestion's campaign is a copy: the real one stays as it is, to the byte.
func TestCampaignsAreCopies(t *testing.T) {
	c := lone()
	wantScan(c)
	before, err := scheduler.WriteCampaign(c)
	if err != nil {
		t.Fatal(err)
	}
	for _, x := range []struct {
		s     Suggestion
		holds func(c *scheduler.Campaign) bool
	}{
		{Suggestion{Kind: Insert}, func(d *scheduler.Campaign) bool { return d == c }},
		{Suggestion{Kind: ScanLength, Source: asked, ScanMinutes: 30}, func(d *scheduler.Campaign) bool {
			return slices.Equal(d.Sources[0].ScanMinutes, []int{20, 30, 40}) && len(d.Sources[1].ScanMinutes) == 2
		}},
		{Suggestion{Kind: LowerLimit, Telescope: "ONE", ElevationDeg: 3}, func(d *scheduler.Campaign) bool {
			return d.Telescopes[0].ElevationMinDeg == 3 && d.Telescopes[1].ElevationMinDeg == 1
		}},
		{Suggestion{Kind: Receiver, Block: "b1", Receivers: []string{"S"}}, func(d *scheduler.Campaign) bool {
			return slices.Equal(d.Blocks[0].Receivers, []string{"L", "S"})
		}},
		{Suggestion{Kind: LongerBlock, Block: "b1", Start: after(-1), End: after(8)}, func(d *scheduler.Campaign) bool {
			return d.Blocks[0].Start.Equal(after(-1)) && d.Blocks[0].End.Equal(after(8))
		}},
		{Suggestion{Kind: NewBlock, Block: "n", Telescope: "TWO", Receivers: []string{"L"}, Start: after(1), End: after(2)}, func(d *scheduler.Campaign) bool {
			return len(d.Blocks) == 2 && d.Blocks[1].ID == "n"
		}},
	} {
		if d := x.s.Campaign(c); !x.holds(d) {
			t.Errorf("%s: %+v", x.s.Kind, d)
		}
		if now, err := scheduler.WriteCampaign(c); err != nil || string(now) != string(before) {
			t.Errorf("%s has changed the campaign itself: %v", x.s.Kind, err)
		}
	}
}

// Blocks are lengthened up to their telescope's other blocks and the ends of the
// campaign, and no further.
func TestHowFarBlocksCanGrow(t *testing.T) {
	c := lone()
	wantScan(c)
	addBlock(c, "b2", "ONE", 8, 2, "L")    // an hour after b1
	addBlock(c, "b3", "ONE", 164, 3, "L")  // an hour before the end
	addBlock(c, "c1", "TWO", 7.5, 1, "L")  // another telescope's is not in the way
	addBlock(c, "b4", "ONE", 20, 0.5, "L") // free on both sides
	_, q := asking(t, c, "cad#1")
	d := *c
	d.Blocks = slices.Clone(c.Blocks)
	q.lengthen(&d)
	for i, want := range [][2]float64{{0, 8}, {7, 13}, {161, 168}, {4.5, 11.5}, {17, 23.5}} {
		if b := d.Blocks[i]; !b.Start.Equal(after(want[0])) || !b.End.Equal(after(want[1])) {
			t.Errorf("block %s from %s to %s, want %g to %g h", b.ID, b.Start, b.End, want[0], want[1])
		}
	}
}

// Free time is what no block of the telescope takes while scans count.
func TestFreeTime(t *testing.T) {
	c := lone()
	g := wantScan(c)
	g.EveryD, g.EarlyD = 1, 0.25 // counts for a day; a scan takes 40 min at most, setup and calibration 11
	addBlock(c, "b2", "ONE", 10, 3, "L")
	_, q := asking(t, c, "cad#1")
	var got [][2]float64
	for _, s := range q.free(&c.Telescopes[0]) {
		got = append(got, [2]float64{s[0] - q.Units.From, s[1] - q.Units.From})
	}
	want := [][2]float64{{420, 600}, {780, 1480}}
	if len(got) != 2 || math.Abs(got[0][0]-want[0][0])+math.Abs(got[0][1]-want[0][1])+math.Abs(got[1][0]-want[1][0])+math.Abs(got[1][1]-want[1][1]) > 0.01 {
		t.Errorf("free from and to %v min, want %v", got, want)
	}
	if got := q.free(&c.Telescopes[1]); len(got) != 1 {
		t.Errorf("free at the other telescope: %v", got)
	}
	d := *c
	d.Blocks = slices.Clone(c.Blocks)
	names := map[string]bool{}
	q.spare(&d, names)
	if len(names) != 3 || len(d.Blocks) != 5 {
		t.Fatalf("blocks %v", d.Blocks)
	}
	if err := d.Validate(); err != nil {
		t.Errorf("the blocks that were added: %v", err)
	}
}

func TestScanLengthsThatAreTried(t *testing.T) {
	for _, x := range []struct {
		from, to, every, grid int
		want                  []int
	}{{5, 20, 5, 5, []int{5, 10, 15, 20}}, {5, 20, 3, 5, []int{5, 10, 15, 20}}, {5, 30, 10, 10, []int{10, 20, 30}}, {7, 8, 1, 1, []int{7, 8}},
		{8, 7, 1, 1, nil}} {
		if got := steps(x.from, x.to, x.every, x.grid); !slices.Equal(got, x.want) {
			t.Errorf("from %d to %d every %d on %d: %v, want %v", x.from, x.to, x.every, x.grid, got, x.want)
		}
	}
	if nearestLength([]int{20, 40}, 29) != 20 || nearestLength([]int{20, 40}, 31) != 40 || nearestLength([]int{20, 40}, 100) != 40 {
		t.Error("the nearest length is another")
	}
}

// The lowest elevation of an option is that of the sky, on every mount; on a
// transit mount it is not above it.
func TestLowestElevation(t *testing.T) {
	for _, mount := range []string{"altaz", "equatorial", "transit"} {
		c := lone()
		wantScan(c)
		switch mount {
		case "equatorial":
			equatorial(&c.Telescopes[0], -12, 12)
		case "transit":
			transit(&c.Telescopes[0], 90)
		}
		a, q := asking(t, c, "cad#1")
		w := a.world(q, LowerLimit)
		if w == nil || w.Campaign.Telescopes[0].ElevationMinDeg != 0 || a.Campaign.Telescopes[0].ElevationMinDeg != 15 {
			t.Fatalf("%s: no world", mount)
		}
		b := &w.Blocks[0]
		pl := b.PlaceOf(0)
		l := &pl.Lengths[0]
		for _, start := range []int{l.Runs[0].From, l.Runs[0].To - 1} {
			o := &option{place: pl, start: start, steps: l.Steps}
			low := math.Inf(1)
			for k := start; k <= start+l.Steps; k++ {
				at := instant(b.Minute(k, w.GridMin))
				p, err := sky.Observe(c.Telescopes[0].Site(), c.Sources[0].Star(), at, c.DUT1S)
				if err != nil {
					t.Fatal(err)
				}
				low = math.Min(low, p.ElDeg)
			}
			if got := w.lowest(b, o); got > low+1e-3 || mount != "transit" && got < low-1e-3 {
				t.Errorf("%s: %.4f deg, in the sky %.4f deg", mount, got, low)
			}
		}
	}
}

// What an option owes: minutes beyond its block, rounded up to whole ones.
func TestMinutesOutsideABlock(t *testing.T) {
	c := lone()
	wantScan(c)
	c.Blocks[0].Start = after(1).Add(30 * time.Second)
	a, q := asking(t, c, "cad#1")
	w := a.world(q, LongerBlock)
	first := w.Units.From
	for _, x := range []struct{ start, end, early, late float64 }{
		{120, 140, 0, 0},
		{75, 95, 0, 0},    // 660 s of setup and calibration after 60.5 min are over at 71.5
		{70, 90, 2, 0},    // they must begin at 59
		{400, 425, 0, 5},  // the block ends at 420
		{60, 430, 12, 10}, // both
	} {
		early, late := w.outside(&option{startMin: first + x.start, endMin: first + x.end})
		if early != x.early || late != x.late {
			t.Errorf("%g to %g min: %g before and %g after, want %g and %g", x.start, x.end, early, late, x.early, x.late)
		}
	}
}

// A suggestion for another plan is refused where the plan lacks what it moves or
// drops.
func TestSuggestionsForAnotherPlan(t *testing.T) {
	c := lone()
	wantScan(c)
	x := observed(other, "b1", 1, 20)
	empty := &scheduler.Plan{Campaign: c.Name, From: c.Start, To: c.End}
	for _, s := range []Suggestion{{Kind: MakeRoom, Drop: []scheduler.Scan{x}}, {Kind: MakeRoom, Move: []Moved{{x, after(2)}}}} {
		if _, _, err := s.Apply(c, empty); scheduler.KindOf(err) != scheduler.ErrInvalid {
			t.Errorf("%+v: error %v", s, err)
		}
		plan := *empty
		plan.Scans = []scheduler.Scan{x}
		if _, after, err := s.Apply(c, &plan); err != nil || len(after.Scans) != len(s.Move) {
			t.Errorf("%+v: %v", s, err)
		}
	}
	bad := Suggestion{Kind: NewBlock, Block: "n", Telescope: "NONE", Start: after(1), End: after(2)}
	if _, _, err := bad.Apply(c, empty); err == nil {
		t.Error("a block of no telescope")
	}
}

// Scans that cost nothing to take away give way to what a change makes possible.
func TestIdleScansGiveWay(t *testing.T) {
	c := lone()
	g := wantScan(c)
	g.Bands, g.Telescopes = []string{"S"}, []string{"ONE"}
	c.Blocks[0].End = after(1.1)
	plan := &scheduler.Plan{Campaign: c.Name, From: c.Start, To: c.End, Scans: []scheduler.Scan{observed(other, "b1", 0.5, 20)}}
	p, err := feasible.Build(c, scheduler.Horizon{From: c.Start, To: c.End})
	if err != nil {
		t.Fatal(err)
	}
	list, err := Suggest(p, plan, "cad#1")
	if err != nil || len(list) == 0 || list[0].Kind != Receiver || len(list[0].Drop) != 1 || list[0].Drop[0].Source != other {
		t.Fatalf("%+v, %v", list, err)
	}
	_, done, err := list[0].Apply(c, plan)
	if err != nil || len(done.Scans) != 1 || done.Scans[0].Source != asked {
		t.Errorf("%+v, %v", done, err)
	}
	// One that earns does not.
	c.CadenceTargets = append(c.CadenceTargets, scheduler.CadenceTarget{Goal: scheduler.Goal{ID: "oth", Source: other, Bands: []string{"L"}, Priority: 1}, EveryD: 9, EarlyD: 2})
	if p, err = feasible.Build(c, scheduler.Horizon{From: c.Start, To: c.End}); err != nil {
		t.Fatal(err)
	}
	plan.Scans[0].Earns = []scheduler.Earning{earning("oth#1", 3)}
	if list, err = Suggest(p, plan, "cad#1"); err != nil {
		t.Fatal(err)
	}
	for _, s := range list {
		if len(s.Drop) > 0 {
			t.Errorf("%+v", s)
		}
	}
}

// The same plan gets the same suggestions, and making them changes nothing.
func TestSameSuggestionsAgain(t *testing.T) {
	p, plan := problemOf(t, "medium-2"), planOf(t, "medium-2")
	for _, u := range unmet(p, plan, 0)[:4] {
		first, err := Suggest(p, plan, u.Unit)
		if err != nil {
			t.Fatal(err)
		}
		again, err := Suggest(p, plan, u.Unit)
		if err != nil || !reflect.DeepEqual(again, first) {
			t.Errorf("%s: %+v, then %+v, %v", u.Unit, first, again, err)
		}
	}
}

// Small problems have changes of the campaign looked for with many units, huge
// ones with few.
func TestHowManyAreLookedAt(t *testing.T) {
	e := newExplainer(problemOf(t, "small-1"), &scheduler.Plan{})
	if n := e.explored(); n != 60 {
		t.Errorf("%d units of a small problem", n)
	}
	huge := *problemOf(t, "small-1")
	huge.Blocks = []feasible.Block{{Steps: 100_000_000}}
	if n := (&explainer{Problem: &huge}).explored(); n != 5 {
		t.Errorf("%d units of a huge problem", n)
	}
	heavy := e.weightiest(2)
	for ui := range e.Units.Units {
		for hi := range heavy {
			if !heavy[ui] && e.Units.Units[ui].Weight > e.Units.Units[hi].Weight {
				t.Errorf("%s weighs more than %s", e.Units.Units[ui].Name, e.Units.Units[hi].Name)
			}
		}
	}
}

// A plan that cannot be read as one of the problem's gets causes alone.
func TestMeetsNeedsAChange(t *testing.T) {
	p, plan := problemOf(t, "small-1"), planOf(t, "small-1")
	s, err := edit.New(p, plan)
	if err != nil {
		t.Fatal(err)
	}
	if _, met := meets(s, p.Units.Units[0].Name, nil); met {
		t.Error("met by nothing")
	}
	if _, met := meets(s, p.Units.Units[0].Name, []edit.Change{edit.Drop(-1)}); met {
		t.Error("met by what makes no sense")
	}
	if list := (&adviser{explainer: newExplainer(p, plan)}).suggest(nil, 3, true); list != nil {
		t.Errorf("without a session: %v", list)
	}
}
