package scheduler

import (
	"math"
	"reflect"
	"strings"
	"sync"
	"testing"
	"time"

	"pgregory.net/rapid"
)

// leaves are pointers to every number, text and instant inside a value.
func leaves(v reflect.Value) []reflect.Value {
	var all []reflect.Value
	switch v.Kind() {
	case reflect.Struct:
		if v.Type() == timeType {
			return []reflect.Value{v}
		}
		for i := range v.NumField() {
			all = append(all, leaves(v.Field(i))...)
		}
	case reflect.Slice, reflect.Array:
		for i := range v.Len() {
			all = append(all, leaves(v.Index(i))...)
		}
	case reflect.Pointer:
		if !v.IsNil() {
			all = leaves(v.Elem())
		}
	default:
		all = []reflect.Value{v}
	}
	return all
}

// disturb changes one leaf to something unlikely.
func disturb(t *rapid.T, v reflect.Value) {
	switch v.Kind() {
	case reflect.Float64:
		v.SetFloat(rapid.SampledFrom([]float64{0, -1, 1, 0.5, 90, 1e4, -1e9, 1e9, 1e-9}).Draw(t, "float"))
	case reflect.Int:
		v.SetInt(rapid.SampledFrom([]int64{0, -1, 1, 7, 30, 100000}).Draw(t, "int"))
	case reflect.String:
		v.SetString(rapid.SampledFrom([]string{"", "x", "a#1", "T0", "kepler", "altaz", "UTC"}).Draw(t, "string"))
	case reflect.Bool:
		v.SetBool(!v.Bool())
	case reflect.Struct:
		v.Set(reflect.ValueOf(rapid.SampledFrom([]time.Time{FirstInstant, EndInstant.Add(-time.Millisecond), EndInstant.Add(-Week)}).Draw(t, "time")))
	}
}

// A campaign changed at random in memory: Validate and, where it can be written
// at all, the reader agree on whether it is valid, and on why.
func TestValidateAgreesWithTheReader(t *testing.T) {
	both, neither := 0, 0
	rapid.Check(t, func(t *rapid.T) {
		c := anyCampaign(t)
		all := leaves(reflect.ValueOf(c).Elem())
		for range rapid.IntRange(1, 2).Draw(t, "changes") {
			disturb(t, all[rapid.IntRange(0, len(all)-1).Draw(t, "leaf")])
		}
		invalid := c.Validate()
		data, err := writeFile(&campaignFile, c)
		if err != nil {
			if invalid == nil {
				t.Fatalf("valid, but not to be written: %v", err)
			}
			return
		}
		back, refused := ReadCampaign(data)
		switch {
		case invalid == nil && refused == nil:
			both++
			if !back.Equal(c) {
				t.Fatalf("another campaign after writing:\n%s", data)
			}
		case invalid == nil:
			t.Fatalf("valid in memory, but the file is not: %v\n%s", refused, data)
		case refused != nil:
			neither++
		default:
			// Writing left out what does not belong or is absent in memory: then
			// only fields of another mount or model can be the reason.
			for _, p := range invalid.(Problems) { //nolint:errorlint // Validate returns nothing else
				if !strings.Contains(p.Message, " belongs to ") && !isAbsent(p.Message) {
					t.Fatalf("invalid in memory (%v), but the file reads:\n%s", p, data)
				}
			}
		}
	})
	if both == 0 || neither == 0 {
		t.Errorf("%d valid and %d invalid campaigns: the test tests too little", both, neither)
	}
}

// isAbsent recognises a problem of a value that the file leaves out, as it
// leaves out an empty text or list, or a zero that stands for none.
func isAbsent(message string) bool {
	return strings.Contains(message, " is empty; ") || strings.Contains(message, " is 0; ")
}

