package api

import (
	"encoding/json"
	"time"

	"cadencewright/server/runsheet"
)

// The examples of the description. They are values of the types that are
// answered, so that a field cannot be forgotten or misspelt; a test checks them
// against the schemas.

var exampleStart = time.Date(2027, 1, 18, 21, 30, 0, 0, time.UTC)

func exampleList[T any](item T) list[T] { return list[T]{Items: []T{item}} }

func pointerTo[T any](v T) *T { return &v }

var exampleTelescope = Telescope{Code: "BRM", Name: "Bramstead", LongitudeDeg: -2.31, LatitudeDeg: 53.2, HeightM: 80, Timezone: "Europe/London", Mount: "altaz",
	ElevationMinDeg: 15, ElevationMaxDeg: 85, SunMinDeg: 10, SetupS: 300, CalS: 60, Receivers: []Receiver{{"L1", []string{"L"}, 1400, 400}}}

var exampleSource = Source{Name: "SIM J0412+1833", RADeg: 63.1, DecDeg: 18.56, PeriodS: 0.0045, DMPcCm3: 22.4, OrbitD: 12.3,
	LastScan: pointerTo(exampleStart.AddDate(0, 0, -9)), DueNow: true,
	Goals: []GoalState{{ID: "c17", Kind: "cadence", Bands: []string{"L"}, Priority: 1, EveryD: 7, Due: pointerTo(exampleStart.AddDate(0, 0, -2)), DueNow: true}}}

var exampleScan = Scan{ID: 1042, Plan: 17, Revision: 2, Telescope: "BRM", Block: "B003", Source: "SIM J0412+1833", Receiver: "L1", Start: exampleStart,
	End: exampleStart.Add(30 * time.Minute), Minutes: 30, MotorAzDeg: pointerTo(121.7), TOAUs: 0.84, Earns: []Earning{{"c17", "c17#1", 1.23}},
	State: "done", Live: true, Version: 3, Outcome: &Outcome{State: "done", SNR: pointerTo(412.0), TOAUs: pointerTo(0.91), ReportedBy: "key BRM control",
		ReportedAt: exampleStart.Add(31 * time.Minute)}}

var exampleNow = func() NowAnswer {
	now := exampleScan
	now.State, now.Outcome, now.Version = "observing", nil, 2
	return NowAnswer{Telescope: "BRM", ServerTime: exampleStart.Add(5 * time.Minute), PlanRevision: 2, Now: &now}
}()

var exampleReport = Report{State: "done", StartedAt: pointerTo(exampleStart.Add(20 * time.Second)), SNR: pointerTo(412.0), TOAUs: pointerTo(0.91),
	Note: "light rain towards the end"}

var examplePlan = Plan{ID: 17, Week: "2027-W03", From: time.Date(2027, 1, 18, 0, 0, 0, 0, time.UTC), To: time.Date(2027, 1, 25, 0, 0, 0, 0, time.UTC),
	State: "issued", Revision: 2, Version: 2, CampaignRevision: 12, Score: 41.7, Possible: 55.2, Bound: 42.3, MadeAt: exampleStart.AddDate(0, 0, -4), MadeBy: "Ada",
	IssuedAt: pointerTo(exampleStart.AddDate(0, 0, -3)), IssuedBy: "Ada"}

var exampleJob = Job{ID: 5, Week: "2027-W03", State: "running", Effort: 120000, EffortOf: 6000000, Score: 39.2, Bound: pointerTo(43.8), AskedBy: "Ada",
	AskedAt: exampleStart.AddDate(0, 0, -4)}

var exampleWeek = Week{Week: "2027-W03", From: examplePlan.From, To: examplePlan.To, Issued: &examplePlan, Job: &exampleJob}

var exampleCampaign = Campaign{ID: 1, Name: "Example array, spring", Start: examplePlan.From, End: examplePlan.From.AddDate(0, 3, 0), Live: true, Revision: 12}

var exampleEntry = Entry{ID: 311, At: exampleStart.Add(31 * time.Minute), Actor: "key BRM control", Action: "report", Subject: "scan 1042 of SIM J0412+1833 on BRM",
	Before: json.RawMessage(`{"state":"observing"}`), After: json.RawMessage(`{"state":"done"}`)}

var exampleSheet = runsheet.Sheet{Campaign: exampleCampaign.Name, Night: "2027-01-18", From: exampleStart.Add(-9*time.Hour - 30*time.Minute),
	To: exampleStart.Add(14*time.Hour + 30*time.Minute), PlanRevision: 2, IssuedAt: *examplePlan.IssuedAt, IssuedBy: "Ada",
	Telescope: runsheet.Telescope{Code: "BRM", Name: "Bramstead", LongitudeDeg: -2.31, LatitudeDeg: 53.2, HeightM: 80, Timezone: "Europe/London", Mount: "altaz",
		ElevationMinDeg: 15, ElevationMaxDeg: 85, SunMinDeg: 10},
	Cautions: []string{"This sheet commands nothing: the operator on duty comes first."}, Reminders: []string{"Note what was lost, and why."},
	Blocks: []runsheet.Block{{ID: "B003", Start: exampleStart.Add(-30 * time.Minute), End: exampleStart.Add(4 * time.Hour), Receivers: []string{"L1"},
		Scans: []runsheet.Scan{{Number: 1, ID: "1042", State: "planned", Start: exampleStart, End: exampleScan.End, Minutes: 30, LSTStartH: 5.21,
			Source: "SIM J0412+1833", RAJ2000: "04:12:24.00", DecJ2000: "+18:33:36.0", Receiver: "L1", FreqMHz: 1400, BandwidthMHz: 400, CalS: 60,
			First: runsheet.Pointing{AzDeg: 121.7, ElDeg: 38.4, HAH: -2.1, MotorAzDeg: pointerTo(121.7)}, Last: runsheet.Pointing{AzDeg: 129.8, ElDeg: 43.2, HAH: -1.6, MotorAzDeg: pointerTo(129.8)},
			LowestElDeg: 38.4, LeastSunDeg: 112, SlewS: 45, SNR: 380, TOAUs: 0.84, For: []string{"c17"}}}}}}
