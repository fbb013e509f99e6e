package verify

import (
	"fmt"
	"math/rand/v2"
	"testing"
	"time"

	"cadencewright/scheduler"
)

// array invents a campaign of any size: telescopes around the northern
// hemisphere with a block of eight hours a day, sources all over the sky.
func array(telescopes, sources, days int) *scheduler.Campaign {
	rnd := rand.New(rand.NewPCG(7, 7))
	c := &scheduler.Campaign{Name: "array", Start: monday, End: monday.AddDate(0, 0, days), GridMin: 1}
	for i := range telescopes {
		t := scheduler.Telescope{Code: fmt.Sprintf("T%d", i), Name: "T", LongitudeDeg: float64(i)*360/float64(telescopes) - 180,
			LatitudeDeg: 20 + 40*rnd.Float64(), Timezone: "Etc/UTC", Mount: scheduler.MountAltAz, ElevationMinDeg: 10, ElevationMaxDeg: 88,
			SunMinDeg: 3, SetupS: 600, CalS: 60, SwitchS: 60, SettleS: 20, AzimuthRangeDeg: [2]float64{-90, 450}, RateAzDegS: 0.5, RateElDegS: 0.3,
			Receivers: []scheduler.Receiver{receiverNamed("L", 1400, "L"), receiverNamed("S", 2500, "S"), receiverNamed("P", 350, "P")}}
		c.Telescopes = append(c.Telescopes, t)
		for d := range days {
			start := monday.AddDate(0, 0, d).Add(time.Duration(rnd.IntN(16*60)) * time.Minute)
			c.Blocks = append(c.Blocks, scheduler.Block{ID: fmt.Sprintf("%s-%d", t.Code, d), Telescope: t.Code, Start: start,
				End: start.Add(8 * time.Hour), Receivers: []string{"L", "S"}})
		}
	}
	for i := range sources {
		s := pulsar(fmt.Sprintf("SIM %d", i), 360*rnd.Float64(), -30+110*rnd.Float64())
		s.ScanMinutes = []int{20, 40, 60}
		c.Sources = append(c.Sources, s)
		id := fmt.Sprint(i)
		c.CadenceTargets = append(c.CadenceTargets, scheduler.CadenceTarget{Goal: goalFor("c"+id, s.Name, "L"), EveryD: 7, EarlyD: 2, TOAUs: 1})
		switch i % 3 {
		case 0:
			c.OverlapGoals = append(c.OverlapGoals, scheduler.OverlapGoal{Goal: goalFor("o"+id, s.Name, "L", "S"), Count: 2, OverlapMin: 20, EveryD: 14})
		case 1:
			c.BandPairGoals = append(c.BandPairGoals, scheduler.BandPairGoal{Goal: goalFor("p"+id, s.Name, "L", "S"), WithinH: 24, EveryD: 14})
		}
	}
	return c
}

// A certificate of one week, one core: six telescopes, 90 sources, 1 minute.
func BenchmarkBoundLarge(b *testing.B) { benchmarkBound(b, campaign(b, "large-1")) }

// Ten telescopes, 300 sources, four weeks at one minute.
func BenchmarkBoundFourWeeks(b *testing.B) { benchmarkBound(b, array(10, 300, 28)) }

func benchmarkBound(b *testing.B, c *scheduler.Campaign) {
	m, err := newModel(c, week(c))
	if err != nil {
		b.Fatal(err)
	}
	prices := pricesOf(m, somePrices(m))
	b.ReportAllocs()
	for b.Loop() {
		bound, err := m.bound(prices, Options{})
		if err != nil || bound <= 0 {
			b.Fatalf("bound %g, error %v", bound, err)
		}
	}
}

// A whole check of a good plan, certificate included.
func BenchmarkCheckMedium(b *testing.B) {
	c := campaign(b, "medium-1")
	p := greedyPlan(b, c, week(c))
	b.ReportAllocs()
	for b.Loop() {
		r, err := Check(c, p, Options{})
		if err != nil || !r.OK() {
			b.Fatalf("%v, error %v", r, err)
		}
	}
}
