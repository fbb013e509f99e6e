package api

import (
	"context"
	"net/http"
	"time"

	"cadencewright/scheduler"
	"cadencewright/scheduler/units"
)

// Source is a pulsar as the API shows it.
type Source struct {
	Name     string      `json:"name" example:"SIM J0412+1833"`
	RADeg    float64     `json:"ra_deg" doc:"ICRS at the position's epoch" example:"63.1"`
	DecDeg   float64     `json:"dec_deg" example:"18.56"`
	PeriodS  float64     `json:"period_s" doc:"of the pulse" example:"0.0045"`
	DMPcCm3  float64     `json:"dm_pc_cm3" doc:"dispersion measure" example:"22.4"`
	OrbitD   float64     `json:"orbit_d,omitempty" doc:"orbital period in days; left out: not a binary" example:"12.3"`
	LastScan *time.Time  `json:"last_scan,omitempty" doc:"start of the last scan that counted; left out: never"`
	DueNow   bool        `json:"due_now" doc:"one of its goals is due"`
	Goals    []GoalState `json:"goals" nullable:"false"`
}

// GoalState is a goal of a source and where it stands.
type GoalState struct {
	ID       string     `json:"id" example:"c17"`
	Kind     string     `json:"kind" enum:"cadence,phase,overlap,pair"`
	Bands    []string   `json:"bands" nullable:"false" example:"[\"L\"]"`
	Priority float64    `json:"priority" example:"1"`
	EveryD   float64    `json:"every_d,omitempty" doc:"wanted interval in days; left out for windows of orbital phase" example:"7"`
	Due      *time.Time `json:"due,omitempty" doc:"when it is, or was, due; left out: not within the next seven days"`
	DueNow   bool       `json:"due_now" doc:"its instant has come, or a passage through its window of orbital phase that still counts is going on"`
}

func (a *API) sources() {
	register(a, operation("campaign", http.MethodGet, "/sources", "list-sources", "The campaign's sources",
		"All pulsars of the live campaign with their goals and when those are due, given the history and the outcomes reported so far.", 404, 422),
		exampleList(exampleSource), a.listSources)
	register(a, operation("campaign", http.MethodGet, "/sources/{name}", "get-source", "One source", "A pulsar of the live campaign with its goals.", 404), exampleSource, a.getSource)
}

type sourcesInput struct {
	PageInput
	Due bool `query:"due" doc:"only sources with a goal that is due now"`
}

func (a *API) listSources(ctx context.Context, in *sourcesInput) (*listOutput[Source], error) {
	all, err := a.standing(ctx)
	if err != nil {
		return nil, err
	}
	if in.Due {
		due := all[:0]
		for _, s := range all {
			if s.DueNow {
				due = append(due, s)
			}
		}
		all = due
	}
	page, err := pageOf(all, in.PageInput, func(s *Source) string { return s.Name }, nil)
	return &listOutput[Source]{page}, err
}

type nameInput struct {
	Name string `path:"name" maxLength:"200" example:"SIM J0412+1833" doc:"a source's name"`
}

type sourceOutput struct{ Body Source }

func (a *API) getSource(ctx context.Context, in *nameInput) (*sourceOutput, error) {
	all, err := a.standing(ctx)
	if err != nil {
		return nil, err
	}
	for _, s := range all {
		if s.Name == in.Name {
			return &sourceOutput{s}, nil
		}
	}
	return nil, scheduler.Errorf(scheduler.ErrNotFound, "there is no source %.100q in the live campaign", in.Name)
}

// ahead is how far due instants are looked for.
const ahead = 7 * 24 * time.Hour

// standing is every source of the live campaign and where its goals stand now.
func (a *API) standing(ctx context.Context) ([]Source, error) {
	c, _, err := a.live(ctx)
	if err != nil {
		return nil, err
	}
	now := a.clock().UTC().Truncate(time.Millisecond)
	set, err := units.Build(c, scheduler.Horizon{From: now, To: now.Add(ahead)})
	if err != nil {
		return nil, err
	}
	out := make([]Source, len(c.Sources))
	for i := range c.Sources {
		s := &c.Sources[i]
		out[i] = Source{Name: s.Name, RADeg: s.RADeg, DecDeg: s.DecDeg, PeriodS: s.PeriodS, DMPcCm3: s.DMPcCm3, Goals: []GoalState{}}
		if s.Binary != nil {
			out[i].OrbitD = s.Binary.PbD
		}
	}
	index := scheduler.NewIndex(c)
	for i := range set.Goals {
		g := &set.Goals[i]
		v := GoalState{ID: g.ID, Kind: string(g.Kind), Bands: index.Goal(g.ID).Bands, Priority: g.Priority, EveryD: g.EveryMin / (24 * 60)}
		v.Due = due(set, g)
		v.DueNow = v.Due != nil && !v.Due.After(now)
		s := &out[g.Source]
		s.DueNow = s.DueNow || v.DueNow
		s.Goals = append(s.Goals, v)
	}
	lastScans(c, out)
	return out, nil
}

// due is the earliest instant at which a goal is due; nil: not in the horizon.
func due(set *units.Set, g *units.Goal) *time.Time {
	var first *time.Time
	earlier := func(minutes float64) {
		if t := units.Instant(minutes); first == nil || t.Before(*first) {
			first = &t
		}
	}
	for _, i := range g.Units {
		u := &set.Units[i]
		if g.Kind != scheduler.KindPhase {
			earlier(u.Due)
			continue
		}
		for _, p := range u.Passages {
			earlier(p.Enter)
		}
	}
	return first
}

// lastScans fills in when each source was last observed.
func lastScans(c *scheduler.Campaign, out []Source) {
	at := map[string]int{}
	for i := range out {
		at[out[i].Name] = i
	}
	for i := range c.History {
		h := &c.History[i]
		j, ok := at[h.Source]
		if !h.Counted || !ok {
			continue
		}
		if out[j].LastScan == nil || h.Start.After(*out[j].LastScan) {
			out[j].LastScan = &h.Start
		}
	}
}
