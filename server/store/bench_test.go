package store_test

import (
	"testing"
	"time"

	"cadencewright/server/store/storetest"
)

// BenchmarkLoadCampaign reads a campaign of six telescopes and 90 sources.
func BenchmarkLoadCampaign(b *testing.B) {
	s := storetest.Open(b, nil)
	id, err := s.ImportCampaign(b.Context(), campaign(b, "large-1"), "tester")
	if err != nil {
		b.Fatal(err)
	}
	for b.Loop() {
		c, _, err := s.LoadCampaign(b.Context(), id)
		if err != nil || len(c.Sources) != 90 {
			b.Fatalf("%d sources, %v", len(c.Sources), err)
		}
	}
}

func BenchmarkImportCampaign(b *testing.B) {
	s, c := storetest.Open(b, nil), campaign(b, "large-1")
	for i := 0; b.Loop(); i++ {
		c.Name = "large " + time.Duration(i).String()
		if _, err := s.ImportCampaign(b.Context(), c, "tester"); err != nil {
			b.Fatal(err)
		}
	}
}

// BenchmarkNowNext asks what control scripts ask all the time.
func BenchmarkNowNext(b *testing.B) {
	s, c, plans := planned(b, func() time.Time { return time.Date(2027, 2, 20, 0, 0, 0, 0, time.UTC) })
	if _, err := s.Issue(b.Context(), plans[0].ID, plans[0].Version, "ada"); err != nil {
		b.Fatal(err)
	}
	scans, err := s.LiveScans(b.Context(), "BRM", c.Start, c.End)
	if err != nil || len(scans) < 2 {
		b.Fatalf("%d scans, %v", len(scans), err)
	}
	at := scans[0].Start
	for b.Loop() {
		now, next, err := s.NowNext(b.Context(), "BRM", at)
		if err != nil || now == nil || next == nil {
			b.Fatalf("now %v, next %v, %v", now, next, err)
		}
	}
}

// BenchmarkPlan reads a whole plan.
func BenchmarkPlan(b *testing.B) {
	s, _, plans := planned(b, nil)
	for b.Loop() {
		if _, p, _, err := s.Plan(b.Context(), plans[0].ID); err != nil || len(p.Scans) == 0 {
			b.Fatal(err)
		}
	}
}
