package main

import (
	"bytes"
	"os"
	"strings"
	"testing"
	"time"
)

// TestProgressLine runs the line on a clock of its own.
func TestProgressLine(t *testing.T) {
	var out bytes.Buffer
	clock := time.Date(2027, 1, 18, 0, 0, 0, 0, time.UTC)
	p := &progressLine{w: &out, now: func() time.Time { return clock }, start: clock}
	p.clear()
	if out.Len() != 0 {
		t.Errorf("nothing was shown, but clearing wrote %q", out.String())
	}
	p.show(10, 12.5, 0)
	clock = clock.Add(progressEvery / 2)
	p.show(20, 13, 0) // too soon
	clock = clock.Add(1950 * time.Millisecond)
	p.show(30, 15, 20)
	p.clear()
	want := "\r   0.0 s  effort 10  score 12.500\x1b[K" +
		"\r   2.0 s  effort 30  score 15.000  bound 20.000  gap 25.00 %\x1b[K" +
		"\r\x1b[K"
	if got := out.String(); got != want {
		t.Errorf("got  %q\nwant %q", got, want)
	}
}

func TestProgressOnlyOnATerminal(t *testing.T) {
	file, err := os.CreateTemp(t.TempDir(), "")
	if err != nil {
		t.Fatal(err)
	}
	defer file.Close()
	var buffer strings.Builder
	for _, p := range []*progressLine{newProgressLine(file), newProgressLine(&buffer)} {
		p.show(1, 1, 1)
		p.clear()
		if p.w != nil {
			t.Error("a file or a buffer was taken for a terminal")
		}
	}
	if info, _ := file.Stat(); info.Size() != 0 || buffer.Len() != 0 {
		t.Error("progress was written where there is no terminal")
	}
}

func TestGap(t *testing.T) {
	for _, tt := range []struct{ score, bound, want float64 }{{0, 0, 0}, {5, 0, 0}, {15, 20, 0.25}, {20, 20, 0}, {21, 20, 0}} {
		if got := gap(tt.score, tt.bound); got != tt.want {
			t.Errorf("score %v of %v: got %v, want %v", tt.score, tt.bound, got, tt.want)
		}
	}
}
