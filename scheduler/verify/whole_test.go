package verify

import (
	"os"
	"testing"

	"cadencewright/scheduler"
	"cadencewright/testdata"
)

// campaign reads one of the repository's campaigns.
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
