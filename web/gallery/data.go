package gallery

import (
	"fmt"
	"math"
	"time"

	"cadencewright/web/view"
)

// site is an invented telescope, as far as pages need it.
type site struct {
	code, name string
	zone       *time.Location
	lon, lat   float64
	mount      string
	receivers  []string
	minEl      float64
}

// fixed zones rather than named ones: the gallery needs no zone files.
func zone(name string, hours float64) *time.Location {
	return time.FixedZone(name, int(hours*3600))
}

var sites = []site{
	{"ALD", "Aldermoor", zone("GMT", 0), -2.31, 53.18, "altaz", []string{"L", "S", "UWB"}, 8},
	{"KEST", "Kesterfontein", zone("SAST", 2), 21.4, -30.7, "altaz", []string{"L", "U"}, 15},
	{"TARN", "Tarn Flat", zone("ACDT", 10.5), 138.9, -32.2, "equatorial", []string{"L", "S"}, 12},
	{"VINT", "Vinterdal", zone("CET", 1), 19.2, 67.9, "altaz", []string{"P", "L"}, 5},
	{"MESA", "Mesa Corta", zone("MST", -7), -107.6, 34.0, "transit", []string{"P", "U"}, 30},
	{"HOLM", "Holmsund Array", zone("CET", 1), 20.3, 63.7, "altaz", []string{"L"}, 10},
	{"PAMP", "Pampa Honda", zone("-03", -3), -64.5, -31.6, "altaz", []string{"L", "S"}, 10},
	{"CAIR", "Cairnmount", zone("GMT", 0), -3.6, 57.1, "equatorial", []string{"P", "L"}, 8},
	{"ODER", "Odervale", zone("CET", 1), 14.2, 52.4, "altaz", []string{"S", "X"}, 8},
	{"SAND", "Sandveld North", zone("SAST", 2), 19.9, -29.8, "altaz", []string{"L", "S"}, 15},
}

var names = []string{
	"SIM J0412+1833", "SIM J0029-0554", "SIM J0613-3014", "SIM J1744+0721", "SIM J1909-2851", "SIM J2139-0728",
	"SIM J1022+3207", "SIM J0751+4412", "SIM J1640+2218", "SIM J1849+0937", "SIM J0437-6110", "SIM J1327+5406",
}

// elevation is a believable track: a cosine in time about a transit.
func elevation(t time.Time, n int, s site) float64 {
	dec := 18.5 - float64((n*29)%60)
	ha := math.Mod(t.Sub(monday).Hours()*1.00274+s.lon/15-float64(n*5%24), 24) * 15 * math.Pi / 180
	lat, d := s.lat*math.Pi/180, dec*math.Pi/180
	return math.Asin(math.Sin(lat)*math.Sin(d)+math.Cos(lat)*math.Cos(d)*math.Cos(ha)) * 180 / math.Pi
}

// track is a source's elevation from a site in equal steps.
func track(from, to time.Time, step time.Duration, n int, s site) []view.Point {
	var out []view.Point
	for t := from; !t.After(to); t = t.Add(step) {
		out = append(out, view.Point{At: t, ElDeg: elevation(t, n, s)})
	}
	return out
}

// above is where a track is over a limit.
func above(pts []view.Point, limit float64) []view.Span {
	var out []view.Span
	open := false
	for _, p := range pts {
		switch {
		case p.ElDeg >= limit && !open:
			out, open = append(out, view.Span{Start: p.At, End: p.At}), true
		case p.ElDeg >= limit:
			out[len(out)-1].End = p.At
		default:
			open = false
		}
	}
	return out
}

// nights are the dark parts of [from, to): from 17 to 7 hours local.
func nights(s site, from, to time.Time) []view.Span {
	var out []view.Span
	for d := -1; d <= 8; d++ {
		start := time.Date(2027, time.January, 18+d, 17, 0, 0, 0, s.zone).UTC()
		end := start.Add(14 * time.Hour)
		if end.After(from) && start.Before(to) {
			out = append(out, view.Span{Start: start, End: end})
		}
	}
	return out
}

// blockRow makes the i-th block with its scans, one after another with slews
// between, as many as fit or as asked.
func blockRow(i int, s site, start time.Time, hours float64, scans int, chosen string) view.BlockRow {
	end := start.Add(time.Duration(hours * float64(time.Hour)))
	b := view.BlockRow{
		ID: fmt.Sprintf("%s-%d", s.code, i), Telescope: s.code, Name: s.name, Zone: s.zone, Receivers: s.receivers,
		Span: view.Span{Start: start, End: end}, LSTStartH: math.Mod(7.8+start.Sub(monday).Hours()*1.00274+s.lon/15+48, 24),
		Night: nights(s, start, end), LimitDeg: s.minEl, NightDate: start.In(s.zone).Add(-12 * time.Hour).Format(time.DateOnly),
	}
	if i%6 == 4 {
		b.Label = "shared with VLBI"
		b.Lost = []view.Span{{Start: end.Add(-40 * time.Minute), End: end.Add(-10 * time.Minute)}}
	}
	if chosen != "" {
		b.Curve = track(start, end, 10*time.Minute, 0, s)
		b.Allowed = above(b.Curve, s.minEl)
	}
	room := hours*60 - 60
	each := room / float64(max(scans, 1))
	used := 0
	for k := range scans {
		at := start.Add(time.Duration(5+each*float64(k)) * time.Minute)
		length := int(each) - 4
		if k%3 == 1 {
			length = int(each * 0.6)
		}
		b.Scans = append(b.Scans, scan(i*20+k, s, at, max(length, 4)))
		used += max(length, 4)
	}
	b.FreeMin = int(hours*60) - used
	return b
}

func scan(n int, s site, at time.Time, minutes int) view.Scan {
	states := []string{"done", "done", "done", "partial", "done", "lost"}
	state := "planned"
	switch end := at.Add(time.Duration(minutes) * time.Minute); {
	case end.Before(now):
		state = states[n%len(states)]
	case at.Before(now):
		state = "observing"
	}
	rx := s.receivers[n%len(s.receivers)]
	v := view.Scan{
		ID: int64(1000 + n), Source: names[n%len(names)], Receiver: rx, Bands: []string{rx},
		Span: view.Span{Start: at, End: at.Add(time.Duration(minutes) * time.Minute)}, State: state,
		Pinned: n%11 == 7, Value: 0.4 + float64(n%7)*0.61, TOAUs: 0.12 + float64(n%9)*0.37,
	}
	if n%13 == 8 {
		v.Extra, v.Value = true, 0
	}
	return v
}

// stripOf is the strip of the blocks of a week.
func stripOf(blocks []view.BlockRow) []view.StripRow {
	var rows []view.StripRow
	at := map[string]int{}
	for _, b := range blocks {
		k, ok := at[b.Telescope]
		if !ok {
			k = len(rows)
			at[b.Telescope] = k
			rows = append(rows, view.StripRow{Code: b.Telescope, Name: b.Name})
		}
		rows[k].Blocks = append(rows[k].Blocks, view.StripBlock{
			ID: b.ID, Span: b.Span, UsedMin: b.Minutes() - b.FreeMin, Lost: len(b.Lost) > 0,
		})
	}
	return rows
}
