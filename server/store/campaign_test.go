package store_test

import (
	"context"
	"errors"
	"math"
	"os"
	"reflect"
	"slices"
	"strings"
	"sync"
	"testing"
	"time"

	"pgregory.net/rapid"

	"cadencewright/scheduler"
	"cadencewright/server/store"
	"cadencewright/server/store/storetest"
	"cadencewright/testdata"
)

func campaign(t testing.TB, name string) *scheduler.Campaign {
	t.Helper()
	data, err := os.ReadFile(testdata.Path("campaigns", name+".json"))
	if err != nil {
		t.Fatal(err)
	}
	c, err := scheduler.ReadCampaign(data)
	if err != nil {
		t.Fatal(err)
	}
	return c
}

// What goes in comes out: the same meaning, the same canonical bytes, whatever
// the order that it came in.
func TestCampaignComesBack(t *testing.T) {
	t.Parallel()
	s := storetest.Open(t, nil)
	files, err := os.ReadDir(testdata.Path("campaigns"))
	if err != nil {
		t.Fatal(err)
	}
	live := ""
	for _, f := range files {
		name, isCampaign := strings.CutSuffix(f.Name(), ".json")
		if !isCampaign {
			continue
		}
		c := campaign(t, name)
		slices.Reverse(c.Telescopes)
		slices.Reverse(c.Sources)
		slices.Reverse(c.Blocks)
		slices.Reverse(c.History)
		id, err := s.ImportCampaign(t.Context(), c, "tester")
		if err != nil {
			t.Fatalf("%s: %v", name, err)
		}
		back, ref, err := s.LoadCampaign(t.Context(), id)
		if err != nil {
			t.Fatalf("%s: %v", name, err)
		}
		if live == "" {
			live = name
		}
		if ref.Live != (name == live) || ref.Revision != 1 || ref.Name != c.Name || !ref.Start.Equal(c.Start) || !ref.End.Equal(c.End) {
			t.Errorf("%s: %+v; the first campaign is the live one", name, ref)
		}
		want, err := scheduler.WriteCampaign(c)
		if err != nil {
			t.Fatal(err)
		}
		got, err := scheduler.WriteCampaign(back)
		if err != nil {
			t.Fatalf("%s: %v", name, err)
		}
		if string(got) != string(want) {
			if err := os.WriteFile(t.ArtifactDir()+"/got.json", got, 0o600); err != nil {
				t.Error(err)
			}
			t.Errorf("%s: the exported campaign is not the imported one", name)
		}
		if !reflect.DeepEqual(back, back.Canonical()) {
			t.Errorf("%s: it is not in canonical order", name)
		}
	}
	if live == "" {
		t.Fatal("no campaigns to test with")
	}
	if _, err := s.ImportCampaign(t.Context(), campaign(t, live), "tester"); err == nil {
		t.Error("the same name again was taken")
	} else {
		wantField(t, "the same name again", err, scheduler.ErrConflict, "name")
	}
}

