package scheduler

import (
	"fmt"
	"strings"
	"testing"
)

// BenchmarkReadCampaign reads a campaign of 180 kB.
func BenchmarkReadCampaign(b *testing.B) {
	data := readTestFile(b, "large-1.json")
	b.SetBytes(int64(len(data)))
	b.ReportAllocs()
	for b.Loop() {
		if _, err := ReadCampaign(data); err != nil {
			b.Fatal(err)
		}
	}
}

// BenchmarkWriteCampaign checks, sorts and writes it.
func BenchmarkWriteCampaign(b *testing.B) {
	c, err := ReadCampaign(readTestFile(b, "large-1.json"))
	if err != nil {
		b.Fatal(err)
	}
	for b.Loop() {
		if _, err := WriteCampaign(c); err != nil {
			b.Fatal(err)
		}
	}
}

// longHistory is a file near the size limit: good, or wrong in every row.
func longHistory(b *testing.B, source string) []byte {
	text := string(readTestFile(b, "every-field.json"))
	at := strings.Index(text, `"history": [`) + len(`"history": [`)
	row := fmt.Sprintf(`{"source": %q, "telescope": "ALT", "receiver": "L1", "start": "2026-12-28T19:05:00Z", "minutes": 30, "counted": true},`, source)
	n := min(MaxHistory-2, (MaxFileBytes-len(text))/len(row))
	return []byte(text[:at] + strings.Repeat(row, n) + text[at:])
}

func BenchmarkReadLargestFile(b *testing.B) {
	data := longHistory(b, "SIM J0412+1833")
	b.SetBytes(int64(len(data)))
	for b.Loop() {
		if _, err := ReadCampaign(data); err != nil {
			b.Fatal(err)
		}
	}
}

func BenchmarkReadLargestBrokenFile(b *testing.B) {
	data := longHistory(b, "SIM J0412+1834")
	b.SetBytes(int64(len(data)))
	for b.Loop() {
		if _, err := ReadCampaign(data); err == nil {
			b.Fatal("accepted")
		}
	}
}
