package plot

import (
	"math"
	"strings"
	"testing"
	"time"

	"cadencewright/web/view"
)

func TestRingAngles(t *testing.T) {
	for _, c := range []struct{ phase, x, y float64 }{
		{0, ringMid, ringMid - 100}, {0.25, ringMid + 100, ringMid}, {0.5, ringMid, ringMid + 100}, {0.75, ringMid - 100, ringMid},
	} {
		x, y := ringAt(c.phase, 100)
		if math.Hypot(x-c.x, y-c.y) > 1e-9 {
			t.Errorf("phase %v at %v, %v; want %v, %v", c.phase, x, y, c.x, c.y)
		}
	}
}

func TestRing(t *testing.T) {
	o := view.Orbit{
		Reference: "periastron", PbD: 12.3, Ecc: 0.3, ConjunctionPhase: 0.24, PeriastronPhase: 0,
		Windows: []view.PhaseWindow{{From: 0.1, To: 0.8, Need: 3, Had: 1}, {From: 0.95, To: 1.05, Need: 1, Had: 1}, {From: 0, To: 1, Need: 1}},
		Marks:   []view.PhaseMark{{From: 0.2, To: 0.2001}, {From: 0.4, To: 0.5, Planned: true}},
	}
	es := parse(t, Ring(o))
	windows := of(es, "window")
	if len(windows) != 3 {
		t.Fatalf("%d windows, want 3", len(windows))
	}
	if !strings.Contains(windows[0].attr["d"], " 0 1 1 ") {
		t.Errorf("a window of 0.7 takes the short way: %s", windows[0].attr["d"])
	}
	if !strings.Contains(windows[1].attr["class"], "full") || !strings.Contains(windows[1].attr["d"], " 0 0 1 ") {
		t.Errorf("a window over nought that has all: %v", windows[1].attr)
	}
	if windows[2].name != "circle" {
		t.Errorf("a window of the whole orbit is a %s", windows[2].name)
	}
	if had, planned := of(es, "had"), of(es, "planned"); len(had) != 1 || len(planned) != 1 {
		t.Errorf("%d had, %d planned", len(had), len(planned))
	}
	if n := len(of(es, "point")); n != 2 {
		t.Errorf("%d points, want conjunction and periastron", n)
	}
	o.ConjunctionPhase, o.PeriastronPhase = -1, math.NaN()
	if n := len(of(parse(t, Ring(o)), "point")); n != 0 {
		t.Errorf("%d points, although neither is known", n)
	}
}

func TestCadence(t *testing.T) {
	c := view.Cadence{From: monday, To: monday.AddDate(0, 0, 70), Now: monday.AddDate(0, 0, 35), Bands: []view.CadenceBand{
		{Band: "L", EveryD: 7, Marks: []view.CadenceMark{
			{At: monday.AddDate(0, 0, 7), Kind: view.ScanCounted}, {At: monday.AddDate(0, 0, 14), Kind: view.ScanFailed},
			{At: monday.AddDate(0, 0, 42), Kind: view.ScanPlanned},
		}}, {Band: "S"},
	}}
	es := parse(t, Cadence(c))
	for class, want := range map[string]int{"had": 1, "failed": 1, "planned": 1, "now": 1, "scale": 2} {
		if got := len(of(es, class)); got != want {
			t.Errorf("%d of %s, want %d", got, class, want)
		}
	}
	if got := of(es, "scale")[0].text; got != "L · 7 d" {
		t.Errorf("label %q", got)
	}
	c.Now = monday.AddDate(1, 0, 0)
	if len(of(parse(t, Cadence(c)), "now")) != 0 {
		t.Error("now is marked although it lies outside")
	}
	parse(t, Cadence(view.Cadence{})) // nothing known yet
}

