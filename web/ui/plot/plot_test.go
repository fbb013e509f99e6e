package plot

import (
	"encoding/xml"
	"io"
	"math"
	"strconv"
	"strings"
	"testing"
	"time"

	"pgregory.net/rapid"

	"cadencewright/web/view"
)

var (
	monday = time.Date(2027, time.January, 18, 0, 0, 0, 0, time.UTC)
	acdt   = time.FixedZone("ACDT", 10*3600+1800)
)

func span(fromMin, toMin int) view.Span {
	return view.Span{Start: monday.Add(time.Duration(fromMin) * time.Minute), End: monday.Add(time.Duration(toMin) * time.Minute)}
}

// element is a part of a drawing.
type element struct {
	name string
	attr map[string]string
	text string
}

// parse reads a drawing; it must be well-formed, and free of what the policy of
// the pages forbids.
func parse(t interface{ Fatalf(string, ...any) }, svg string) []element {
	var out []element
	d := xml.NewDecoder(strings.NewReader(svg))
	d.Entity = xml.HTMLEntity
	for {
		tok, err := d.Token()
		if err == io.EOF {
			return out
		}
		if err != nil {
			t.Fatalf("not well-formed: %v\n%s", err, svg)
			return nil
		}
		switch tok := tok.(type) {
		case xml.StartElement:
			e := element{name: tok.Name.Local, attr: map[string]string{}}
			for _, a := range tok.Attr {
				e.attr[a.Name.Local] = a.Value
				if a.Name.Local == "style" || strings.HasPrefix(a.Name.Local, "on") {
					t.Fatalf("attribute %s of %s is against the policy", a.Name.Local, e.name)
				}
			}
			out = append(out, e)
		case xml.CharData:
			if len(out) > 0 {
				out[len(out)-1].text += string(tok)
			}
		}
	}
}

// of is the elements of a class.
func of(es []element, class string) []element {
	var out []element
	for _, e := range es {
		for c := range strings.FieldsSeq(e.attr["class"]) {
			if c == class {
				out = append(out, e)
				break
			}
		}
	}
	return out
}

func number(t *testing.T, e element, name string) float64 {
	t.Helper()
	v, err := strconv.ParseFloat(e.attr[name], 64)
	if err != nil {
		t.Fatalf("%s of %s: %v", name, e.name, err)
	}
	return v
}

// block is six hours at a site ten and a half hours ahead.
func block() view.BlockRow {
	return view.BlockRow{
		ID: "B1", Telescope: "TARN", Name: "Tarn Flat", Zone: acdt, Receivers: []string{"L"}, Span: span(0, 360), LSTStartH: 23.5,
		Lost:  []view.Span{span(300, 330)},
		Night: []view.Span{span(-60, 120)},
		Scans: []view.Scan{
			{ID: 7, Source: "SIM J0412+1833", Receiver: "L", Span: span(30, 120), State: "done"},
			{ID: 8, Source: "SIM J0029-0554", Receiver: "L", Span: span(120, 130), State: "lost"},
			{ID: 9, Source: `<&"> J1`, Receiver: "L", Span: span(200, 260), State: "planned", Pinned: true},
		},
	}
}

func TestBlockRowBarsStandAtTheirTimes(t *testing.T) {
	es := parse(t, BlockRow(block(), "2027-W03", ""))
	bars := of(es, "bar")
	if len(bars) != 3 {
		t.Fatalf("%d bars, want 3", len(bars))
	}
	perMin := (rowX1 - rowX0) / 360.0
	for i, c := range []struct{ from, to float64 }{{30, 120}, {120, 130}, {200, 260}} {
		if x := number(t, bars[i], "x"); math.Abs(x-(rowX0+c.from*perMin)) > 0.1 {
			t.Errorf("bar %d begins at %v, want %v", i, x, rowX0+c.from*perMin)
		}
		if w := number(t, bars[i], "width"); math.Abs(w-((c.to-c.from)*perMin-1)) > 0.1 {
			t.Errorf("bar %d is %v wide, want %v", i, w, (c.to-c.from)*perMin-1)
		}
	}
	links := of(es, "scan")
	if got := links[0].attr["href"]; got != "/weeks/2027-W03/scans/7" {
		t.Errorf("the first bar leads to %q", got)
	}
	if night := of(es, "night"); len(night) != 1 || number(t, night[0], "x") != rowX0 {
		t.Errorf("night that began before the block: %v", night)
	}
}

