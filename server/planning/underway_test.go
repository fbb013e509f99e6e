package planning

import (
	"context"
	"errors"
	"testing"
	"time"

	"cadencewright/scheduler"
	"cadencewright/server/store"
)

// at runs the fake's job at some time, with an issued plan if there is one.
func (f *fake) at(t *testing.T, now time.Time, effort int64) error {
	t.Helper()
	ctx, cancel := context.WithTimeout(t.Context(), time.Minute)
	defer cancel()
	return (&Planner{Store: f, Effort: effort, Workers: 2, Clock: func() time.Time { return now }}).Run(ctx, f.job.ID)
}

// midweek is when the fake's week is planned again.
func midweek(f *fake) time.Time { return f.job.From.Add(84 * time.Hour) }

// A week that has begun is planned from now on: with no plan issued, nothing is
// planned in the past.
func TestWeekThatHasBegun(t *testing.T) {
	f := newFake(t, "medium-2")
	f.campaign.Pins = nil
	if err := f.at(t, midweek(f), 40); err != nil {
		t.Fatal(err)
	}
	if len(f.saved.Scans) == 0 {
		t.Fatal("nothing is planned")
	}
	for _, s := range f.saved.Scans {
		if s.Start.Before(midweek(f).Add(lead)) {
			t.Errorf("%s is planned at %s, and it is %s", s.Source, s.Start, midweek(f))
		}
	}
}

// Of an issued plan, what has begun stays in the next one, also what is about
// to begin; what was lost does not, and most of what comes later is as it was.
func TestIssuedPlanUnderWay(t *testing.T) {
	f := newFake(t, "medium-2")
	f.campaign.Pins = nil
	if err := f.run(t, 400); err != nil {
		t.Fatal(err)
	}
	f.issued, f.saved, f.job.State = f.saved, nil, store.JobQueued
	f.plans = []store.PlanInfo{{ID: 9, State: store.PlanDraft}, {ID: 8, State: store.PlanIssued}}
	lost := -1
	for i, s := range f.issued.Scans {
		state := store.ScanPlanned
		switch {
		case s.End().After(midweek(f)):
		case lost < 0 && len(s.Earns) > 0:
			lost, state = i, store.ScanLost
		default:
			state = store.ScanDone
		}
		f.scans = append(f.scans, store.StoredScan{ID: int64(i + 1), Scan: s, State: state})
	}
	if lost < 0 {
		t.Fatal("no scan is over at midweek")
	}
	if err := f.at(t, midweek(f), 0); err != nil {
		t.Fatal(err)
	}
	begun, later, kept := 0, 0, 0
	for i, s := range f.issued.Scans {
		stays := holds(f.saved, s)
		switch {
		case i == lost:
			if stays {
				t.Errorf("%s at %s was lost and is planned still", s.Source, s.Start)
			}
		case s.Start.Before(midweek(f).Add(lead)):
			if begun++; !stays {
				t.Errorf("%s at %s had begun and is gone", s.Source, s.Start)
			}
		default:
			later++
			if stays {
				kept++
			}
		}
	}
	t.Logf("%d had begun, %d of %d later ones kept", begun, kept, later)
	if begun == 0 || later == 0 || 10*kept < 8*later {
		t.Errorf("%d had begun, %d of %d later ones kept", begun, kept, later)
	}
}

func holds(p *scheduler.Plan, s scheduler.Scan) bool {
	for _, o := range p.Scans {
		if o.Block == s.Block && o.Source == s.Source && o.Receiver == s.Receiver && o.Start.Equal(s.Start) && o.Minutes == s.Minutes {
			return true
		}
	}
	return false
}

// Where the plan under way cannot be read, the job fails and says why; a week
// to come and one that is over do not ask for it.
func TestPlanUnderWayAway(t *testing.T) {
	away := errors.New("the database is away")
	for name, c := range map[string]struct {
		hours float64
		fails string
	}{"its list": {84, "PlansOf"}, "its scans": {84, "Plan"}, "a week to come": {-24, ""}, "a week that is over": {24 * 7, ""}} {
		t.Run(name, func(t *testing.T) {
			f := newFake(t, "small-1")
			f.plans = []store.PlanInfo{{ID: 8, State: store.PlanIssued}}
			f.fails = map[string]error{"PlansOf": away}
			if c.fails == "Plan" {
				f.fails = map[string]error{"Plan": away}
			}
			err := f.at(t, f.job.From.Add(time.Duration(c.hours*float64(time.Hour))), 20)
			if (c.fails != "") != errors.Is(err, away) {
				t.Errorf("error %v", err)
			}
		})
	}
}