func TestStrip(t *testing.T) {
	w := view.Week{Page: view.Page{Now: monday.Add(30 * time.Hour)}, From: monday, To: monday.AddDate(0, 0, 7), Telescopes: []view.StripRow{
		{Code: "ALD", Name: "Aldermoor", Blocks: []view.StripBlock{
			{ID: "a", Span: span(0, 600), UsedMin: 300}, {ID: "b", Span: span(20000, 30000), UsedMin: 0}, {ID: "c", Span: span(9900, 10500), Lost: true},
		}},
	}}
	es := parse(t, Strip(w))
	frames := of(es, "frame")
	if len(frames) != 2 {
		t.Fatalf("%d blocks, want the two that lie in the week", len(frames))
	}
	used := of(es, "used")
	if len(used) != 1 || math.Abs(number(t, used[0], "width")*2-number(t, frames[0], "width")) > 0.2 {
		t.Errorf("a block used by half: %v of %v", used, frames[0])
	}
	if x := number(t, frames[1], "x") + number(t, frames[1], "width"); x > 952.1 {
		t.Errorf("a block that goes on after the week reaches %v", x)
	}
	if len(of(es, "now")) != 1 {
		t.Error("now is not marked")
	}
}

func TestScore(t *testing.T) {
	es := parse(t, Score(view.Plan{Score: 50, Bound: 75, Possible: 100}))
	score, gap := of(es, "score")[0], of(es, "gap")[0]
	if a, b := number(t, score, "width"), number(t, gap, "width"); math.Abs(a-2*b) > 0.2 {
		t.Errorf("score %v wide and gap %v, want twice", a, b)
	}
	parse(t, Score(view.Plan{}))
	parse(t, Score(view.Plan{Score: 3, Bound: 3, Possible: 1}))
}

func TestSkyAndTrack(t *testing.T) {
	var pts []view.Point
	for m := 0; m <= 7*24*60; m += 60 {
		pts = append(pts, view.Point{At: span(m, m).Start, ElDeg: 60 * math.Sin(float64(m)/229)})
	}
	p := view.SkyPanel{Name: "Aldermoor", Points: pts, LimitDeg: 10, MaxDeg: 85, NearSun: []view.Span{span(0, 1440)}, Up: []view.Span{span(0, 600)}, Blocks: []view.Span{span(0, 300)}, Scans: []view.Span{span(0, 30)}}
	es := parse(t, Sky(p, monday, monday.AddDate(0, 0, 7)))
	for class, want := range map[string]int{"limit": 2, "sun": 1, "up": 1, "block": 1, "scan-mark": 1, "curve": 1} {
		if got := len(of(es, class)); got != want {
			t.Errorf("%d of %s, want %d", got, class, want)
		}
	}
	p.MaxDeg = 90
	if got := len(of(parse(t, Sky(p, monday, monday.AddDate(0, 0, 7))), "limit")); got != 1 {
		t.Errorf("%d limits without an upper one, want 1", got)
	}
	card := view.ScanCard{Scan: view.Scan{Source: "S", Span: span(60, 120)}, Track: pts[:7], BlockSpan: span(0, 360), LSTStartH: 1, Zone: acdt}
	if got := len(of(parse(t, Track(card)), "here")); got != 1 {
		t.Errorf("the scan is marked %d times", got)
	}
	card.BlockSpan = view.Span{}
	parse(t, Track(card))
	parse(t, Track(view.ScanCard{}))
}

func TestHorizonWrapsThroughNorth(t *testing.T) {
	v := view.Telescope{Name: "Aldermoor", ElevationMinDeg: 5, ElevationMaxDeg: 88, Horizon: []view.HorizonPoint{{AzDeg: 90, ElDeg: 10}, {AzDeg: 270, ElDeg: 30}}}
	ground := of(parse(t, Horizon(v)), "ground")
	if len(ground) != 1 {
		t.Fatal("no ground")
	}
	// North lies half-way between the two corners: 20 degrees, at both ends.
	y := elScale(12, 180)
	for _, x := range []string{"40", "700"} {
		if want := "L" + x + " " + num(y(20)); !strings.Contains(ground[0].attr["d"], want) {
			t.Errorf("outline %s has no %s", ground[0].attr["d"], want)
		}
	}
	v.Horizon = nil
	if len(of(parse(t, Horizon(v)), "ground")) != 0 {
		t.Error("ground without a mask")
	}
}
