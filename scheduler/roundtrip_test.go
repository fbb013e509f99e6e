package scheduler

import (
	"bytes"
	"encoding/json"
	"math"
	"math/rand/v2"
	"reflect"
	"strings"
	"testing"
	"time"

	"pgregory.net/rapid"
)

// A campaign that is written and read is the same campaign, and writing it
// again gives the same bytes.
func TestCampaignRoundTrip(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		c := anyCampaign(t)
		data, err := WriteCampaign(c)
		if err != nil {
			t.Fatal(err)
		}
		back, err := ReadCampaign(data)
		if err != nil {
			t.Fatalf("%v\n%s", err, data)
		}
		if !reflect.DeepEqual(back, c.Canonical()) || !back.Equal(c) {
			t.Fatalf("read back another campaign:\n%s", data)
		}
		again, err := WriteCampaign(back)
		if err != nil || !bytes.Equal(again, data) {
			t.Fatalf("written twice, %v:\n%s\n%s", err, data, again)
		}
	})
}

// The order of elements changes neither the meaning nor the bytes.
func TestCampaignOrderDoesNotMatter(t *testing.T) {
	c, err := ReadCampaign(readTestFile(t, "hard-1.json"))
	if err != nil {
		t.Fatal(err)
	}
	want, err := WriteCampaign(c)
	if err != nil {
		t.Fatal(err)
	}
	for seed := range uint64(5) {
		d := c.Clone()
		r := rand.New(rand.NewPCG(seed, 1))
		swapped(r, d.Telescopes)
		swapped(r, d.Sources)
		swapped(r, d.CadenceTargets)
		swapped(r, d.PhaseGoals)
		swapped(r, d.OverlapGoals)
		swapped(r, d.BandPairGoals)
		swapped(r, d.Blocks)
		swapped(r, d.History)
		swapped(r, d.Pins)
		for i := range d.Telescopes {
			swapped(r, d.Telescopes[i].Receivers)
		}
		if reflect.DeepEqual(c, d) {
			t.Fatal("the shuffle changed nothing")
		}
		got, err := WriteCampaign(d)
		if err != nil || !bytes.Equal(got, want) || !c.Equal(d) {
			t.Errorf("shuffle %d: other bytes or meaning, %v", seed, err)
		}
	}
}

// swapped shuffles a list.
func swapped[T any](r *rand.Rand, list []T) {
	r.Shuffle(len(list), func(i, j int) { list[i], list[j] = list[j], list[i] })
}

// The kept campaigns keep their meaning through the writer.
func TestKeptCampaignsRoundTrip(t *testing.T) {
	for _, name := range []string{"every-field", "small-1", "small-2", "medium-1", "medium-2", "hard-1", "large-1"} {
		c, err := ReadCampaign(readTestFile(t, name+".json"))
		if err != nil {
			t.Fatal(err)
		}
		data, err := WriteCampaign(c)
		if err != nil {
			t.Fatal(err)
		}
		back, err := ReadCampaign(data)
		if err != nil || !back.Equal(c) {
			t.Errorf("%s: another campaign after writing, %v", name, err)
		}
	}
}

// What is written leaves defaults out and keeps numbers as people write them.
func TestWriteCampaignLeavesDefaultsOut(t *testing.T) {
	c := everyField(t)
	data, err := WriteCampaign(c)
	if err != nil {
		t.Fatal(err)
	}
	text := string(data)
	for _, want := range []string{
		`{"id": "c2", "source": "SIM J1902+0307", "bands": ["L", "U"], "every_d": 14}`,
		`{"code": "W1", "bands": ["U", "L", "S"], "freq_mhz": 1700, "bandwidth_mhz": 1800, "npol": 2, "trec_k": 24, "gain_k_per_jy": 1.35}`,
		`"lost": [["2027-01-04T20:00:00Z", "2027-01-04T20:45:00.5Z"]]`,
		`"pbdot": -3e-13, "m2_msun": 0.28`,
		`"scatter_1ghz_s": 0.000002, `,
		`"overlap_goals": [` + "\n" + `  {"id": "o1", "source": "SIM J0412+1833", "bands": ["L"], "telescopes": ["ALT", "EQU"], "priority": 1.25, "overlap_min": 20, "every_d": 28}` + "\n ],",
	} {
		if !strings.Contains(text, want) {
			t.Errorf("not written: %s\nin %s", want, text)
		}
	}
	if !json.Valid(data) || data[len(data)-1] != '\n' {
		t.Error("not a JSON document that ends a line")
	}
}

