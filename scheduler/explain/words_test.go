package explain

import "testing"

func TestWords(t *testing.T) {
	for _, x := range []struct {
		minutes float64
		want    string
	}{{0.4, "less than 1 min"}, {35, "35 min"}, {119, "119 min"}, {150, "2.5 h"}, {2879, "48.0 h"}, {2880, "2.0 d"}, {20000, "13.9 d"}} {
		if got := span(x.minutes); got != x.want {
			t.Errorf("%g minutes: %q, want %q", x.minutes, got, x.want)
		}
	}
	for _, x := range []struct {
		names []string
		or    string
		and   string
	}{{nil, "", ""}, {[]string{"L"}, "L", "L"}, {[]string{"L", "S"}, "L or S", "L and S"}, {[]string{"L", "S", "P"}, "L, S or P", "L, S and P"}} {
		if either(x.names) != x.or || both(x.names) != x.and {
			t.Errorf("%v: %q and %q", x.names, either(x.names), both(x.names))
		}
	}
	if got := clock(29999999.6); got != "2027-01-15 08:00 UTC" {
		t.Errorf("clock %q", got)
	}
	if blocks(1) != "1 block" || blocks(3) != "3 blocks" || times(1) != "once" || times(2) != "2 times" || blocksHave(1) != "1 block has" {
		t.Error("one and many")
	}
}
