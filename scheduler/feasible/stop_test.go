package feasible

import (
	"errors"
	"testing"

	"cadencewright/scheduler"
)

// However often stop is asked before it says true, building ends at once and
// with the named error; where it never does, it changes nothing.
func TestBuildStops(t *testing.T) {
	c := circumpolar(scheduler.MountEquatorial)
	c.Sources = append(c.Sources, c.Sources[0])
	c.Sources[1].Name = "SIM J0801+7001"
	second := c.CadenceTargets[0]
	second.ID, second.Source = "g2", c.Sources[1].Name
	c.CadenceTargets = append(c.CadenceTargets, second)
	late := c.Blocks[0]
	late.ID, late.Start, late.End = "late", after(300), after(500)
	c.Blocks = append(c.Blocks, late)
	h := scheduler.Horizon{From: c.Start, To: c.End}

	asked := 0
	p, err := BuildUntil(c, h, func() bool { asked++; return false })
	if err != nil || len(p.Blocks) != 2 {
		t.Fatalf("never stopped: %v", err)
	}
	all := asked
	if all != 1+2*2 { // at the start, and before each source of each block
		t.Errorf("stop was asked %d times, want 5", all)
	}
	for n := 1; n <= all; n++ {
		asked = 0
		p, err := BuildUntil(c, h, func() bool { asked++; return asked >= n })
		if !errors.Is(err, ErrStopped) || p != nil {
			t.Errorf("stopped when asked for the %d. time: %v", n, err)
		}
		if asked != n {
			t.Errorf("stop was asked %d times, want %d: the rest was done all the same", asked, n)
		}
	}
}
