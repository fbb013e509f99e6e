package main

import (
	"bytes"
	"context"
	"fmt"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"cadencewright/testdata"
)

// tryRun runs the program inside the test.
func tryRun(stdin string, args ...string) (code int, stdout, stderr string) {
	var out, errs bytes.Buffer
	code = run(context.Background(), args, strings.NewReader(stdin), &out, &errs)
	return code, out.String(), errs.String()
}

// manySources is a list of n sources for a campaign file.
func manySources(n int) string {
	one := `{"name": "SIM %05d", "ra_deg": 1, "dec_deg": 2, "period_s": 0.005, "dm_pc_cm3": 3, "flux_mjy": 1, "flux_freq_mhz": 1400, ` +
		`"spectral_index": -1.6, "width_s": 0.0002, "scan_minutes": [30]}`
	list := make([]string, n)
	for i := range list {
		list[i] = fmt.Sprintf(one, i)
	}
	return `"sources": [` + strings.Join(list, ",\n")
}

// TestBadCampaigns changes one thing in a good campaign and sees every command
// that reads campaigns refuse it: exit code 2, one message that names the
// place and the fault, nothing on standard output, no file.
func TestBadCampaigns(t *testing.T) {
	good, err := os.ReadFile(testdata.Path("campaigns", "every-field.json"))
	if err != nil {
		t.Fatal(err)
	}
	tests := []struct {
		name, old, new string
		says           []string
	}{
		{"unknown key", `"grid_min": 5`, `"grid_mins": 5`, []string{"/campaign/grid_mins"}},
		{"a name in another case", `"sun_min_deg": 5`, `"Sun_min_deg": 5`, []string{"/telescopes/0/Sun_min_deg"}},
		{"wrong unit: milliseconds", `"period_s": 0.0046875`, `"period_s": 469`, []string{"/sources/0/period_s", "469", "seconds"}},
		{"wrong unit: hertz", `"freq_mhz": 1420`, `"freq_mhz": 1420000000`, []string{"/telescopes/1/receivers/0/freq_mhz", "MHz"}},
		{"not a number", `"flux_mjy": 1.75`, `"flux_mjy": NaN`, []string{"NaN"}},
		{"infinite", `"flux_mjy": 1.75`, `"flux_mjy": 1e999`, []string{"/sources/0/flux_mjy"}},
		{"text for a number", `"flux_mjy": 1.75`, `"flux_mjy": "1.75"`, []string{"/sources/0/flux_mjy"}},
		{"a year-long block", `"end": "2027-01-05T02:30:00Z"`, `"end": "2028-01-04T17:00:00Z"`, []string{"/blocks/0"}},
		{"a block that ends before it starts", `"end": "2027-01-05T02:30:00Z"`, `"end": "2027-01-04T02:30:00Z"`, []string{"/blocks/0/end"}},
		{"a local time", `"start": "2027-01-04T17:00:00Z"`, `"start": "2027-01-04T17:00:00+01:00"`, []string{"/blocks/0/start"}},
		{"a dangling reference", `"source": "SIM J1902+0307", "bands": ["L", "U"], "every_d": 14}`, `"source": "SIM J1902+0308", "bands": ["L", "U"], "every_d": 14}`,
			[]string{"/cadence_targets/1/source", "SIM J1902+0308"}},
		{"a key twice", `"every_d": 7,`, `"every_d": 7, "every_d": 8,`, []string{"/cadence_targets/0", "every_d"}},
		{"two faults, both named", `"every_d": 7, "early_d": 2`, `"every_d": -7, "early_d": "x"`, []string{"2 problems", "/every_d", "/early_d"}},
		{"10,000 sources", `"sources": [`, manySources(10_000) + ",", []string{"/sources", "5000"}},
		{"half a file", `"band_pair_goals"`, "\x00", []string{"every.json"}},
		{"no zone", `"Europe/Berlin"`, `"Europe/Atlantis"`, []string{"/telescopes/0/timezone", "Europe/Atlantis"}},
	}
	for _, tt := range tests {
		t.Run(tt.name, func(t *testing.T) {
			if strings.Count(string(good), tt.old) < 1 {
				t.Fatalf("the good campaign has no %q", tt.old)
			}
			dir := t.TempDir()
			path, plan := filepath.Join(dir, "every.json"), filepath.Join(dir, "plan.json")
			if err := os.WriteFile(path, []byte(strings.Replace(string(good), tt.old, tt.new, 1)), 0o600); err != nil {
				t.Fatal(err)
			}
			for _, args := range [][]string{
				{"plan", path, "--out", plan},
				{"check", path, path},
				{"sky", path, "--source", "SIM J0412+1833"},
				{"orbit", path},
			} {
				code, stdout, stderr := tryRun("", args...)
				if code != exitUsage || stdout != "" {
					t.Errorf("%s: exit code %d, standard output %q", args[0], code, stdout)
				}
				if strings.Count(stderr, "cadencewright "+args[0]+":") != 1 || strings.Contains(stderr, "goroutine") {
					t.Errorf("%s: standard error %q", args[0], stderr)
				}
				for _, s := range tt.says {
					if !strings.Contains(stderr, s) {
						t.Errorf("%s: %q does not say %q", args[0], stderr, s)
					}
				}
			}
			onlyFile(t, dir, "every.json")
		})
	}
}

