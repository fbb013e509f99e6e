package edit

import (
	"testing"
	"time"
)

// benchScan is a scan in the middle of a plan.
func benchScan(s *Session) int { return len(s.plan.Scans) / 2 }

// Every kind of change, on a plan of six telescopes and ninety sources.
func BenchmarkTry(b *testing.B) {
	s := sessionOf(b, "large-1")
	i := benchScan(s)
	x := s.plan.Scans[i]
	longest := s.p.Campaign.SourceByName(x.Source).ScanMinutes
	for _, c := range []struct {
		name   string
		change Change
	}{
		{"add", Add(x.Block, x.Source, x.Receiver, x.Start.Add(37*time.Minute), x.Minutes)},
		{"move", Move(i, x.Start.Add(3*time.Minute))},
		{"resize", Resize(i, longest[len(longest)-1])},
		{"tune", Tune(i, x.Receiver)},
		{"drop", Drop(i)},
		{"pin", Pin(i)},
	} {
		b.Run(c.name, func(b *testing.B) {
			for b.Loop() {
				if _, err := s.Try(c.change); err != nil {
					b.Fatal(err)
				}
			}
		})
	}
}

// Making a session, once a plan.
func BenchmarkNew(b *testing.B) {
	p, plan := problemOf(b, "large-1"), planOf(b, "large-1")
	for b.Loop() {
		if _, err := New(p, plan); err != nil {
			b.Fatal(err)
		}
	}
}

// The changed plan in full.
func BenchmarkApply(b *testing.B) {
	s := sessionOf(b, "large-1")
	for b.Loop() {
		if _, _, err := s.Apply(Drop(benchScan(s))); err != nil {
			b.Fatal(err)
		}
	}
}
