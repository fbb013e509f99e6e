package units_test

import (
	"math"
	"os"
	"testing"

	"cadencewright/scheduler"
	"cadencewright/scheduler/units"
	"cadencewright/testdata"
)

// The figures of testdata/campaigns/README.md, made by another program.
func TestUnitsOfTheCampaigns(t *testing.T) {
	for _, c := range []struct {
		name     string
		units    int
		possible float64
	}{
		{"small-1", 31, 73.683}, {"small-2", 23, 47.084}, {"medium-1", 95, 237.083},
		{"medium-2", 91, 223.154}, {"hard-1", 174, 460.166}, {"large-1", 210, 560.579},
	} {
		data, err := os.ReadFile(testdata.Path("campaigns", c.name+".json"))
		if err != nil {
			t.Fatal(err)
		}
		camp, err := scheduler.ReadCampaign(data)
		if err != nil {
			t.Fatal(err)
		}
		s, err := units.Build(camp, scheduler.Horizon{From: camp.Start, To: camp.End})
		if err != nil {
			t.Fatal(err)
		}
		if len(s.Units) != c.units || math.Abs(s.Possible-c.possible) > 5e-4 {
			t.Errorf("%s: %d units worth %.4f, want %d worth %.3f", c.name, len(s.Units), s.Possible, c.units, c.possible)
		}
	}
}