func TestBlockRowScales(t *testing.T) {
	es := parse(t, BlockRow(block(), "2027-W03", ""))
	var utc, local, lst []string
	for _, e := range of(es, "tick") {
		switch {
		case strings.Contains(e.attr["class"], "local"):
			local = append(local, e.text)
		case strings.Contains(e.attr["class"], "lst"):
			lst = append(lst, e.text)
		default:
			utc = append(utc, e.text)
		}
	}
	check := func(name string, got []string, want string) {
		t.Helper()
		if s := strings.Join(got, " "); s != want {
			t.Errorf("%s: %q, want %q", name, s, want)
		}
	}
	check("UTC", utc, "00:00 01:00 02:00 03:00 04:00 05:00 06:00")
	check("local", local, "10:30 11:30 12:30 13:30 14:30 15:30 16:30")
	check("LST", lst, "00:00 01:00 02:00 03:00 04:00 05:00")
}

func TestBlockRowStatesAreMoreThanColour(t *testing.T) {
	es := parse(t, BlockRow(block(), "2027-W03", ""))
	var marks []string
	for _, e := range of(es, "state") {
		marks = append(marks, e.text)
	}
	if got := strings.Join(marks, " "); got != "✓ ✕ ◆" {
		t.Errorf("signs %q, want done, lost and pinned", got)
	}
	hatched := 0
	for _, e := range of(es, "pattern") {
		if e.attr["fill"] == "url(#hatch)" {
			hatched++
		}
	}
	if hatched != 2 {
		t.Errorf("%d hatched parts, want the lost time and the lost scan", hatched)
	}
}

// An extra scan is named so in words and has a sign; a pin and what became of
// it come before that.
func TestExtraScans(t *testing.T) {
	for _, c := range []struct {
		scan       view.Scan
		mark, word string
	}{
		{view.Scan{State: "planned"}, "", "planned"},
		{view.Scan{State: "planned", Extra: true}, "+", "planned, extra"},
		{view.Scan{State: "planned", Extra: true, Pinned: true}, "◆", "planned, pinned, extra"},
		{view.Scan{State: "done", Extra: true}, "✓", "done, extra"},
	} {
		if mark, word := Mark(c.scan), stateWord(c.scan); mark != c.mark || word != c.word {
			t.Errorf("%+v: %q, %q, want %q, %q", c.scan, mark, word, c.mark, c.word)
		}
		b := block()
		c.scan.ID, c.scan.Source, c.scan.Receiver, c.scan.Span = 5, "SIM J0412+1833", "L", span(30, 120)
		b.Scans = []view.Scan{c.scan}
		if svg := BlockRow(b, "2027-W03", ""); !strings.Contains(svg, c.word) {
			t.Errorf("the picture does not say %q", c.word)
		}
	}
}

func TestBlockRowFree(t *testing.T) {
	want := []view.Span{span(0, 30), span(130, 200), span(260, 300), span(330, 360)}
	got := Free(block())
	if len(got) != len(want) {
		t.Fatalf("free %v, want %v", got, want)
	}
	for i := range want {
		if got[i] != want[i] {
			t.Errorf("free part %d: %v, want %v", i, got[i], want[i])
		}
	}
}

