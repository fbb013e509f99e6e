package scheduler

import (
	"errors"
	"fmt"
	"testing"
	"time"
)

// Look-ups by list and by index find the same things, and nothing for a name
// that no thing has.
func TestLookUps(t *testing.T) {
	c, err := ReadCampaign(readTestFile(t, "medium-1.json"))
	if err != nil {
		t.Fatal(err)
	}
	x := NewIndex(c)
	for i := range c.Telescopes {
		tel := &c.Telescopes[i]
		if c.TelescopeByCode(tel.Code) != tel || x.Telescope(tel.Code) != tel {
			t.Errorf("telescope %s is not found", tel.Code)
		}
		for j := range tel.Receivers {
			r := &tel.Receivers[j]
			if tel.ReceiverByCode(r.Code) != r || x.Receiver(tel.Code, r.Code) != r {
				t.Errorf("receiver %s of %s is not found", r.Code, tel.Code)
			}
		}
	}
	for i := range c.Sources {
		if s := &c.Sources[i]; c.SourceByName(s.Name) != s || x.Source(s.Name) != s {
			t.Errorf("source %s is not found", s.Name)
		}
	}
	for i := range c.Blocks {
		if b := &c.Blocks[i]; c.BlockByID(b.ID) != b || x.Block(b.ID) != b {
			t.Errorf("block %s is not found", b.ID)
		}
	}
	n := map[GoalKind]int{}
	c.EachGoal(func(kind GoalKind, i int, g *Goal) {
		if i != n[kind] {
			t.Errorf("%s goal %d comes after %d", kind, i, n[kind])
		}
		n[kind]++
		if c.GoalByID(g.ID) != g || x.Goal(g.ID) != g {
			t.Errorf("goal %s is not found", g.ID)
		}
	})
	if got := fmt.Sprint(n[KindCadence], n[KindPhase], n[KindOverlap], n[KindBandPair]); got != "42 12 12 14" {
		t.Errorf("goals by kind: %s", got)
	}
	if c.TelescopeByCode("?") != nil || x.Telescope("?") != nil || c.SourceByName("?") != nil || x.Source("?") != nil ||
		c.BlockByID("?") != nil ||
		x.Block("?") != nil || c.GoalByID("?") != nil || x.Goal("?") != nil || x.Receiver("?", "L1") != nil ||
		c.Telescopes[0].ReceiverByCode("?") != nil {
		t.Error("something is found under a name that nothing has")
	}
}

// What a receiver gives a goal is the bands they share, on telescopes that the
// goal allows.
func TestGoalBandsAndTelescopes(t *testing.T) {
	wide := &Receiver{Bands: []string{"U", "L", "S"}}
	g := Goal{Bands: []string{"S", "P", "U"}}
	if got := fmt.Sprint(g.BandsOf(wide)); got != "[S U]" {
		t.Errorf("shared bands %s", got)
	}
	if g.BandsOf(&Receiver{Bands: []string{"L"}}) != nil {
		t.Error("a band is shared that the goal does not have")
	}
	if !g.AllowsTelescope("ANY") {
		t.Error("a goal that names no telescope allows all")
	}
	g.Telescopes = []string{"ALT", "EQU"}
	if !g.AllowsTelescope("EQU") || g.AllowsTelescope("TRA") {
		t.Error("a goal allows the telescopes it names and no other")
	}
}

func TestEndsAndZones(t *testing.T) {
	c := everyField(t)
	if got := c.History[0].End(); !got.Equal(time.Date(2026, 12, 28, 19, 43, 30, 0, time.UTC)) {
		t.Errorf("38.5 minutes after 19:05: %v", got)
	}
	if got := c.Pins[0].End(); !got.Equal(time.Date(2027, 1, 4, 22, 25, 0, 0, time.UTC)) {
		t.Errorf("25 minutes after 22:00: %v", got)
	}
	if got := c.Blocks[0].Duration(); got != 9*time.Hour+30*time.Minute {
		t.Errorf("the block lasts %v", got)
	}
	zone, err := c.Telescopes[2].Location()
	if err != nil {
		t.Fatal(err)
	}
	// Summer time in Sydney, UTC+11.
	if got := c.Start.In(zone).Hour(); got != 11 {
		t.Errorf("midnight UTC is %d h at TRA", got)
	}
	tel := Telescope{Timezone: "Mars/Olympus"}
	if _, err := tel.Location(); err == nil || !errors.Is(KindOf(err), ErrInvalid) {
		t.Errorf("a zone that does not exist: %v", err)
	}
}