// leaves are pointers to every value inside a value.
func leaves(v reflect.Value) []reflect.Value {
	var all []reflect.Value
	switch v.Kind() {
	case reflect.Struct:
		if v.Type() == reflect.TypeFor[time.Time]() {
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

// nudge changes a value by as little as can be.
func nudge(v reflect.Value) {
	switch v.Kind() {
	case reflect.Struct:
		v.Set(reflect.ValueOf(v.Interface().(time.Time).Add(time.Millisecond)))
	case reflect.Float64:
		v.SetFloat(math.Nextafter(v.Float(), math.Inf(1)))
	case reflect.Int:
		v.SetInt(v.Int() + 1)
	case reflect.Bool:
		v.SetBool(!v.Bool())
	case reflect.String:
		v.SetString(v.String() + "'")
	}
}

// No column is forgotten or rounds: the smallest change of any single value of a
// campaign that uses every field is kept.
func TestEveryValueIsKept(t *testing.T) {
	t.Parallel()
	s := storetest.Open(t, nil)
	base := campaign(t, "every-field")
	changed := 0
	for i, n := 0, len(leaves(reflect.ValueOf(base).Elem())); i < n; i++ {
		c := base.Clone()
		nudge(leaves(reflect.ValueOf(c).Elem())[i])
		if c.Validate() != nil || c.Equal(base) { // a name that others refer to, a choice, an end of a range
			continue
		}
		changed++
		if c.Name == base.Name {
			c.Name = "change " + time.Duration(i).String()
		}
		id, err := s.ImportCampaign(t.Context(), c, "tester")
		if err != nil {
			t.Errorf("value %d: %v", i, err)
			continue
		}
		back, _, err := s.LoadCampaign(t.Context(), id)
		if err != nil {
			t.Fatal(err)
		}
		if !back.Equal(c) {
			t.Errorf("value %d changed to %v was not kept", i, leaves(reflect.ValueOf(c).Elem())[i])
		}
	}
	if changed < 100 {
		t.Errorf("only %d values were tried", changed)
	}
}

// Any campaign at all comes back.
func TestAnyCampaignComesBack(t *testing.T) {
	t.Parallel()
	s := storetest.Open(t, nil)
	rapid.Check(t, func(rt *rapid.T) {
		c := anyCampaign(rt)
		if err := c.Validate(); err != nil {
			rt.Fatalf("the generator makes invalid campaigns: %v", err)
		}
		id, err := s.ImportCampaign(context.Background(), c, "tester")
		if errors.Is(err, scheduler.ErrConflict) {
			return // the name was drawn before
		}
		if err != nil {
			rt.Fatal(err)
		}
		back, _, err := s.LoadCampaign(context.Background(), id)
		if err != nil {
			rt.Fatal(err)
		}
		if !reflect.DeepEqual(back, c.Canonical()) {
			rt.Fatalf("%+v came back as %+v", c.Canonical(), back)
		}
	})
}

// A campaign that is not valid is refused with all its problems, and nothing of
// it is stored.
func TestInvalidCampaignIsRefused(t *testing.T) {
	t.Parallel()
	s := storetest.Open(t, nil)
	c := array("bad")
	c.Sources[0].PeriodS, c.Blocks[0].Telescope = -1, "CCC"
	_, err := s.ImportCampaign(t.Context(), c, "tester")
	var problems scheduler.Problems
	if !errors.As(err, &problems) || len(problems) < 2 {
		t.Errorf("refused with %v", err)
	}
	if list, err := s.Campaigns(t.Context()); err != nil || len(list) != 0 {
		t.Errorf("%d campaigns are stored (%v)", len(list), err)
	}
}

func TestLiveCampaign(t *testing.T) {
	t.Parallel()
	s := storetest.Open(t, nil)
	ctx := t.Context()
	if _, err := s.LiveCampaign(ctx); !errors.Is(err, scheduler.ErrNotFound) || !strings.Contains(err.Error(), "import") {
		t.Errorf("with no campaign: %v", err)
	}
	var ids []int64
	for _, name := range []string{"one", "two"} {
		id, err := s.ImportCampaign(ctx, array(name), "ada")
		if err != nil {
			t.Fatal(err)
		}
		ids = append(ids, id)
	}
	for _, want := range []int{0, 1, 1, 0} {
		if err := s.SetLive(ctx, ids[want], "ada"); err != nil {
			t.Fatal(err)
		}
		if ref, err := s.LiveCampaign(ctx); err != nil || ref.ID != ids[want] {
			t.Errorf("live is %+v (%v), want %d", ref, err, ids[want])
		}
	}
	list, err := s.Campaigns(ctx)
	if err != nil || len(list) != 2 || !list[0].Live || list[1].Live {
		t.Errorf("campaigns %+v, %v", list, err)
	}
	if err := s.SetLive(ctx, 4711, "ada"); !errors.Is(err, scheduler.ErrNotFound) {
		t.Errorf("a campaign that is not there: %v", err)
	}
	if ref, err := s.LiveCampaign(ctx); err != nil || ref.ID != ids[0] {
		t.Errorf("after that, live is %+v (%v)", ref, err)
	}
	if _, _, err := s.LoadCampaign(ctx, 4711); !errors.Is(err, scheduler.ErrNotFound) || !strings.Contains(err.Error(), "4711") {
		t.Errorf("loading a campaign that is not there: %v", err)
	}
	lines, err := s.Journal(ctx, ids[0], 0, 10)
	if err != nil || len(lines) != 3 || lines[0].Action != "live" {
		t.Errorf("journal %+v, %v", lines, err)
	}
}

// Imports at once: of one name one wins, and of all only one is live.
func TestImportsAtOnce(t *testing.T) {
	t.Parallel()
	s := storetest.Open(t, nil)
	var group sync.WaitGroup
	results := make(chan error, 12)
	for i := range 12 {
		group.Go(func() {
			_, err := s.ImportCampaign(context.Background(), array([]string{"one", "two", "three"}[i%3]), "somebody")
			results <- err
		})
	}
	group.Wait()
	close(results)
	done := 0
	for err := range results {
		if err == nil {
			done++
		} else {
			wantField(t, "an import", err, scheduler.ErrConflict, "name")
		}
	}
	if done != 3 {
		t.Errorf("%d imports of three names were done", done)
	}
	list, err := s.Campaigns(t.Context())
	live := 0
	for _, c := range list {
		if c.Live {
			live++
		}
	}
	if err != nil || len(list) != 3 || live != 1 {
		t.Errorf("%d campaigns, %d of them live (%v)", len(list), live, err)
	}
}

// A reader sees a campaign as it was at one moment, whatever is written
// meanwhile: its revision says exactly how many scans were reported as made.
func TestSnapshotIsOfOneMoment(t *testing.T) {
	t.Parallel()
	w := newWorld(t)
	var scans []scheduler.Scan
	for i := range 20 {
		scans = append(scans, scan("a1", 30*i, 1+i%3))
	}
	plan := w.issue(scans...)
	w.clock.set(monday.Add(24 * time.Hour))
	reported := make(chan error, 1)
	go func() {
		for _, x := range w.scans(plan) {
			if _, err := w.report(x.ID, store.ScanDone); err != nil {
				reported <- err
				return
			}
		}
		reported <- nil
	}()
	for seen := 0; seen < len(scans); {
		c, ref, err := w.LoadCampaign(t.Context(), w.id)
		if err != nil {
			t.Fatal(err)
		}
		if int(ref.Revision) != 1+len(c.History) || len(c.History) < seen {
			t.Fatalf("revision %d with %d scans made, %d before", ref.Revision, len(c.History), seen)
		}
		seen = len(c.History)
		select {
		case err := <-reported:
			if err != nil {
				t.Fatal(err)
			}
			seen = len(scans)
		default:
		}
	}
}