func TestBlockRowCurve(t *testing.T) {
	b := block()
	if c := of(parse(t, BlockRow(b, "w", "")), "curve"); len(c) != 0 {
		t.Error("a curve although no source is chosen")
	}
	b.LimitDeg, b.Allowed = 12, []view.Span{span(60, 180)}
	for m := 0; m <= 360; m += 10 {
		b.Curve = append(b.Curve, view.Point{At: span(m, m).Start, ElDeg: 45 - math.Abs(float64(m-120))/2})
	}
	es := parse(t, BlockRow(b, "w", "SIM J0412+1833"))
	curve := of(es, "curve")
	if len(curve) != 1 || !strings.HasPrefix(curve[0].attr["d"], "M") || strings.Contains(curve[0].attr["d"], "NaN") {
		t.Fatalf("curve %v", curve)
	}
	// It is up from minute 30 to 210: 19 points, 18 strokes.
	if n := strings.Count(curve[0].attr["d"], "L"); n != 18 {
		t.Errorf("%d strokes, want the 18 of elevations from 0 up", n)
	}
	if label := of(es, "curve-label"); len(label) != 1 || label[0].text != "0412+1833 45°" {
		t.Errorf("label %v", label)
	}
	if a := of(es, "allowed"); len(a) != 1 {
		t.Errorf("%d allowed parts, want 1", len(a))
	}
}

// TestFreeAndTakenFillTheBlock draws scans and losses, overlapping or outside,
// and expects the free parts to be the rest: in order, apart, and untouched.
func TestFreeAndTakenFillTheBlock(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		b := view.BlockRow{Span: span(0, 300)}
		taken := make([]bool, 300)
		for i := range rapid.IntRange(0, 8).Draw(t, "n") {
			from := rapid.IntRange(0, 299).Draw(t, "from")
			to := min(from+rapid.IntRange(1, 90).Draw(t, "length"), 300)
			for m := from; m < to; m++ {
				taken[m] = true
			}
			if i%2 == 0 {
				b.Lost = append(b.Lost, span(from, to))
			} else {
				b.Scans = append(b.Scans, view.Scan{Span: span(from, to)})
			}
		}
		free := make([]bool, 300)
		for _, s := range Free(b) {
			for m := int(s.Start.Sub(monday).Minutes()); m < int(s.End.Sub(monday).Minutes()); m++ {
				if free[m] {
					t.Fatalf("minute %d is free twice", m)
				}
				free[m] = true
			}
		}
		for m := range free {
			if free[m] == taken[m] {
				t.Fatalf("minute %d: free %v, taken %v", m, free[m], taken[m])
			}
		}
		parse(t, BlockRow(b, "2027-W03", ""))
	})
}

func TestTicks(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		from := monday.Add(time.Duration(rapid.IntRange(0, 10_000).Draw(t, "from")) * time.Minute)
		length := rapid.IntRange(20, 8*24*60).Draw(t, "minutes")
		a := axis{from, from.Add(time.Duration(length) * time.Minute), 0, 900}
		ticks := a.ticks(9)
		if len(ticks) > 10 {
			t.Fatalf("%d ticks in %d min", len(ticks), length)
		}
		for i, tick := range ticks {
			if x := a.x(tick); x < 0 || x > 900 {
				t.Fatalf("tick %v stands at %v, off the axis", tick, x)
			}
			if i > 0 && !tick.After(ticks[i-1]) {
				t.Fatalf("ticks %v out of order", ticks)
			}
		}
		for _, l := range a.lstTicks(rapid.Float64Range(0, 24).Draw(t, "lst"), 9) {
			if l.x < -0.01 || l.x > 900.01 {
				t.Fatalf("sidereal tick %v off the axis", l)
			}
		}
	})
}

// Where no sidereal time is known, there are no ticks of it.
func TestNoSiderealTime(t *testing.T) {
	a := axis{monday, monday.Add(6 * time.Hour), 0, 900}
	for _, h := range []float64{math.NaN(), math.Inf(1), math.Inf(-1)} {
		if got := a.lstTicks(h, 9); len(got) != 0 {
			t.Errorf("LST %v: %d ticks", h, len(got))
		}
	}
}

func TestFit(t *testing.T) {
	for _, c := range []struct {
		w    float64
		want string
	}{{200, "SIM J0412+1833"}, {70, "0412+1833"}, {30, "0412"}, {10, ""}} {
		if got := fit("SIM J0412+1833", c.w); got != c.want {
			t.Errorf("in %v: %q, want %q", c.w, got, c.want)
		}
	}
	// Names are cut between characters, never within one.
	if got := fit("µø≠ñ≈ç", 30); got != "µø≠ñ" {
		t.Errorf("cut to %q", got)
	}
}
