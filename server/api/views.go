package api

import (
	"time"

	"cadencewright/scheduler"
	"cadencewright/server/store"
)

// Scan is a scan of a plan as the API shows it.
type Scan struct {
	ID         int64     `json:"id" example:"1042"`
	Plan       int64     `json:"plan" example:"17"`
	Revision   int       `json:"plan_revision" doc:"of the week's issued plan; 0 for a draft" example:"2"`
	Telescope  string    `json:"telescope" example:"BRM"`
	Block      string    `json:"block" example:"B003"`
	Source     string    `json:"source" example:"SIM J0412+1833"`
	Receiver   string    `json:"receiver" example:"L1"`
	Start      time.Time `json:"start" doc:"UTC, inclusive"`
	End        time.Time `json:"end" doc:"UTC, exclusive"`
	Minutes    int       `json:"minutes" example:"30"`
	MotorAzDeg *float64  `json:"motor_az_deg,omitempty" doc:"azimuth of the drive at the start, whole turns included; alt-azimuth mounts"`
	Pinned     bool      `json:"pinned"`
	TOAUs      float64   `json:"toa_us" doc:"predicted TOA uncertainty in microseconds; 0: not detectable" example:"0.84"`
	Earns      []Earning `json:"earns" nullable:"false"`
	State      string    `json:"state" enum:"planned,observing,done,partial,lost,dropped"`
	Live       bool      `json:"live" doc:"part of the plan that is issued now"`
	Version    int64     `json:"version"`
	Outcome    *Outcome  `json:"outcome,omitempty"`
}

// Earning is what a scan is for.
type Earning struct {
	Goal  string  `json:"goal"`
	Unit  string  `json:"unit"`
	Value float64 `json:"value"`
}

// Outcome is what was last reported of a scan.
type Outcome struct {
	State      string     `json:"state"`
	Cause      string     `json:"cause,omitempty"`
	StartedAt  *time.Time `json:"started_at,omitempty"`
	EndedAt    *time.Time `json:"ended_at,omitempty"`
	SNR        *float64   `json:"snr,omitempty"`
	TOAUs      *float64   `json:"toa_us,omitempty"`
	Note       string     `json:"note,omitempty"`
	ReportedBy string     `json:"reported_by"`
	ReportedAt time.Time  `json:"reported_at"`
}

func scanView(x *store.StoredScan) Scan {
	s := Scan{ID: x.ID, Plan: x.PlanID, Revision: x.Revision, Telescope: x.Telescope, Block: x.Block, Source: x.Source, Receiver: x.Receiver,
		Start: x.Start.UTC(), End: x.End().UTC(), Minutes: x.Minutes, MotorAzDeg: x.MotorAzDeg, Pinned: x.Pinned, TOAUs: x.TOAUs,
		Earns: []Earning{}, State: x.State, Live: x.Live, Version: x.Version}
	for _, e := range x.Earns {
		s.Earns = append(s.Earns, Earning(e))
	}
	if o := x.Outcome; o != nil {
		v := Outcome(*o)
		s.Outcome = &v
	}
	return s
}

func scanViews(list []store.StoredScan) []Scan {
	out := make([]Scan, 0, len(list))
	for i := range list {
		out = append(out, scanView(&list[i]))
	}
	return out
}

// Plan is what is known of a plan.
type Plan struct {
	ID               int64      `json:"id" example:"17"`
	Week             string     `json:"week" example:"2027-W03"`
	From             time.Time  `json:"from"`
	To               time.Time  `json:"to"`
	State            string     `json:"state" enum:"draft,issued,superseded"`
	Revision         int        `json:"revision" doc:"counts a week's issued plans from 1; 0 for a draft"`
	Version          int64      `json:"version" doc:"the ETag is made of it"`
	CampaignRevision int64      `json:"campaign_revision" doc:"of the campaign that it was made from"`
	Score            float64    `json:"score"`
	Possible         float64    `json:"possible" doc:"sum of the weights of all units"`
	Bound            float64    `json:"bound" doc:"no plan can score more"`
	MadeAt           time.Time  `json:"made_at"`
	MadeBy           string     `json:"made_by"`
	IssuedAt         *time.Time `json:"issued_at,omitempty"`
	IssuedBy         string     `json:"issued_by,omitempty"`
	SupersededAt     *time.Time `json:"superseded_at,omitempty"`
	SupersededBy     int        `json:"superseded_by_revision,omitempty"`
}

func planView(p *store.PlanInfo) Plan {
	return Plan{ID: p.ID, Week: scheduler.WeekName(p.From), From: p.From, To: p.To, State: p.State, Revision: p.Revision, Version: p.Version,
		CampaignRevision: p.CampaignRevision, Score: p.Score, Possible: p.Possible, Bound: p.Bound, MadeAt: p.MadeAt, MadeBy: p.MadeBy,
		IssuedAt: known(p.IssuedAt), IssuedBy: p.IssuedBy, SupersededAt: known(p.SupersededAt), SupersededBy: p.SupersededBy}
}

func known(t time.Time) *time.Time {
	if t.IsZero() {
		return nil
	}
	return &t
}

// Job is a planning job.
type Job struct {
	ID       int64     `json:"id" example:"5"`
	Week     string    `json:"week" example:"2027-W03"`
	State    string    `json:"state" enum:"queued,running,done,failed,cancelled"`
	Effort   int64     `json:"effort" doc:"spent so far"`
	EffortOf int64     `json:"effort_of" doc:"to be spent; 0: not known yet"`
	Score    float64   `json:"score" doc:"of the best plan so far"`
	Bound    *float64  `json:"bound,omitempty"`
	Plan     int64     `json:"plan,omitempty" doc:"the draft that came out"`
	Problem  string    `json:"problem,omitempty" doc:"why it failed"`
	AskedBy  string    `json:"asked_by"`
	AskedAt  time.Time `json:"asked_at"`
}

func jobView(j *store.PlanJob) Job {
	return Job{ID: j.ID, Week: scheduler.WeekName(j.From), State: j.State, Effort: j.Effort, EffortOf: j.EffortOf, Score: j.Score, Bound: j.Bound,
		Plan: j.PlanID, Problem: j.Problem, AskedBy: j.AskedBy, AskedAt: j.AskedAt}
}