// TestBadPlans hands check plans that cannot be judged.
func TestBadPlans(t *testing.T) {
	campaign := testdata.Path("campaigns", "every-field.json")
	head := `{"format": "plan/1", "campaign": "Every field", "from": "2027-01-04T00:00:00Z", "to": "2027-01-11T00:00:00Z", "score": 0, ` +
		`"possible": 0, "bound": 0, "scans": [], "unmet": [], "certificate": {"prices": {}, "bound": 0}`
	tests := []struct{ name, plan, says string }{
		{"nothing", "", "plan"},
		{"no JSON", "score 12", "plan"},
		{"a list", "[]", "plan"},
		{"unknown key", head + `, "comment": "x"}`, "/comment"},
		{"another campaign", strings.Replace(head, "Every field", "Another", 1) + "}", `the plan is for campaign "Another", not for "Every field"`},
		{"a horizon backwards", strings.Replace(head, "2027-01-11", "2027-01-01", 1) + "}", "/to"},
		{"a score that is none", strings.Replace(head, `"score": 0`, `"score": null`, 1) + "}", "/score"},
		{"a price that is text", strings.Replace(head, `"prices": {}`, `"prices": {"c1#1": "x"}`, 1) + "}", "/certificate/prices/c1#1"},
	}
	for _, tt := range tests {
		t.Run(tt.name, func(t *testing.T) {
			code, stdout, stderr := tryRun(tt.plan, "check", campaign, "-")
			if code != exitUsage || stdout != "" || !strings.Contains(stderr, tt.says) {
				t.Errorf("exit code %d, standard output %q, standard error %q; want it to say %q", code, stdout, stderr, tt.says)
			}
		})
	}
}

// TestStoppedCheck ends a check by its context, as Ctrl-C does.
func TestStoppedCheck(t *testing.T) {
	campaign := testdata.Path("campaigns", "medium-1.json")
	dir := t.TempDir()
	plan := filepath.Join(dir, "plan.json")
	if code, _, stderr := tryRun("", "plan", campaign, "--effort", "1", "--out", plan); code != exitOK {
		t.Fatalf("exit code %d: %s", code, stderr)
	}
	ctx, cancel := context.WithCancel(context.Background())
	cancel()
	var out, errs bytes.Buffer
	if code := run(ctx, []string{"check", campaign, plan}, strings.NewReader(""), &out, &errs); code != exitFailed ||
		out.Len() > 0 || !strings.Contains(errs.String(), "stopped before the end") {
		t.Errorf("exit code %d, standard output %q, standard error %q", code, out.String(), errs.String())
	}
}

// TestStoppedBeforeTheSearch ends a plan before the sky has been read, by
// Ctrl-C and by time: one line that says so, exit code 1, no file, and a file
// that was there stays as it was.
func TestStoppedBeforeTheSearch(t *testing.T) {
	campaign := testdata.Path("campaigns", "medium-1.json")
	dir := t.TempDir()
	old := filepath.Join(dir, "old.json")
	if err := os.WriteFile(old, []byte("as it was"), 0o600); err != nil {
		t.Fatal(err)
	}
	gone, cancel := context.WithCancel(context.Background())
	cancel()
	for _, c := range []struct {
		name string
		ctx  context.Context
		args []string
		says string
	}{
		{"Ctrl-C", gone, nil, "interrupted before a search could begin"},
		{"no time", context.Background(), []string{"--seconds", "1e-9"}, "the 1e-09 s of --seconds were over before a search could begin"},
	} {
		for _, file := range []string{filepath.Join(dir, "new.json"), old, "-"} {
			var out, errs bytes.Buffer
			code := run(c.ctx, append([]string{"plan", campaign, "--out", file}, c.args...), strings.NewReader(""), &out, &errs)
			if code != exitFailed || out.Len() > 0 || !strings.Contains(errs.String(), c.says) || !strings.Contains(errs.String(), "nothing was written") ||
				strings.Count(errs.String(), "\n") != 1 {
				t.Errorf("%s: exit code %d, standard output %q, standard error %q", c.name, code, out.String(), errs.String())
			}
		}
	}
	onlyFile(t, dir, "old.json")
	if b, err := os.ReadFile(old); err != nil || string(b) != "as it was" {
		t.Errorf("the file that was there: %q, %v", b, err)
	}
}