// Every list has its limit, in memory as in a file.
func TestEveryListHasItsLimit(t *testing.T) {
	grown := func(v reflect.Value, n int) { v.Set(reflect.MakeSlice(v.Type(), n, n)) }
	c := everyField(t)
	p, err := ReadPlan([]byte(planText))
	if err != nil {
		t.Fatal(err)
	}
	for _, x := range []struct {
		list    any // a pointer to it
		most    int
		pointer string
	}{
		{&c.Telescopes, MaxTelescopes, "/telescopes"},
		{&c.Sources, MaxSources, "/sources"},
		{&c.CadenceTargets, MaxGoals, "/cadence_targets"},
		{&c.PhaseGoals, MaxGoals, "/phase_goals"},
		{&c.OverlapGoals, MaxGoals, "/overlap_goals"},
		{&c.BandPairGoals, MaxGoals, "/band_pair_goals"},
		{&c.Blocks, MaxBlocks, "/blocks"},
		{&c.Pins, MaxPins, "/pins"},
		{&c.Telescopes[0].Receivers, MaxReceivers, "/telescopes/0/receivers"},
		{&c.Telescopes[0].Horizon, MaxHorizon, "/telescopes/0/horizon"},
		{&c.Telescopes[0].Receivers[0].Bands, MaxBands, "/telescopes/0/receivers/0/bands"},
		{&c.Sources[0].ScanMinutes, MaxScanLengths, "/sources/0/scan_minutes"},
		{&c.PhaseGoals[0].Windows, MaxWindows, "/phase_goals/0/windows"},
		{&c.CadenceTargets[0].Telescopes, MaxTelescopes, "/cadence_targets/0/telescopes"},
		{&c.Blocks[0].Lost, MaxLost, "/blocks/0/lost"},
		{&c.Blocks[0].Receivers, MaxReceivers, "/blocks/0/receivers"},
		{&p.Scans[0].Earns, MaxScanEarns, "/scans/0/earns"},
		{&p.Unmet[0].Reasons, MaxReasons, "/unmet/0/reasons"},
	} {
		v := reflect.ValueOf(x.list).Elem()
		kept := reflect.ValueOf(v.Interface())
		for n, tooLong := range map[int]bool{x.most: false, x.most + 1: true} {
			grown(v, n)
			var k checker
			campaignFile.check(&k, c)
			planFile.check(&k, p)
			// Only the list itself matters, not the empty things in it, of which
			// there may be too many to list.
			if got := k.reporter.bad[x.pointer]; got != tooLong {
				t.Errorf("%s with %d items: refused is %v", x.pointer, n, got)
			}
		}
		v.Set(kept)
	}
	// The longest lists, without the items.
	for _, x := range []struct {
		of   *table
		key  string
		most int
	}{{&campaignFile, "history", MaxHistory}, {&planFile, "scans", MaxPlanScans}, {&planFile, "unmet", MaxPlanUnits}} {
		counts := x.of.fields[x.of.find([]byte(x.key), 0)].kind.(interface{ count(*checker, int) })
		for n, tooLong := range map[int]bool{x.most: false, x.most + 1: true} {
			var k checker
			k.enterKey(x.key)
			if counts.count(&k, n); (k.err() != nil) != tooLong {
				t.Errorf("%s with %d items: %v", x.key, n, k.err())
			}
		}
	}
}

// Readers and writers share nothing that changes: many at once do not disturb
// each other.
func TestManyReadersAtOnce(t *testing.T) {
	data := readTestFile(t, "small-1.json")
	want, err := ReadCampaign(data)
	if err != nil {
		t.Fatal(err)
	}
	broken := edited(t, data, "/sources/0/ra_deg", math.MaxFloat64)
	var group sync.WaitGroup
	for range 8 {
		group.Go(func() {
			c, err := ReadCampaign(data)
			if err != nil || !c.Equal(want) {
				t.Errorf("another campaign, %v", err)
			}
			if _, err := WriteCampaign(want); err != nil {
				t.Error(err)
			}
			if _, err := ReadCampaign(broken); err == nil {
				t.Error("a broken file is accepted")
			}
			CampaignSchema()
		})
	}
	group.Wait()
}
