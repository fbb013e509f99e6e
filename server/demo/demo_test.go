package demo

import (
	"bytes"
	"flag"
	"fmt"
	"math"
	"os"
	"reflect"
	"strings"
	"testing"
	"time"

	"cadencewright/scheduler"
)

var update = flag.Bool("update", false, "write testdata/campaigns/demo.json anew")

// The campaign kept in testdata: its seed and date.
const (
	keptFile = "../../testdata/campaigns/demo.json"
	keptSeed = 1
)

var keptDay = time.Date(2027, 1, 20, 9, 30, 0, 0, time.UTC)

// kept is the campaign that most tests look at, made once: tests only read it.
var kept = Generate(keptSeed, keptDay)

// The kept file is what the generator makes.
func TestGenerateIsTheKeptFile(t *testing.T) {
	got, err := scheduler.WriteCampaign(kept)
	if err != nil {
		t.Fatal(err)
	}
	if *update {
		if err := os.WriteFile(keptFile, got, 0o644); err != nil {
			t.Fatal(err)
		}
	}
	want, err := os.ReadFile(keptFile)
	if err != nil {
		t.Fatal(err)
	}
	if !bytes.Equal(got, want) {
		t.Errorf("the generator makes another campaign than %s; if that is meant, run: go test ./server/demo -update",
			keptFile)
	}
	back, err := scheduler.ReadCampaign(want)
	if err != nil || !back.Equal(kept) {
		t.Errorf("the kept file reads as another campaign, %v", err)
	}
}

// The campaign follows from the seed and the ISO week alone.
func TestGenerateRepeats(t *testing.T) {
	monday := scheduler.WeekStart(keptDay)
	for _, day := range []time.Time{monday, monday.Add(scheduler.Week - 1), keptDay.In(time.FixedZone("", 5*3600))} {
		if c := Generate(keptSeed, day); !reflect.DeepEqual(c, kept) {
			t.Errorf("%v gives another campaign than %v of the same week", day, keptDay)
		}
	}
	if Generate(keptSeed+1, keptDay).Equal(kept) {
		t.Error("another seed gives the same campaign")
	}
	if Generate(keptSeed, keptDay.Add(scheduler.Week)).Equal(kept) {
		t.Error("another week gives the same campaign")
	}
}

// Whatever the seed and the date, the campaign is valid and has its parts.
func TestGenerateIsAlwaysValid(t *testing.T) {
	r := stream(0, "seeds and days")
	for range 25 {
		seed := r.next()
		day := firstDay.Add(time.Duration(r.below(int(lastDay.Sub(firstDay)/time.Hour))) * time.Hour)
		t.Run(fmt.Sprintf("%d %s", seed, day.Format(time.DateOnly)), func(t *testing.T) {
			checkShape(t, Generate(seed, day), scheduler.WeekStart(day))
		})
	}
}

// Dates outside the tabulated years are moved to the nearest inside.
func TestGenerateOutsideTheYears(t *testing.T) {
	for _, x := range []struct{ day, as time.Time }{
		{time.Time{}, firstDay}, {time.Date(1901, 1, 1, 0, 0, 0, 0, time.UTC), firstDay},
		{time.Date(3000, 1, 1, 0, 0, 0, 0, time.UTC), lastDay},
	} {
		c := Generate(1, x.day)
		if err := c.Validate(); err != nil {
			t.Errorf("%v: %v", x.day, err)
		}
		if !c.Equal(Generate(1, x.as)) {
			t.Errorf("%v is not taken as %v", x.day, x.as)
		}
	}
}

