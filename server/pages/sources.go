package pages

import (
	"io"
	"net/http"
	"slices"
	"time"

	"cadencewright/scheduler"
	"cadencewright/scheduler/units"
	"cadencewright/server/store"
	"cadencewright/web/page"
	"cadencewright/web/view"
)

// Sources is the list of sources.
func (p *Pages) Sources(w http.ResponseWriter, r *http.Request) error {
	c, ref, f, err := p.live(r)
	if err != nil {
		return err
	}
	now := p.clock().UTC()
	st, err := p.standingNow(r, c, ref, now)
	if err != nil {
		return err
	}
	v := view.Sources{Page: f, Query: r.URL.Query().Get("q"), Total: len(c.Sources)}
	for i := range c.Sources {
		s := &c.Sources[i]
		if v.Query != "" && !holds(s.Name, v.Query) {
			continue
		}
		row := view.SourceRow{Name: s.Name, PeriodMs: s.PeriodS * 1e3, DMPcCm3: s.DMPcCm3, Goals: st.goals[i], State: st.state(i), NextDue: st.due[i]}
		if s.Binary != nil {
			row.PbD = s.Binary.PbD
		}
		if h := st.last[i]; h != nil {
			row.Last, row.LastAt = h.Start, h.Telescope+" "+h.Receiver
		}
		v.Rows = append(v.Rows, row)
	}
	return write(w, http.StatusOK, func(b io.Writer) error { return page.Sources(b, v) })
}

// standings is how every source stands at an instant.
type standings struct {
	last    []*scheduler.HistoryScan
	due     []time.Time
	late    []bool
	goals   []int
	planned []bool
	soon    time.Time
	set     *units.Set // what can be earned in the next four weeks
}

// standingNow works out what is due from now on, and what this week's plan
// serves.
func (p *Pages) standingNow(r *http.Request, c *scheduler.Campaign, ref store.CampaignRef, now time.Time) (*standings, error) {
	n := len(c.Sources)
	st := &standings{last: make([]*scheduler.HistoryScan, n), due: make([]time.Time, n), late: make([]bool, n), goals: make([]int, n),
		planned: make([]bool, n), soon: scheduler.WeekStart(now).AddDate(0, 0, 7)}
	index := map[string]int{}
	for i := range c.Sources {
		index[c.Sources[i].Name] = i
	}
	for i := range c.History {
		h := &c.History[i]
		if j := index[h.Source]; h.Counted && (st.last[j] == nil || h.Start.After(st.last[j].Start)) {
			st.last[j] = h
		}
	}
	set, err := units.Build(c, scheduler.Horizon{From: now, To: now.AddDate(0, 0, 28)})
	if err != nil {
		return nil, err
	}
	st.set = set
	for i := range set.Goals {
		st.count(&set.Goals[i], now)
	}
	live, err := p.store.LiveScans(r.Context(), "", now, st.soon)
	if err != nil {
		return nil, err
	}
	for i := range live {
		if j, ok := index[live[i].Source]; ok && live[i].State == store.ScanPlanned && len(live[i].Earns) > 0 {
			st.planned[j] = true
		}
	}
	return st, nil
}

// count takes a goal into how its source stands: what is due first counts.
func (st *standings) count(g *units.Goal, now time.Time) {
	i := g.Source
	st.goals[i]++
	if g.Kind == scheduler.KindPhase { // due whenever its windows are passed
		return
	}
	due := dueAt(g, now)
	if st.due[i].IsZero() || due.Before(st.due[i]) {
		st.due[i] = due
	}
	if !g.Had || due.Before(now) {
		st.late[i] = true
	}
}

// state is how a source stands.
func (st *standings) state(i int) view.SourceState {
	switch {
	case st.goals[i] == 0:
		return view.SourceIdle
	case st.planned[i]:
		return view.SourcePlanned
	case st.late[i]:
		return view.SourceLate
	case !st.due[i].IsZero() && st.due[i].Before(st.soon):
		return view.SourceDue
	}
	return view.SourceFine
}

// cadence is the strip of a source's scans by band.
func cadence(c *scheduler.Campaign, src *scheduler.Source, live []store.StoredScan, now time.Time) view.Cadence {
	v := view.Cadence{From: scheduler.WeekStart(now).AddDate(0, 0, -70), To: scheduler.WeekStart(now).AddDate(0, 0, 28), Now: now}
	every := map[string]float64{}
	note := func(bands []string, d float64) {
		for _, b := range bands {
			if every[b] == 0 || d < every[b] {
				every[b] = d
			}
		}
	}
	for _, t := range c.CadenceTargets {
		if t.Source == src.Name {
			note(t.Bands, t.EveryD)
		}
	}
	marks := map[string][]view.CadenceMark{}
	add := func(tel, rx string, at time.Time, kind view.CadenceKind) {
		t := c.TelescopeByCode(tel)
		if t == nil || at.Before(v.From) || !at.Before(v.To) {
			return
		}
		if r := t.ReceiverByCode(rx); r != nil {
			for _, b := range r.Bands {
				marks[b] = append(marks[b], view.CadenceMark{At: at, Telescope: tel, Kind: kind})
			}
		}
	}
	for i := range c.History {
		if h := &c.History[i]; h.Source == src.Name {
			kind := view.ScanFailed
			if h.Counted {
				kind = view.ScanCounted
			}
			add(h.Telescope, h.Receiver, h.Start, kind)
		}
	}
	for i := range live {
		if x := &live[i]; x.Source == src.Name {
			switch x.State {
			case store.ScanPlanned, store.ScanObserving:
				add(x.Telescope, x.Receiver, x.Start, view.ScanPlanned)
			case store.ScanLost:
				add(x.Telescope, x.Receiver, x.Start, view.ScanFailed)
			}
		}
	}
	var bands []string
	for b := range every {
		bands = append(bands, b)
	}
	for b := range marks {
		if !slices.Contains(bands, b) {
			bands = append(bands, b)
		}
	}
	slices.Sort(bands)
	for _, b := range bands {
		slices.SortFunc(marks[b], func(x, y view.CadenceMark) int { return x.At.Compare(y.At) })
		v.Bands = append(v.Bands, view.CadenceBand{Band: b, EveryD: every[b], Marks: marks[b]})
	}
	return v
}