// An invalid campaign or plan is not written.
func TestWriteRefusesWhatIsNotValid(t *testing.T) {
	c := everyField(t)
	c.Sources[0].RADeg = 400
	if data, err := WriteCampaign(c); err == nil || data != nil {
		t.Errorf("written: %s", data)
	}
	p := &Plan{Campaign: "x", From: FirstInstant, To: FirstInstant.Add(Week), Score: math.NaN()}
	if data, err := WritePlan(p); err == nil || data != nil ||
		!strings.Contains(err.Error(), "/score: score must be a finite number, not NaN") {
		t.Errorf("written: %s, %v", data, err)
	}
	p.Score, p.To = 0, p.From
	if _, err := WritePlan(p); err == nil ||
		err.Error() != "/to: to is 1972-01-01T00:00:00Z, not after from, 1972-01-01T00:00:00Z" {
		t.Errorf("an empty horizon: %v", err)
	}
}

// Canonical leaves the campaign itself alone, and turns instants to UTC.
func TestCanonicalIsACopy(t *testing.T) {
	c := everyField(t)
	c.Blocks[0], c.Blocks[2] = c.Blocks[2], c.Blocks[0]
	c.Start = c.Start.In(time.FixedZone("", 3600)).Add(400 * time.Microsecond)
	d := c.Canonical()
	if c.Blocks[0].ID != "T-0106" || d.Blocks[0].ID != "A-0104" {
		t.Error("the order of the campaign itself changed, or that of its copy did not")
	}
	if d.Start.Location() != time.UTC || !d.Start.Equal(c.Start.Truncate(time.Millisecond)) {
		t.Errorf("start %v", d.Start)
	}
	if !c.Equal(d) {
		t.Error("a campaign is not equal to its canonical form")
	}
}

// A clone shares nothing with its original.
func TestCloneIsDeep(t *testing.T) {
	c := everyField(t)
	want := everyField(t)
	d := c.Clone()
	if !reflect.DeepEqual(c, d) {
		t.Fatal("a clone differs")
	}
	scramble(reflect.ValueOf(d).Elem())
	if !reflect.DeepEqual(c, want) {
		t.Error("changing the clone changed the original")
	}
	if c.Equal(d) {
		t.Error("a changed clone is still equal")
	}
	az := 5.0
	p := &Plan{Scans: []Scan{{MotorAzDeg: &az, Earns: []Earning{{Value: 1}}}},
		Certificate: Certificate{Prices: map[string]float64{"a#1": 1}}}
	q := p.Clone()
	*q.Scans[0].MotorAzDeg, q.Scans[0].Earns[0].Value, q.Certificate.Prices["a#1"] = 6, 2, 3
	if az != 5 || p.Scans[0].Earns[0].Value != 1 || p.Certificate.Prices["a#1"] != 1 {
		t.Error("changing the clone changed the plan")
	}
}

// scramble changes every value inside v, following lists and pointers.
func scramble(v reflect.Value) {
	switch v.Kind() {
	case reflect.Struct:
		if v.Type() == timeType {
			v.Set(reflect.ValueOf(time.Unix(0, 0)))
			return
		}
		for i := range v.NumField() {
			scramble(v.Field(i))
		}
	case reflect.Slice, reflect.Array:
		for i := range v.Len() {
			scramble(v.Index(i))
		}
	case reflect.Pointer:
		if !v.IsNil() {
			scramble(v.Elem())
		}
	case reflect.String:
		v.SetString("changed")
	case reflect.Float64:
		v.SetFloat(-1234.5)
	case reflect.Int:
		v.SetInt(-77)
	case reflect.Bool:
		v.SetBool(!v.Bool())
	}
}

// A plan that is written and read is the same plan.
func TestPlanRoundTrip(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		p := anyPlan(t)
		data, err := WritePlan(p)
		if err != nil {
			t.Fatal(err)
		}
		back, err := ReadPlan(data)
		if err != nil {
			t.Fatalf("%v\n%s", err, data)
		}
		if !reflect.DeepEqual(back, p) {
			t.Fatalf("read back another plan:\n%s", data)
		}
		again, err := WritePlan(back)
		if err != nil || !bytes.Equal(again, data) {
			t.Fatalf("written twice, %v:\n%s\n%s", err, data, again)
		}
	})
}

// Numbers are written in the shortest form that reads back exactly.
func TestWriterNumbers(t *testing.T) {
	for _, x := range []struct {
		v    float64
		want string
	}{
		{0, "0"}, {math.Copysign(0, -1), "0"}, {1, "1"}, {-0.5, "-0.5"}, {0.1, "0.1"}, {1e-6, "0.000001"},
		{1.5e-7, "1.5e-7"}, {-3e-13, "-3e-13"},
		{1e-300, "1e-300"}, {123456789012345, "123456789012345"}, {1e15, "1e+15"}, {1e300, "1e+300"},
		{0.30000000000000004, "0.30000000000000004"},
	} {
		var w writer
		w.number(x.v)
		if got := string(w.b); got != x.want {
			t.Errorf("%v is written %s, want %s", x.v, got, x.want)
		}
	}
	rapid.Check(t, func(t *rapid.T) {
		v := anyFinite(t)
		var w writer
		w.number(v)
		var back float64
		if err := json.Unmarshal(w.b, &back); err != nil || back != v {
			t.Fatalf("%v is written %s, which reads %v, %v", v, w.b, back, err)
		}
	})
}