// checkShape checks what every demo campaign must be.
func checkShape(t *testing.T, c *scheduler.Campaign, monday time.Time) {
	if err := c.Validate(); err != nil {
		t.Fatal(err)
	}
	if len(c.Telescopes) != 5 || len(c.Sources) != sourceCount {
		t.Errorf("%d telescopes and %d sources", len(c.Telescopes), len(c.Sources))
	}
	goals := map[scheduler.GoalKind]int{}
	all := 0
	c.EachGoal(func(kind scheduler.GoalKind, _ int, _ *scheduler.Goal) { goals[kind]++; all++ })
	if all < 100 || all > 120 || goals[scheduler.KindCadence] < 60 || goals[scheduler.KindPhase] != 16 ||
		goals[scheduler.KindOverlap] < 8 || goals[scheduler.KindBandPair] < 10 {
		t.Errorf("%d goals: %v", all, goals)
	}
	binaries := 0
	for i := range c.Sources {
		if c.Sources[i].Binary != nil {
			binaries++
		}
	}
	if binaries != 14 {
		t.Errorf("%d binaries", binaries)
	}
	end := monday.Add(comingWeeks * scheduler.Week)
	for _, b := range c.Blocks {
		if b.Start.Before(monday) || !b.Start.Before(end) {
			t.Errorf("block %s starts %v, outside the coming weeks", b.ID, b.Start)
		}
	}
	if got := scheduler.DefaultHorizon(c); !got.From.Equal(monday) {
		t.Errorf("the week to plan starts %v, want %v", got.From, monday)
	}
	for _, h := range c.History {
		if h.Start.Before(monday.Add(-pastWeeks*scheduler.Week)) || h.Start.After(monday.Add(6*time.Hour)) {
			t.Errorf("%s observed %v, outside the past weeks", h.Source, h.Start)
		}
	}
	if n := len(c.History); n < 300 || n > 900 {
		t.Errorf("%d scans of history", n)
	}
}

func TestTelescopes(t *testing.T) {
	mounts := map[scheduler.MountKind]int{}
	continents := map[string]bool{}
	far, wide, wrap := 0, 0, 0
	for i := range kept.Telescopes {
		tel := &kept.Telescopes[i]
		mounts[tel.Mount]++
		continents[strings.Split(tel.Timezone, "/")[0]] = true
		if math.Abs(tel.LatitudeDeg) > 60 {
			far++
		}
		if tel.AzimuthRangeDeg[1]-tel.AzimuthRangeDeg[0] > 360 {
			wrap++
		}
		for _, r := range tel.Receivers {
			if len(r.Bands) >= 3 {
				wide++
			}
		}
	}
	if mounts[scheduler.MountAltAz] != 3 || mounts[scheduler.MountEquatorial] != 1 ||
		mounts[scheduler.MountTransit] != 1 {
		t.Errorf("mounts %v", mounts)
	}
	if len(continents) != 3 || far != 1 || wide != 1 || wrap != 3 {
		t.Errorf("continents %v, %d beyond 60 degrees, %d wide-band receivers, %d with a cable wrap", continents, far,
			wide, wrap)
	}
}

// Random streams of one seed and several purposes differ, and have the moments
// they should.
func TestRandom(t *testing.T) {
	if stream(1, "a").next() == stream(1, "b").next() || stream(1, "a").next() == stream(2, "a").next() {
		t.Error("two streams begin alike")
	}
	// The published first value of splitmix64 for seed 1234567.
	if got := (&random{1234567}).next(); got != 6457827717110365317 {
		t.Errorf("splitmix64 of 1234567 gives %d", got)
	}
	r := stream(7, "moments")
	const n = 20000
	var uniform, normal, square float64
	seen := map[int]int{}
	for range n {
		uniform += r.float() / n
		x := r.normal()
		normal += x / n
		square += x * x / n
		seen[r.below(5)]++
	}
	if math.Abs(uniform-0.5) > 0.01 || math.Abs(normal) > 0.03 || math.Abs(square-1) > 0.05 {
		t.Errorf("means %.3f of uniform, %.3f and %.3f of normal and its square", uniform, normal, square)
	}
	for k, count := range seen {
		if k < 0 || k > 4 || math.Abs(float64(count)-n/5) > n/50 {
			t.Errorf("%d came %d times of %d", k, count, n)
		}
	}
	used := map[int]bool{}
	for _, i := range r.shuffled(100) {
		used[i] = true
	}
	if len(used) != 100 {
		t.Errorf("a shuffle of 100 holds %d numbers", len(used))
	}
}

func TestRounding(t *testing.T) {
	for _, x := range []struct{ got, want float64 }{
		{round(1.23456, 2), 1.23}, {round(-1.235001, 2), -1.24}, {significant(0.0012345, 2), 0.0012},
		{significant(98765, 3), 98800}, {significant(0, 3), 0}, {significant(-2.5e-13, 1), -3e-13},
	} {
		if math.Abs(x.got-x.want) > 1e-9*math.Abs(x.want) {
			t.Errorf("%v, want %v", x.got, x.want)
		}
	}
}
